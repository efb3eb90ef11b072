import type { Wording } from "../base/index.ts";
import type { Curves } from "../analysis/index.ts";
import type { Comparison, ComparisonChoicesInput, RunglineResult } from "../protocol/index.ts";
import type { FigureChoices, FigureKind, ReportInput } from "../report/index.ts";
import type { AnalysedFile, FileRequest, RunFacts } from "./analyse-file.ts";
import type { NamedBytes } from "./host.ts";
import type { Inspection } from "./inspect-file.ts";

/** The files of one power series, in the order given, and what the user chose. */
export interface SeriesRequest {
  readonly files: readonly { readonly file: string; readonly bytes: Uint8Array }[];
  /** A second series whose pump makes pairs but none of these excitons. */
  readonly control?: readonly { readonly file: string; readonly bytes: Uint8Array }[];
  readonly choices: unknown;
}

/** A power series as fitted: the result with its part `power`, and the curves of each spectrum, ascending in power. */
export interface AnalysedSeries {
  readonly result: RunglineResult;
  readonly spectra: readonly {
    readonly label: string;
    readonly power_uW: number;
    readonly curves: Curves;
  }[];
}

/** What can be kept of a record: each one file, an archive where it holds several. */
export type RecordPart = "report" | "csv" | "latex" | "results" | "protocol";

/** Figures of a record alone: which (its name, or null for all), as what kind of file, how large. */
export interface FigureWish {
  readonly name: string | null;
  readonly kind: FigureKind;
  readonly choices: FigureChoices;
}

/** One figure, or an archive of several; and the characters that the typeface lacks. */
export interface MadeFigures {
  readonly file: NamedBytes;
  readonly missing: readonly string[];
}

/** What a shell asks of a worker (a page worker in the window, a pool thread in main), and what comes back. */
export type WorkerRequest =
  | {
      readonly type: "analyse";
      readonly id: number;
      readonly request: FileRequest;
      readonly run: RunFacts;
      readonly cancel: Int32Array | null;
    }
  | {
      readonly type: "analyse-power";
      readonly id: number;
      readonly request: SeriesRequest;
      readonly run: RunFacts;
      readonly cancel: Int32Array | null;
    }
  | {
      readonly type: "compare";
      readonly id: number;
      readonly results: readonly RunglineResult[];
      readonly choices: ComparisonChoicesInput;
      readonly run: RunFacts;
    }
  | { readonly type: "record"; readonly id: number; readonly input: ReportInput; readonly part: RecordPart }
  | { readonly type: "figure-names"; readonly id: number; readonly input: ReportInput }
  | {
      readonly type: "figures";
      readonly id: number;
      readonly input: ReportInput;
      readonly wish: FigureWish;
      readonly cancel: Int32Array | null;
    }
  | { readonly type: "inspect"; readonly id: number; readonly request: FileRequest };

export type WorkerReply =
  | { readonly type: "progress"; readonly id: number; readonly fraction: number; readonly step: string }
  | { readonly type: "analysed"; readonly id: number; readonly analysed: AnalysedFile }
  | { readonly type: "analysed-power"; readonly id: number; readonly analysed: AnalysedSeries }
  | { readonly type: "inspected"; readonly id: number; readonly inspection: Inspection }
  | { readonly type: "compared"; readonly id: number; readonly comparison: Comparison }
  | { readonly type: "recorded"; readonly id: number; readonly file: NamedBytes }
  | { readonly type: "figure-names"; readonly id: number; readonly names: readonly string[] }
  | { readonly type: "figures-made"; readonly id: number; readonly made: MadeFigures }
  | { readonly type: "refused"; readonly id: number; readonly wordings: readonly Wording[] }
  | { readonly type: "cancelled"; readonly id: number }
  | { readonly type: "fault"; readonly id: number; readonly message: string; readonly stack: string };
