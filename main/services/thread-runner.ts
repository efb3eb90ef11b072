import { Worker } from "node:worker_threads";
import type { WorkerReply, WorkerRequest } from "../../app/tasks/index.ts";
import { faultOf, type FitOutcome, type FitRunner } from "./fit-outcome.ts";

/** Fits in one thread that is started at once, so that it loads while the input is read. */
export function makeThreadRunner(program: URL): FitRunner {
  let worker = new Worker(program);
  let requests = 0;
  return {
    fit: (request, run, progress, signal) =>
      new Promise<FitOutcome>((resolve) => {
        const id = ++requests;
        const cancel = new Int32Array(new SharedArrayBuffer(4));
        const end = (outcome: FitOutcome): void => {
          signal.removeEventListener("abort", onAbort);
          worker.removeAllListeners();
          resolve(outcome);
        };
        // The user is answered at once; the thread hears of it at its next look, or when it is closed.
        const onAbort = (): void => {
          Atomics.store(cancel, 0, 1);
          end({ type: "cancelled" });
        };
        if (signal.aborted) {
          resolve({ type: "cancelled" });
          return;
        }
        signal.addEventListener("abort", onAbort, { once: true });
        worker.on("message", (reply: WorkerReply) => {
          if (reply.id !== id) return;
          if (reply.type === "progress") progress(reply.fraction, reply.step);
          else if (reply.type !== "inspected") end(reply);
        });
        // A thread that broke is replaced, so that one bad input does not take the others with it.
        worker.on("error", (thrown) => {
          worker = new Worker(program);
          end(faultOf(thrown));
        });
        worker.on("exit", (code) => {
          worker = new Worker(program);
          end({ type: "fault", message: `the fitting thread ended with ${code}`, stack: "" });
        });
        const message: WorkerRequest = { type: "analyse", id, request, run, cancel };
        worker.postMessage(message);
      }),
    close: async () => {
      worker.removeAllListeners();
      await worker.terminate();
    },
  };
}
