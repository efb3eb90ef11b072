import { Cancelled, type Watch } from "../../app/base/index.ts";
import { makeFigurePress, type FigurePress } from "../../app/report/index.ts";
import {
  analyseFile,
  analysePower,
  compareSamples,
  figureFiles,
  inspectFile,
  recordFigures,
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
    if (message.type === "figures") makeFigures(message).catch((error: unknown) => fail(message.id, error));
    else answer(message);
  } catch (error) {
    fail(message.id, error);
  }
};

function fail(id: number, error: unknown): void {
  if (error instanceof Cancelled) reply({ type: "cancelled", id });
  else {
    const { message, stack } = error instanceof Error ? error : new Error(String(error));
    reply({ type: "fault", id, message, stack: stack ?? "" });
  }
}

function answer(message: Exclude<WorkerRequest, { type: "figures" }>): void {
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
  if (message.type === "figure-names") {
    reply({ type: "figure-names", id, names: recordFigures(message.input).map(({ name }) => name) });
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

let press: Promise<FigurePress> | null = null;

async function makeFigures({
  id,
  input,
  wish,
  cancel,
}: Extract<WorkerRequest, { type: "figures" }>): Promise<void> {
  press ??= openPress().catch((error: unknown) => {
    // Another time the files may be had.
    press = null;
    throw error;
  });
  const ready = await press;
  const files = await figureFiles(input, wish, ready, watchFor(id, cancel), hearOthers);
  reply({ type: "figures-made", id, made: { file: oneFile(files), missing: ready.takeMissing() } });
}

async function openPress(): Promise<FigurePress> {
  const { drawingTools } = await import("./drawing-tools.ts");
  return makeFigurePress(await drawingTools());
}

/** What was sent meanwhile is answered before the next figure. */
function hearOthers(): Promise<void> {
  return new Promise((resolve) => setTimeout(resolve));
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
