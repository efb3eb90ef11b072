import { parentPort } from "node:worker_threads";
import { Cancelled, type Watch } from "../../app/base/index.ts";
import {
  drawSpectra,
  type FileRequest,
  type ResampledDraw,
  type ResamplingPlan,
  type RunFacts,
} from "../../app/tasks/index.ts";
import { runFit, type UndrawnOutcome } from "./fit-runner.ts";

/** What the pool hands to one of its threads: a fit, whose resampled spectra are left to other tasks, or some of these. */
export type PoolTask = {
  readonly id: number;
  /** Shared memory: the thread is busy while it fits and hears nothing else. */
  readonly cancel: Int32Array;
} & (
  | { readonly type: "fit"; readonly request: FileRequest; readonly run: RunFacts }
  | { readonly type: "draw"; readonly plan: ResamplingPlan; readonly from: number; readonly to: number }
);

export type DrawOutcome =
  | { readonly type: "drawn"; readonly draws: readonly (ResampledDraw | null)[] }
  | { readonly type: "cancelled" };

/** How far a fit is, or that one more spectrum of it is being drawn. */
export type PoolProgress =
  | { readonly id: number; readonly fraction: number; readonly step: string }
  | { readonly id: number; readonly drawing: number };

/** The program of a pool's thread: one task a call. */
export default function workInPool(task: PoolTask): UndrawnOutcome | DrawOutcome {
  const { id, cancel } = task;
  const post = (progress: PoolProgress): void => parentPort?.postMessage(progress);
  const cancelled = (): boolean => Atomics.load(cancel, 0) !== 0;
  if (task.type === "fit") {
    const report = (fraction: number, step: string): void => post({ id, fraction, step });
    return runFit(task.request, task.run, report, cancelled, "later");
  }
  const watch: Watch = { report: () => undefined, cancelled, seconds: () => 0 };
  try {
    const draws = drawSpectra(task.plan, task.from, task.to, watch, (drawing) => post({ id, drawing }));
    return { type: "drawn", draws };
  } catch (thrown) {
    if (thrown instanceof Cancelled) return { type: "cancelled" };
    throw thrown;
  }
}
