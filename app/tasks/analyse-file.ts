import { sha256, success, type Issue, type Result, type Watch } from "../base/index.ts";
import {
  analyse,
  withResampling,
  type AnalyseOptions,
  type Curves,
  type ResampledDraw,
  type ResamplingPlan,
} from "../analysis/index.ts";
import type { JudgeIssue, PowerSeriesIssue } from "../power/index.ts";
import {
  resolveProtocol,
  type Protocol,
  type ProtocolIssue,
  type RunglineResult,
} from "../protocol/index.ts";
import { readSpectrum, type Spectrum, type SpectrumIssue } from "../spectrum/index.ts";
import { readTable, type Table, type TableIssue } from "../table/index.ts";

export type TaskIssue =
  | TableIssue
  | SpectrumIssue
  | ProtocolIssue
  | JudgeIssue
  | PowerSeriesIssue
  | (Issue & { readonly code: "task/cancelled" });

/** One input file and what the user chose; `choices` is any part of a protocol, as written. */
export interface FileRequest {
  readonly file: string;
  readonly bytes: Uint8Array;
  readonly choices: unknown;
}

/** What only a shell knows; it stands in `run`, the one part of a result that may differ between two runs. */
export interface RunFacts {
  readonly version: string;
  readonly node: string;
  readonly started: string;
}

export interface ReadFile {
  readonly table: Table;
  readonly spectrum: Spectrum;
  readonly protocol: Protocol;
}

export interface AnalysedFile {
  readonly result: RunglineResult;
  readonly curves: Curves;
}

/** A file whose resampled spectra the caller still has to draw; null: nothing is left to draw. */
export interface UndrawnFile extends AnalysedFile {
  readonly resampling: ResamplingPlan | null;
}

/** Bytes to spectrum: what `inspect`, the stage Read and every fit begin with. */
export function readFile(request: FileRequest): Result<ReadFile, TaskIssue> {
  const protocol = resolveProtocol(request.choices);
  if (!protocol.ok) return protocol;
  const { encoding, delimiter, decimal, header_line } = protocol.value.table;
  const table = readTable(request.file, request.bytes, {
    ...(encoding !== null && { encoding }),
    ...(delimiter !== null && { delimiter }),
    ...(decimal !== null && { decimal }),
    ...(header_line !== null && { headerLine: header_line }),
  });
  if (!table.ok) return table;
  const spectrum = readSpectrum(table.value, sha256(request.bytes), protocol.value);
  if (!spectrum.ok) return spectrum;
  return success({ table: table.value, spectrum: spectrum.value, protocol: protocol.value });
}

/** The main job on one file. Throws `Cancelled` when the watch says so. */
export function analyseFile(
  request: FileRequest,
  run: RunFacts,
  watch: Watch,
  options: AnalyseOptions = {},
): Result<UndrawnFile, TaskIssue> {
  const began = watch.seconds();
  watch.report(0, "reading");
  const read = readFile(request);
  if (!read.ok) return read;
  const readSeconds = watch.seconds() - began;
  const { result, curves, resampling } = analyse(read.value.spectrum, read.value.protocol, watch, options);
  const { seconds, ...rest } = result;
  return success({
    result: { ...rest, run: { ...run, seconds: { read: readSeconds, ...seconds } } },
    curves,
    resampling,
  });
}

/** A file with all draws of its plan, in their order, whoever made them: the same to the bit as if drawn at once. */
export function withDraws(
  { result, curves }: AnalysedFile,
  plan: ResamplingPlan,
  draws: readonly (ResampledDraw | null)[],
  drawingSeconds: number,
): AnalysedFile {
  const { run, ...rest } = result;
  const { read, ...seconds } = run.seconds;
  const drawn = withResampling({ ...rest, seconds }, plan, draws, seconds.uncertainty + drawingSeconds);
  const { seconds: all, ...described } = drawn;
  return { result: { ...described, run: { ...run, seconds: { read, ...all } } }, curves };
}
