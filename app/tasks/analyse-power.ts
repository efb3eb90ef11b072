import { success, type Result, type Watch, type Wording } from "../base/index.ts";
import { analyseSeries, readPowerSeries } from "../power/index.ts";
import { resolveProtocol } from "../protocol/index.ts";
import type { RunFacts, TaskIssue } from "./analyse-file.ts";
import type { AnalysedSeries, SeriesRequest } from "./messages.ts";
import { wordIssue } from "./word-issue.ts";

/** What came out, and what could not take part (the rest was finished). */
export interface AnalysedPower extends AnalysedSeries {
  readonly failed: readonly { readonly label: string; readonly wordings: readonly Wording[] }[];
}

/** A power series from bytes to result. Throws `Cancelled` when the watch says so. */
export function analysePower(
  request: SeriesRequest,
  run: RunFacts,
  watch: Watch,
): Result<AnalysedPower, TaskIssue> {
  const began = watch.seconds();
  const protocol = resolveProtocol(request.choices);
  if (!protocol.ok) return protocol;
  const series = readPowerSeries(request.files, protocol.value, watch);
  if (!series.ok) return series;
  const control =
    request.control === undefined ? null : readPowerSeries(request.control, protocol.value, watch);
  if (control !== null && !control.ok) return control;
  const readSeconds = watch.seconds() - began;
  const analysed = analyseSeries(series.value, protocol.value, watch, wordIssue, control?.value ?? null);
  if (!analysed.ok) return analysed;
  const { result, ...rest } = analysed.value;
  const { seconds, ...described } = result;
  return success({
    result: { ...described, run: { ...run, seconds: { read: readSeconds, ...seconds } } },
    ...rest,
  });
}
