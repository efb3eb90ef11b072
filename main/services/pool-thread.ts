import { parentPort } from "node:worker_threads";
import type { FileRequest, RunFacts } from "../../app/tasks/index.ts";
import type { FitOutcome } from "./fit-outcome.ts";
import { runFit } from "./fit-runner.ts";

/** What the pool hands to one of its threads. */
export interface PoolTask {
  readonly id: number;
  readonly request: FileRequest;
  readonly run: RunFacts;
  /** Shared memory: the thread is busy while it fits and hears nothing else. */
  readonly cancel: Int32Array;
}

export interface PoolProgress {
  readonly id: number;
  readonly fraction: number;
  readonly step: string;
}

/** The program of a pool's thread: one fit a call. */
export default function fitInPool({ id, request, run, cancel }: PoolTask): FitOutcome {
  const post = (fraction: number, step: string): void => {
    parentPort?.postMessage({ id, fraction, step } satisfies PoolProgress);
  };
  return runFit(request, run, post, () => Atomics.load(cancel, 0) !== 0);
}
