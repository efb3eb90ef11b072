import { Worker } from "node:worker_threads";
import type { WorkerReply, WorkerRequest } from "../../app/tasks/index.ts";
import { faultOf, type FitOutcome, type FitRunner } from "./fit-outcome.ts";
import { endsWork } from "./ends-work.ts";

/** Fits in one thread that is started at once, so that it loads while the input is read. */
export function makeThreadRunner(program: URL): FitRunner {
  // A thread that broke is replaced, so that one bad input does not take the others with it; what broke it between
  // two fits is told to the next one.
  let broken: unknown = null;
  const start = (): Worker => {
    const thread = new Worker(program);
    thread.on("error", (thrown: unknown) => {
      if (worker === thread) broken = thrown;
    });
    return thread;
  };
  let worker = start();
  let requests = 0;
  return {
    fit: (request, run, progress, signal) =>
      new Promise<FitOutcome>((resolve) => {
        if (signal.aborted) {
          resolve({ type: "cancelled" });
          return;
        }
        if (broken !== null) {
          resolve(faultOf(broken));
          broken = null;
          worker = start();
          return;
        }
        const id = ++requests;
        const cancel = new Int32Array(new SharedArrayBuffer(4));
        const thread = worker;
        // Each listener by its name: removing all of them would take away those that Node itself put there.
        const end = (outcome: FitOutcome): void => {
          signal.removeEventListener("abort", onAbort);
          thread.off("message", onMessage);
          thread.off("error", onError);
          thread.off("exit", onExit);
          resolve(outcome);
        };
        // The user is answered at once; the thread hears of it at its next look, or when it is closed.
        const onAbort = (): void => {
          Atomics.store(cancel, 0, 1);
          end({ type: "cancelled" });
        };
        const onMessage = (reply: WorkerReply): void => {
          if (reply.id !== id) return;
          if (reply.type === "progress") progress(reply.fraction, reply.step);
          else if (endsWork(reply) && reply.type !== "analysed-power") end(reply);
        };
        const onError = (thrown: unknown): void => {
          broken = null;
          worker = start();
          end(faultOf(thrown));
        };
        const onExit = (code: number): void => {
          worker = start();
          end({ type: "fault", message: `the fitting thread ended with ${code}`, stack: "" });
        };
        signal.addEventListener("abort", onAbort, { once: true });
        thread.on("message", onMessage);
        thread.on("error", onError);
        thread.on("exit", onExit);
        const message: WorkerRequest = { type: "analyse", id, request, run, cancel };
        thread.postMessage(message);
      }),
    close: async () => {
      await worker.terminate();
    },
  };
}
