import { parentPort } from "node:worker_threads";
import type { WorkerReply, WorkerRequest } from "../../app/tasks/index.ts";
import { runFit } from "./fit-runner.ts";

/** The thread that fits: one request at a time, cancelled through shared memory, since it is busy while it fits. */
parentPort?.on("message", (message: WorkerRequest) => {
  if (message.type !== "analyse") return;
  const { id, request, run, cancel } = message;
  const post = (reply: WorkerReply): void => parentPort?.postMessage(reply);
  const outcome = runFit(
    request,
    run,
    (fraction, step) => post({ type: "progress", id, fraction, step }),
    () => cancel !== null && Atomics.load(cancel, 0) !== 0,
  );
  post({ ...outcome, id });
});
