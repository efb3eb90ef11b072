import type { WorkerReply } from "../../app/tasks/index.ts";

type EndOfWork = Extract<
  WorkerReply,
  { type: "analysed" | "analysed-power" | "refused" | "cancelled" | "fault" }
>;

/** Whether a thread has no more to say on a fit; the window's other messages do not concern the command line. */
export function endsWork(reply: WorkerReply): reply is EndOfWork {
  return ["analysed", "analysed-power", "refused", "cancelled", "fault"].includes(reply.type);
}
