import { Cancelled, type Watch } from "../../app/base/index.ts";
import {
  analyseFile,
  analysePower,
  compareSamples,
  inspectFile,
  recordFiles,
  wordIssue,
  type WorkerReply,
  type WorkerRequest,
} from "../../app/tasks/index.ts";
import { oneFile } from "./one-file.ts";
import { wordComparisonIssue } from "./word-comparison-issue.ts";

/** The page worker: all computation of the window happens here, never on the interface thread. */
declare const self: DedicatedWorkerGlobalScope;

const PROGRESS_INTERVAL_MS = 40;

self.onmessage = (event: MessageEvent<WorkerRequest>): void => {
  const message = event.data;
  try {
    answer(message);
  } catch (error) {
    if (error instanceof Cancelled) reply({ type: "cancelled", id: message.id });
    else {
      const { message: text, stack } = error instanceof Error ? error : new Error(String(error));
      reply({ type: "fault", id: message.id, message: text, stack: stack ?? "" });
    }
  }
};

function answer(message: WorkerRequest): void {
  const { id } = message;
  if (message.type === "inspect") {
    const inspected = inspectFile(message.request);
    if (inspected.ok) reply({ type: "inspected", id, inspection: inspected.value });
    else reply({ type: "refused", id, wordings: inspected.issues.map(wordIssue) });
    return;
  }
  if (message.type === "compare") {
    const compared = compareSamples(message.results, message.choices, message.run);
    if (compared.ok) reply({ type: "compared", id, comparison: compared.value });
    else reply({ type: "refused", id, wordings: compared.issues.map(wordComparisonIssue) });
    return;
  }
  if (message.type === "record") {
    reply({ type: "recorded", id, file: oneFile(recordFiles(message.input, message.part)) });
    return;
  }
  if (message.type === "analyse-power") {
    const series = analysePower(message.request, message.run, watchFor(id, message.cancel));
    if (series.ok) reply({ type: "analysed-power", id, analysed: series.value });
    else reply({ type: "refused", id, wordings: series.issues.map(wordIssue) });
    return;
  }
  const analysed = analyseFile(message.request, message.run, watchFor(id, message.cancel));
  if (analysed.ok) reply({ type: "analysed", id, analysed: analysed.value });
  else reply({ type: "refused", id, wordings: analysed.issues.map(wordIssue) });
}

function watchFor(id: number, cancel: Int32Array | null): Watch {
  let last = -Infinity;
  return {
    report(fraction, step) {
      const now = performance.now();
      if (now - last < PROGRESS_INTERVAL_MS) return;
      last = now;
      reply({ type: "progress", id, fraction, step });
    },
    cancelled: () => cancel !== null && Atomics.load(cancel, 0) !== 0,
    seconds: () => performance.now() / 1000,
  };
}

function reply(message: WorkerReply): void {
  self.postMessage(message);
}
