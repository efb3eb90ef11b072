import { parentPort } from "node:worker_threads";
import type { WorkerReply, WorkerRequest } from "../../app/tasks/index.ts";
import { runFit } from "./fit-runner.ts";
import { runPower } from "./power-runner.ts";

/** The thread that fits: one request at a time, cancelled through shared memory, since it is busy while it fits. */
parentPort?.on("message", (message: WorkerRequest) => {
  // The window's other messages never come here.
  if (message.type !== "analyse" && message.type !== "analyse-power") return;
  const { id, run, cancel } = message;
  const post = (reply: WorkerReply): void => parentPort?.postMessage(reply);
  const progress = (fraction: number, step: string): void => post({ type: "progress", id, fraction, step });
  const cancelled = (): boolean => cancel !== null && Atomics.load(cancel, 0) !== 0;
  if (message.type === "analyse") post({ ...runFit(message.request, run, progress, cancelled), id });
  else post({ ...runPower(message.request, run, progress, cancelled), id });
});
