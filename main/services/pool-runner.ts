import { Piscina } from "piscina";
import {
  drawingProgress,
  withDraws,
  type AnalysedFile,
  type ResampledDraw,
  type ResamplingPlan,
} from "../../app/tasks/index.ts";
import { faultOf, type FitOutcome, type FitRunner, type Progress } from "./fit-outcome.ts";
import type { UndrawnOutcome } from "./fit-runner.ts";
import type { DrawOutcome, PoolProgress, PoolTask } from "./pool-thread.ts";

/** Spectra drawn anew by one task: some tenths of a second, so that no thread waits long for the others at the end. */
const DRAWS_A_TASK = 10;

interface Listener {
  readonly progress: Progress;
  drawing(): void;
}

/**
 * Fits in several threads at a time; a thread that breaks is replaced, and only its own fit is a fault. Resampled spectra of a
 * fit are drawn by all threads that are free: each draw depends on its number alone, so that the result does not tell how many
 * there were.
 */
export function makePoolRunner(program: URL, threads: number): FitRunner {
  const pool = new Piscina({ filename: program.href, minThreads: threads, maxThreads: threads });
  const listeners = new Map<number, Listener>();
  let requests = 0;
  pool.on("message", (message: PoolProgress) => {
    const listener = listeners.get(message.id);
    if ("step" in message) listener?.progress(message.fraction, message.step);
    else listener?.drawing();
  });
  // A thread that breaks between two fits is replaced by the pool; the next fit would tell of a lasting fault.
  pool.on("error", () => undefined);

  const draw = async (
    id: number,
    cancel: Int32Array,
    analysed: AnalysedFile,
    plan: ResamplingPlan,
    progress: Progress,
  ): Promise<FitOutcome> => {
    const began = performance.now();
    const { uncertainty } = plan.protocol;
    const { resamples } = uncertainty;
    let drawing = 0;
    listeners.set(id, { progress, drawing: () => progress(...drawingProgress(drawing++, uncertainty)) });
    const slices: Promise<DrawOutcome>[] = [];
    for (let from = 0; from < resamples; from += DRAWS_A_TASK) {
      const to = Math.min(resamples, from + DRAWS_A_TASK);
      const task: PoolTask = { type: "draw", id, plan, from, to, cancel };
      slices.push(pool.run(task) as Promise<DrawOutcome>);
    }
    const draws: (ResampledDraw | null)[] = [];
    try {
      for (const outcome of await Promise.all(slices)) {
        if (outcome.type === "cancelled") return outcome;
        draws.push(...outcome.draws);
      }
    } catch (thrown) {
      // The other slices of a broken fit are of no use.
      Atomics.store(cancel, 0, 1);
      throw thrown;
    }
    const seconds = (performance.now() - began) / 1000;
    return { type: "analysed", analysed: withDraws(analysed, plan, draws, seconds) };
  };

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
        // The user is answered at once; the threads hear of it at their next look, or when the pool is closed.
        const onAbort = (): void => {
          Atomics.store(cancel, 0, 1);
          end({ type: "cancelled" });
        };
        listeners.set(id, { progress, drawing: () => undefined });
        signal.addEventListener("abort", onAbort, { once: true });
        const task: PoolTask = { type: "fit", id, request, run, cancel };
        (pool.run(task) as Promise<UndrawnOutcome>)
          .then((outcome) => {
            if (outcome.type !== "analysed") return outcome;
            const { analysed, resampling } = outcome;
            return resampling === null || signal.aborted
              ? { type: "analysed" as const, analysed }
              : draw(id, cancel, analysed, resampling, progress);
          })
          .then(end, (thrown: unknown) => end(faultOf(thrown)));
      }),
    close: () => pool.destroy(),
  };
}
