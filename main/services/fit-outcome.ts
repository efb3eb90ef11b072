import type { Wording } from "../../app/base/index.ts";
import type { AnalysedFile, FileRequest, RunFacts } from "../../app/tasks/index.ts";

/** How one fit ended. Refusals are about the input; a fault is Rungline's own. */
export type FitOutcome =
  | { readonly type: "analysed"; readonly analysed: AnalysedFile }
  | { readonly type: "refused"; readonly wordings: readonly Wording[] }
  | { readonly type: "cancelled" }
  | { readonly type: "fault"; readonly message: string; readonly stack: string };

export type Progress = (fraction: number, step: string) => void;

/** Something that runs the main job: in this thread (tests) or in others, so that Ctrl+C is heard. */
export interface FitRunner {
  /** How many fits may run at a time; 1 where it is not said. */
  readonly threads?: number;
  fit(request: FileRequest, run: RunFacts, progress: Progress, signal: AbortSignal): Promise<FitOutcome>;
  close(): Promise<void>;
}

export function faultOf(thrown: unknown): FitOutcome & { readonly type: "fault" } {
  return thrown instanceof Error
    ? { type: "fault", message: thrown.message, stack: thrown.stack ?? "" }
    : { type: "fault", message: String(thrown), stack: "" };
}
