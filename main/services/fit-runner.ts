import { Cancelled, type Watch } from "../../app/base/index.ts";
import {
  analyseFile,
  wordIssue,
  type FileRequest,
  type ResamplingPlan,
  type RunFacts,
} from "../../app/tasks/index.ts";
import { faultOf, type FitOutcome, type FitRunner, type Progress } from "./fit-outcome.ts";

type Analysed = Extract<FitOutcome, { type: "analysed" }>;

/** A fit whose resampled spectra are still to be drawn where the plan is not null. */
export type UndrawnOutcome =
  Exclude<FitOutcome, Analysed> | (Analysed & { readonly resampling: ResamplingPlan | null });

/** The task with its exceptions turned into data: the same in every thread. */
export function runFit(
  request: FileRequest,
  run: RunFacts,
  progress: Progress,
  cancelled: () => boolean,
  resampling: "now" | "later" = "now",
): UndrawnOutcome {
  const watch: Watch = { report: progress, cancelled, seconds: () => performance.now() / 1000 };
  try {
    const outcome = analyseFile(request, run, watch, { resampling });
    if (outcome.ok) {
      const { resampling: left, ...analysed } = outcome.value;
      return { type: "analysed", analysed, resampling: left };
    }
    if (outcome.issues.some((issue) => issue.code === "task/cancelled")) return { type: "cancelled" };
    return { type: "refused", wordings: outcome.issues.map(wordIssue) };
  } catch (thrown) {
    if (thrown instanceof Cancelled) return { type: "cancelled" };
    return faultOf(thrown);
  }
}

export function makeInlineRunner(): FitRunner {
  return {
    fit: (request, run, progress, signal) =>
      Promise.resolve(
        signal.aborted ? { type: "cancelled" } : runFit(request, run, progress, () => signal.aborted),
      ),
    close: () => Promise.resolve(),
  };
}
