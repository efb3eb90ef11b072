import { readFile } from "node:fs/promises";
import { availableParallelism } from "node:os";
import { resolve } from "node:path";
import { sha256, type Wording } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import {
  curvesToCsv,
  gravestFirst,
  noteLine,
  protocolToJson,
  resultsToJson,
  resultToCsv,
  resultToJson,
  resultToLatex,
  resultToText,
  summaryRow,
  summaryToCsv,
  summaryToJson,
  type SummaryRow,
} from "../../app/report/index.ts";
import type { AnalysedFile } from "../../app/tasks/index.ts";
import {
  FAILURES_SCHEMA,
  listInputs,
  pathKind,
  programVersion,
  readResultFile,
  reasonInWords,
  removeLeftovers,
  writeWhole,
  type InputFile,
} from "../services/index.ts";
import { readChoices, type ChoiceOptions, type Choices } from "./choices.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT } from "./exit-status.ts";
import { placeOutput, type Format, type OutputPlace } from "./output-place.ts";
import { makeProgress } from "./progress-bar.ts";
import { redoneInWords } from "./redone.ts";
import { changesInWords, repeatInWords } from "./repeat.ts";

export interface FitOptions extends ChoiceOptions {
  readonly out?: string;
  /** Fits at a time; as many as the machine has processors where it is not said. */
  readonly threads?: number;
  readonly format?: Format;
  /** Write the fitted curves beside each result. */
  readonly curves?: boolean;
}

interface Failure {
  readonly file: string;
  readonly status: number;
  readonly messages: readonly Wording[];
}

type Curves = AnalysedFile["curves"];

/** What became of one input. */
type Outcome =
  | {
      readonly type: "result";
      readonly result: RunglineResult;
      /** Null where the result was there already. */
      readonly curves: Curves | null;
      readonly kept: boolean;
    }
  | {
      readonly type: "failure";
      readonly failure: Failure;
      readonly stack: string;
      /** Whether it took a fit to find out. */
      readonly fitted: boolean;
    }
  | { readonly type: "cancelled" };

/** `rungline fit FILE...`: spectra to results. The good ones are finished and written, the bad ones named. */
export async function fitCommand(
  words: readonly string[],
  options: FitOptions,
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<number> {
  const began = Date.now();
  const inputs = await listInputs(words, io.workingFolder);
  const most = options.threads ?? availableParallelism();
  const threads = Math.max(1, Math.min(most, inputs.files.length));
  // Made before the choices are read, so that it loads meanwhile.
  let runner = io.makeRunner(threads);
  try {
    const choices = await readChoices(options, io.workingFolder);
    if (choices.protocol.uncertainty.resample !== "none" && most > threads) {
      // Spectra of one file are drawn by all threads.
      await runner.close();
      runner = io.makeRunner(most);
    }
    const place = await placeOutput(options.out, options.format, inputs, io.workingFolder, options.curves);
    let status: number = EXIT.done;
    const raise = (to: number): void => {
      status = Math.max(status, to);
    };
    const failures: { readonly at: number; readonly failure: Failure }[] = [];
    const failureText = ({ messages }: Failure, stack: string): string =>
      messages
        .map(({ message, remedy }) => `rungline: ${message}${remedy === "" ? "" : `\n  ${remedy}`}\n`)
        .join("") + (stack !== "" && io.environment["RUNGLINE_DEBUG"] === "1" ? `${stack}\n` : "");
    for (const word of inputs.nothingFound) {
      const failure: Failure = {
        file: word.word,
        status: EXIT.input,
        messages: [{ message: `${word.word}: ${word.why}`, remedy: "" }],
      };
      failures.push({ at: -1, failure });
      raise(EXIT.input);
      io.stderr(failureText(failure, ""));
    }
    io.stderr(changesInWords(choices));
    if (place.kind === "folder") {
      io.stderr(await redoneInWords(place, choices.protocol));
      await writeWhole(place.protocol, protocolToJson(choices.protocol));
    }

    // Whole results are kept only where they are printed at the end: a folder of any length takes the same memory.
    const printed: (RunglineResult | undefined)[] = [];
    const rows: (SummaryRow | undefined)[] = [];
    const paths = inputs.files.map((input) => input.path);
    const progress = await makeProgress(io, paths);
    const finish = async (i: number, outcome: Exclude<Outcome, { type: "cancelled" }>): Promise<void> => {
      if (outcome.type === "failure") {
        failures.push({ at: i, failure: outcome.failure });
        raise(outcome.failure.status);
        progress.end(i, "no result", outcome.fitted, failureText(outcome.failure, outcome.stack));
        return;
      }
      const { result, kept } = outcome;
      // Written first, then said to be done.
      const curvesFile =
        place.kind === "print" ? null : place.kind === "file" ? place.curves : place.curves[i]!;
      // Before the result: by that a later run sees that both are there.
      if (curvesFile !== null && outcome.curves !== null)
        await writeWhole(curvesFile, curvesToCsv(outcome.curves, result));
      if (place.kind === "file") await writeFile(place, result, choices);
      else if (place.kind === "folder") await writeInFolder(place, i, result, kept);
      else printed[i] = result;
      const notes = gravestFirst(result.notes).map((note) => `  ${noteLine(note)}\n`);
      progress.end(i, outcomeInWords(outcome), !kept, notes.join("") + repeatInWords(choices, result));
      if (result.status !== "converged") raise(EXIT.fit);
      rows[i] = summaryRow(result);
    };

    let next = 0;
    let broken: { readonly thrown: unknown } | null = null;
    let cancelledAt: number | null = null;
    const work = async (): Promise<void> => {
      while (broken === null && cancelledAt === null && next < inputs.files.length) {
        const i = next++;
        const input = inputs.files[i]!;
        try {
          const outcome = await fitOne(
            input,
            choices,
            place.kind === "folder" &&
              (place.curves[i] === null || (await pathKind(place.curves[i]!)) === "file")
              ? place.results[i]!
              : null,
            io,
            (bytes) => {
              progress.begin(i);
              return runner.fit(
                { file: input.file, bytes, choices: choices.choices },
                { version: programVersion(), node: process.version, started: io.now() },
                (fraction, step) => progress.update(i, fraction, step),
                signal,
              );
            },
          );
          // What was finished in the moment of cancelling is kept too.
          if (outcome.type === "cancelled" || (signal.aborted && outcome.type === "failure")) {
            progress.end(i, "cancelled", false);
            cancelledAt ??= i;
          } else await finish(i, outcome);
          if (signal.aborted) cancelledAt ??= i;
        } catch (thrown) {
          broken ??= { thrown };
        }
      }
    };
    await Promise.all(Array.from({ length: runner.threads ?? 1 }, work));
    progress.close();
    if (broken !== null) throw (broken as { thrown: unknown }).thrown;
    if (cancelledAt !== null) return EXIT.cancelled;
    if (place.kind === "folder") {
      const inOrder = rows.filter((row) => row !== undefined);
      await writeWhole(place.summary, summaryToCsv(inOrder));
      await writeWhole(place.summaryJson, summaryToJson(inOrder));
      failures.sort((one, other) => one.at - other.at);
      await writeWhole(place.failures, failuresToJson(failures.map(({ failure }) => failure)));
      const { results, protocol, summary, summaryJson, failures: failed } = place;
      const curves = place.curves.filter((file) => file !== null);
      await removeLeftovers(
        place.folder,
        [...results, ...curves, protocol, summary, summaryJson, failed],
        began,
      );
      if (failures.length > 0 && inputs.files.length > 1)
        io.stderr(
          failuresInWords(
            failures.map(({ failure }) => failure),
            place.failures,
          ),
        );
    } else if (place.kind === "print") {
      const results = printed.filter((result) => result !== undefined);
      if (results.length > 0) await io.stdout(render(results, place.format));
    }
    return status;
  } finally {
    await runner.close();
  }
}

/** Once more at the end, where a long run has carried them out of sight. */
function failuresInWords(failures: readonly Failure[], file: string): string {
  const lines = failures.map(
    ({ file: one, messages }) => `  ${one}: ${withoutName(messages[0]!.message, one)}\n`,
  );
  const noun = failures.length === 1 ? "input" : "inputs";
  return `${failures.length} ${noun} without a result (${file}):\n${lines.join("")}`;
}

function withoutName(message: string, file: string): string {
  return message.startsWith(`${file}: `) ? message.slice(file.length + 2) : message;
}

async function fitOne(
  input: InputFile,
  choices: Choices,
  keptFile: string | null,
  io: CommandLineIo,
  fit: (bytes: Uint8Array) => ReturnType<ReturnType<CommandLineIo["makeRunner"]>["fit"]>,
): Promise<Outcome> {
  const failure = (status: number, messages: readonly Wording[], stack = "", fitted = true): Outcome => ({
    type: "failure",
    failure: { file: input.path, status, messages },
    stack,
    fitted,
  });
  let bytes: Uint8Array;
  try {
    bytes = await readFile(resolve(io.workingFolder, input.path));
  } catch (cause) {
    return failure(
      EXIT.input,
      [{ message: `${input.path}: ${reasonInWords(cause)}`, remedy: "" }],
      "",
      false,
    );
  }
  if (keptFile !== null) {
    const there = await keptResult(keptFile, input.file, bytes, choices);
    if (there !== null) return { type: "result", result: there, curves: null, kept: true };
  }
  const outcome = await fit(bytes);
  switch (outcome.type) {
    case "analysed":
      return { type: "result", ...outcome.analysed, kept: false };
    case "cancelled":
      return outcome;
    case "refused":
      return failure(EXIT.input, outcome.wordings);
    case "fault": {
      const message = `${input.path}: a fault of Rungline: ${outcome.message.split("\n")[0] ?? ""}`;
      return failure(EXIT.fault, [{ message, remedy: "" }], outcome.stack);
    }
  }
}

/** What is there already for the same bytes, choices and version, since it would come out the same again. */
async function keptResult(
  file: string,
  inputName: string,
  bytes: Uint8Array,
  { protocol }: Choices,
): Promise<RunglineResult | null> {
  const there = await readResultFile(file);
  if (there === null || there.run.version !== programVersion()) return null;
  if (there.source.file !== inputName || there.source.sha256 !== sha256(bytes)) return null;
  return protocolToJson(there.protocol) === protocolToJson(protocol) ? there : null;
}

async function writeFile(
  place: OutputPlace & { readonly kind: "file" },
  result: RunglineResult,
  { protocol }: Choices,
): Promise<void> {
  await writeWhole(place.protocol, protocolToJson(protocol));
  await writeWhole(place.result, render([result], place.format));
}

async function writeInFolder(
  place: OutputPlace & { readonly kind: "folder" },
  i: number,
  result: RunglineResult,
  kept: boolean,
): Promise<void> {
  if (!kept) await writeWhole(place.results[i]!, resultToJson(result));
  const other = place.others[i];
  if (typeof other === "string") await writeWhole(other, render([result], place.format));
}

function render(results: readonly RunglineResult[], format: Format): string {
  switch (format) {
    case "json":
      return results.length === 1 ? resultToJson(results[0]!) : resultsToJson(results);
    case "csv":
      return resultToCsv(...results);
    case "text":
      return results.map(resultToText).join("\n");
    case "latex":
      return resultToLatex(...results);
  }
}

function outcomeInWords(outcome: Outcome & { readonly type: "result" }): string {
  const { result, kept } = outcome;
  const { read, guess, solve, uncertainty } = result.run.seconds;
  const words = {
    converged: `${result.lines.length} lines, converged`,
    "not-converged": "not converged",
    "no-series": "no series seen",
  }[result.status];
  return kept
    ? `${words} (kept: same input, protocol and version)`
    : `${words}, ${(read + guess + solve + uncertainty).toFixed(2)} s`;
}

function failuresToJson(failures: readonly Failure[]): string {
  return `${JSON.stringify({ schema: FAILURES_SCHEMA, failures }, null, 2)}\n`;
}
