import type { WorkerReply, WorkerRequest } from "../../app/tasks/index.ts";
import type { WorkerLike } from "../../renderer/jobs/job-client.ts";

/** A worker whose answers the test gives. */
export class FakeWorker implements WorkerLike {
  onmessage: WorkerLike["onmessage"] = null;
  onerror: WorkerLike["onerror"] = null;
  readonly asked: WorkerRequest[] = [];
  ended = false;

  postMessage(message: WorkerRequest): void {
    this.asked.push(message);
  }

  terminate(): void {
    this.ended = true;
  }

  answer(reply: WorkerReply): void {
    this.onmessage?.({ data: reply } as MessageEvent<WorkerReply>);
  }
}
