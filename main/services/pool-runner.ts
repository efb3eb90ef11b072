import { Piscina } from "piscina";
import { faultOf, type FitOutcome, type FitRunner, type Progress } from "./fit-outcome.ts";
import type { PoolProgress, PoolTask } from "./pool-thread.ts";

/** Fits in several threads at a time; a thread that breaks is replaced, and only its own fit is a fault. */
export function makePoolRunner(program: URL, threads: number): FitRunner {
  const pool = new Piscina({ filename: program.href, minThreads: threads, maxThreads: threads });
  const listeners = new Map<number, Progress>();
  let requests = 0;
  pool.on("message", ({ id, fraction, step }: PoolProgress) => listeners.get(id)?.(fraction, step));
  // A thread that breaks between two fits is replaced by the pool; the next fit would tell of a lasting fault.
  pool.on("error", () => undefined);
  return {
    threads,
    fit: (request, run, progress, signal) =>
      new Promise<FitOutcome>((resolve) => {
        if (signal.aborted) {
          resolve({ type: "cancelled" });
          return;
        }
        const id = ++requests;
        const cancel = new Int32Array(new SharedArrayBuffer(4));
        const end = (outcome: FitOutcome): void => {
          signal.removeEventListener("abort", onAbort);
          listeners.delete(id);
          resolve(outcome);
        };
        // The user is answered at once; the thread hears of it at its next look, or when the pool is closed.
        const onAbort = (): void => {
          Atomics.store(cancel, 0, 1);
          end({ type: "cancelled" });
        };
        listeners.set(id, progress);
        signal.addEventListener("abort", onAbort, { once: true });
        const task: PoolTask = { id, request, run, cancel };
        pool.run(task).then(
          (outcome: FitOutcome) => end(outcome),
          (thrown: unknown) => end(faultOf(thrown)),
        );
      }),
    close: () => pool.destroy(),
  };
}
