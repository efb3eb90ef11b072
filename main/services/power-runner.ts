import { endsWork } from "./ends-work.ts";
import { Worker } from "node:worker_threads";
import { Cancelled, type Watch, type Wording } from "../../app/base/index.ts";
import {
  analysePower,
  wordIssue,
  type AnalysedSeries,
  type RunFacts,
  type SeriesRequest,
  type WorkerReply,
  type WorkerRequest,
} from "../../app/tasks/index.ts";
import { faultOf, type Progress } from "./fit-outcome.ts";

/** How the analysis of one power series ended. */
export type PowerOutcome =
  | { readonly type: "analysed-power"; readonly analysed: AnalysedSeries }
  | { readonly type: "refused"; readonly wordings: readonly Wording[] }
  | { readonly type: "cancelled" }
  | { readonly type: "fault"; readonly message: string; readonly stack: string };

export type RunPower = (
  request: SeriesRequest,
  run: RunFacts,
  progress: Progress,
  signal: AbortSignal,
) => Promise<PowerOutcome>;

/** The task with its exceptions turned into data: the same in every thread. */
export function runPower(
  request: SeriesRequest,
  run: RunFacts,
  progress: Progress,
  cancelled: () => boolean,
): PowerOutcome {
  const watch: Watch = { report: progress, cancelled, seconds: () => performance.now() / 1000 };
  try {
    const outcome = analysePower(request, run, watch);
    if (outcome.ok)
      return {
        type: "analysed-power",
        analysed: { result: outcome.value.result, spectra: outcome.value.spectra },
      };
    return { type: "refused", wordings: outcome.issues.map(wordIssue) };
  } catch (thrown) {
    if (thrown instanceof Cancelled) return { type: "cancelled" };
    return faultOf(thrown);
  }
}

export const runPowerInline: RunPower = (request, run, progress, signal) =>
  Promise.resolve(
    signal.aborted ? { type: "cancelled" } : runPower(request, run, progress, () => signal.aborted),
  );

/** A series in a thread of its own, so that Ctrl+C is heard; the thread ends with it. */
export function runPowerInThread(program: URL): RunPower {
  return (request, run, progress, signal) =>
    new Promise<PowerOutcome>((resolve) => {
      if (signal.aborted) {
        resolve({ type: "cancelled" });
        return;
      }
      const thread = new Worker(program);
      const end = (outcome: PowerOutcome): void => {
        signal.removeEventListener("abort", onAbort);
        void thread.terminate();
        resolve(outcome);
      };
      const onAbort = (): void => end({ type: "cancelled" });
      signal.addEventListener("abort", onAbort, { once: true });
      thread.on("message", (reply: WorkerReply) => {
        if (reply.type === "progress") progress(reply.fraction, reply.step);
        else if (endsWork(reply) && reply.type !== "analysed") end(reply);
      });
      thread.on("error", (thrown: unknown) => end(faultOf(thrown)));
      thread.on("exit", (code) =>
        end({ type: "fault", message: `the fitting thread ended with ${code}`, stack: "" }),
      );
      const message: WorkerRequest = { type: "analyse-power", id: 1, request, run, cancel: null };
      thread.postMessage(message);
    });
}
