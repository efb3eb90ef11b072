import { Cancelled, type Wording, type Watch } from "../../app/base/index.ts";
import {
  analyseFile,
  wordIssue,
  type AnalysedFile,
  type FileRequest,
  type RunFacts,
} from "../../app/tasks/index.ts";

/** How one fit ended. Refusals are about the input; a fault is Rungline's own. */
export type FitOutcome =
  | { readonly type: "analysed"; readonly analysed: AnalysedFile }
  | { readonly type: "refused"; readonly wordings: readonly Wording[] }
  | { readonly type: "cancelled" }
  | { readonly type: "fault"; readonly message: string; readonly stack: string };

export type Progress = (fraction: number, step: string) => void;

/** Something that runs the main job: in this thread (tests) or in one of its own, so that Ctrl+C is heard. */
export interface FitRunner {
  fit(request: FileRequest, run: RunFacts, progress: Progress, signal: AbortSignal): Promise<FitOutcome>;
  close(): Promise<void>;
}

/** The task with its exceptions turned into data: the same in every thread. */
export function runFit(
  request: FileRequest,
  run: RunFacts,
  progress: Progress,
  cancelled: () => boolean,
): FitOutcome {
  const watch: Watch = { report: progress, cancelled, seconds: () => performance.now() / 1000 };
  try {
    const outcome = analyseFile(request, run, watch);
    if (outcome.ok) return { type: "analysed", analysed: outcome.value };
    if (outcome.issues.some((issue) => issue.code === "task/cancelled")) return { type: "cancelled" };
    return { type: "refused", wordings: outcome.issues.map(wordIssue) };
  } catch (thrown) {
    if (thrown instanceof Cancelled) return { type: "cancelled" };
    return faultOf(thrown);
  }
}

export function faultOf(thrown: unknown): FitOutcome & { readonly type: "fault" } {
  return thrown instanceof Error
    ? { type: "fault", message: thrown.message, stack: thrown.stack ?? "" }
    : { type: "fault", message: String(thrown), stack: "" };
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
