import type { Wording } from "../../app/base/index.ts";
import type { Comparison, ComparisonChoicesInput, RunglineResult } from "../../app/protocol/index.ts";
import type { ReportInput } from "../../app/report/index.ts";
import type {
  AnalysedFile,
  AnalysedSeries,
  FigureWish,
  FileRequest,
  Inspection,
  MadeFigures,
  NamedBytes,
  RecordPart,
  RunFacts,
  SeriesRequest,
  WorkerReply,
  WorkerRequest,
} from "../../app/tasks/index.ts";

/** How a job ended; bad input and cancelling are outcomes, not errors. */
export type Outcome<T> =
  | { readonly kind: "done"; readonly value: T }
  | { readonly kind: "refused"; readonly wordings: readonly Wording[] }
  | { readonly kind: "cancelled" }
  | { readonly kind: "fault"; readonly message: string; readonly stack: string };

export interface RunningJob<T> {
  readonly outcome: Promise<Outcome<T>>;
  cancel(): void;
}

/** The part of a Worker that is used; a test hands in its own. */
export interface WorkerLike {
  postMessage(message: WorkerRequest): void;
  terminate(): void;
  onmessage: ((event: MessageEvent<WorkerReply>) => void) | null;
  onerror: ((event: ErrorEvent) => void) | null;
}

type Settle = (
  outcome:
    | Outcome<never>
    | Outcome<AnalysedFile>
    | Outcome<AnalysedSeries>
    | Outcome<Inspection>
    | Outcome<Comparison>
    | Outcome<NamedBytes>
    | Outcome<readonly string[]>
    | Outcome<MadeFigures>,
) => void;
interface Pending {
  readonly settle: Settle;
  readonly progress: ((fraction: number, step: string) => void) | null;
}

/** How long a worker that can be told to stop may take to obey before it is ended. */
const OBEY_MS = 1500;

/**
 * One page worker and what is waiting for it. Cancelling sets a shared flag that the fit looks at; where memory
 * cannot be shared, or the flag is not obeyed in time, the worker is ended and a new one made for the next job.
 */
export class JobClient {
  readonly #make: () => WorkerLike;
  readonly #shared: boolean;
  #worker: WorkerLike | null = null;
  #pending = new Map<number, Pending>();
  #nextId = 1;

  constructor(make: () => WorkerLike, shared: boolean) {
    this.#make = make;
    this.#shared = shared;
  }

  inspect(request: FileRequest): Promise<Outcome<Inspection>> {
    return this.#ask((id) => ({ type: "inspect", id, request }));
  }

  compare(
    results: readonly RunglineResult[],
    choices: ComparisonChoicesInput,
    run: RunFacts,
  ): Promise<Outcome<Comparison>> {
    return this.#ask((id) => ({ type: "compare", id, results, choices, run }));
  }

  record(input: ReportInput, part: RecordPart): Promise<Outcome<NamedBytes>> {
    return this.#ask((id) => ({ type: "record", id, input, part }));
  }

  figureNames(input: ReportInput): Promise<Outcome<readonly string[]>> {
    return this.#ask((id) => ({ type: "figure-names", id, input }));
  }

  figures(
    input: ReportInput,
    wish: FigureWish,
    progress: (fraction: number, step: string) => void,
  ): RunningJob<MadeFigures> {
    return this.#run(progress, (id, cancel) => ({ type: "figures", id, input, wish, cancel }));
  }

  #ask<T>(message: (id: number) => WorkerRequest): Promise<Outcome<T>> {
    const id = this.#nextId++;
    return new Promise((resolve) => {
      this.#pending.set(id, { settle: resolve as Settle, progress: null });
      this.#ready().postMessage(message(id));
    });
  }

  analyse(
    request: FileRequest,
    run: RunFacts,
    progress: (fraction: number, step: string) => void,
  ): RunningJob<AnalysedFile> {
    return this.#run(progress, (id, cancel) => ({ type: "analyse", id, request, run, cancel }));
  }

  analysePower(
    request: SeriesRequest,
    run: RunFacts,
    progress: (fraction: number, step: string) => void,
  ): RunningJob<AnalysedSeries> {
    return this.#run(progress, (id, cancel) => ({ type: "analyse-power", id, request, run, cancel }));
  }

  #run<T>(
    progress: (fraction: number, step: string) => void,
    message: (id: number, cancel: Int32Array | null) => WorkerRequest,
  ): RunningJob<T> {
    const id = this.#nextId++;
    const cancel = this.#shared ? new Int32Array(new SharedArrayBuffer(4)) : null;
    const outcome = new Promise<Outcome<T>>((resolve) => {
      this.#pending.set(id, { settle: resolve as Settle, progress });
      this.#ready().postMessage(message(id, cancel));
    });
    return {
      outcome,
      cancel: () => {
        if (cancel === null) {
          this.#end({ kind: "cancelled" });
          return;
        }
        Atomics.store(cancel, 0, 1);
        setTimeout(() => {
          if (this.#pending.has(id)) this.#end({ kind: "cancelled" });
        }, OBEY_MS);
      },
    };
  }

  close(): void {
    this.#end({ kind: "cancelled" });
  }

  #ready(): WorkerLike {
    if (this.#worker !== null) return this.#worker;
    const worker = this.#make();
    worker.onmessage = (event) => this.#hear(event.data);
    worker.onerror = (event) =>
      this.#end({ kind: "fault", message: event.message || "the worker could not be started", stack: "" });
    this.#worker = worker;
    return worker;
  }

  #hear(reply: WorkerReply): void {
    const pending = this.#pending.get(reply.id);
    if (pending === undefined) return;
    if (reply.type === "progress") {
      pending.progress?.(reply.fraction, reply.step);
      return;
    }
    this.#pending.delete(reply.id);
    switch (reply.type) {
      case "analysed":
        return pending.settle({ kind: "done", value: reply.analysed });
      case "analysed-power":
        return pending.settle({ kind: "done", value: reply.analysed });
      case "inspected":
        return pending.settle({ kind: "done", value: reply.inspection });
      case "compared":
        return pending.settle({ kind: "done", value: reply.comparison });
      case "recorded":
        return pending.settle({ kind: "done", value: reply.file });
      case "figure-names":
        return pending.settle({ kind: "done", value: reply.names });
      case "figures-made":
        return pending.settle({ kind: "done", value: reply.made });
      case "refused":
        return pending.settle({ kind: "refused", wordings: reply.wordings });
      case "cancelled":
        return pending.settle({ kind: "cancelled" });
      case "fault":
        return pending.settle({ kind: "fault", message: reply.message, stack: reply.stack });
    }
  }

  #end(outcome: Outcome<never>): void {
    this.#worker?.terminate();
    this.#worker = null;
    const waiting = [...this.#pending.values()];
    this.#pending.clear();
    for (const { settle } of waiting) settle(outcome);
  }
}
