import { readFile } from "node:fs/promises";
import { resolve } from "node:path";
import { sha256, type Wording } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import {
  gravestFirst,
  noteLine,
  protocolToJson,
  resultsToJson,
  resultToCsv,
  resultToJson,
  resultToText,
  summaryToCsv,
} from "../../app/report/index.ts";
import {
  FAILURES_SCHEMA,
  listInputs,
  programVersion,
  readResultFile,
  reasonInWords,
  writeWhole,
  type InputFile,
} from "../services/index.ts";
import { readChoices, type ChoiceOptions, type Choices } from "./choices.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT } from "./exit-status.ts";
import { placeOutput, type Format, type OutputPlace } from "./output-place.ts";
import { makeProgress } from "./progress-bar.ts";

export interface FitOptions extends ChoiceOptions {
  readonly out?: string;
  readonly format?: Format;
}

interface Failure {
  readonly file: string;
  readonly status: number;
  readonly messages: readonly Wording[];
}

/** What became of one input. */
type Outcome =
  | { readonly type: "result"; readonly result: RunglineResult; readonly kept: boolean }
  | { readonly type: "failure"; readonly failure: Failure; readonly stack: string }
  | { readonly type: "cancelled" };

/** `rungline fit FILE...`: spectra to results. The good ones are finished and written, the bad ones named. */
export async function fitCommand(
  words: readonly string[],
  options: FitOptions,
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<number> {
  const runner = io.makeRunner();
  try {
    const choices = await readChoices(options, io.workingFolder);
    const inputs = await listInputs(words, io.workingFolder);
    const place = await placeOutput(options.out, options.format, inputs, io.workingFolder);
    let status: number = EXIT.done;
    const failures: Failure[] = [];
    const fail = (failure: Failure, stack: string): void => {
      failures.push(failure);
      status = Math.max(status, failure.status);
      for (const { message, remedy } of failure.messages)
        io.stderr(`rungline: ${message}${remedy === "" ? "" : `\n  ${remedy}`}\n`);
      if (stack !== "" && io.environment["RUNGLINE_DEBUG"] === "1") io.stderr(`${stack}\n`);
    };
    for (const folder of inputs.emptyFolders) {
      const message = `${folder}: no spectrum files in this folder`;
      fail({ file: folder, status: EXIT.input, messages: [{ message, remedy: "" }] }, "");
    }
    if (place.kind === "folder") await writeWhole(place.protocol, protocolToJson(choices.protocol));

    const results: RunglineResult[] = [];
    const progress = await makeProgress(io);
    for (const [i, input] of inputs.files.entries()) {
      progress.begin(i + 1, inputs.files.length, input.path);
      const kept = place.kind === "folder" ? place.results[i]! : null;
      const outcome = await fitOne(input, choices, kept, io, (bytes) =>
        runner.fit(
          { file: input.file, bytes, choices: choices.choices },
          { version: programVersion(), node: process.version, started: io.now() },
          progress.update,
          signal,
        ),
      );
      if (outcome.type === "cancelled" || signal.aborted) {
        progress.end("cancelled");
        return EXIT.cancelled;
      }
      if (outcome.type === "failure") {
        progress.end("no result");
        fail(outcome.failure, outcome.stack);
        continue;
      }
      const { result } = outcome;
      // Written first, then said to be done.
      if (place.kind === "file") await writeFile(place, result, choices);
      else if (place.kind === "folder") await writeInFolder(place, i, result, outcome.kept);
      progress.end(outcomeInWords(outcome));
      for (const note of gravestFirst(result.notes)) io.stderr(`  ${noteLine(note)}\n`);
      if (result.status !== "converged") status = Math.max(status, EXIT.fit);
      results.push(result);
    }
    if (place.kind === "folder") {
      await writeWhole(place.summary, summaryToCsv(results));
      await writeWhole(place.failures, failuresToJson(failures));
    } else if (place.kind === "print" && results.length > 0) await io.stdout(render(results, place.format));
    return status;
  } finally {
    await runner.close();
  }
}

async function fitOne(
  input: InputFile,
  choices: Choices,
  keptFile: string | null,
  io: CommandLineIo,
  fit: (bytes: Uint8Array) => ReturnType<ReturnType<CommandLineIo["makeRunner"]>["fit"]>,
): Promise<Outcome> {
  const failure = (status: number, messages: readonly Wording[], stack = ""): Outcome => ({
    type: "failure",
    failure: { file: input.path, status, messages },
    stack,
  });
  let bytes: Uint8Array;
  try {
    bytes = await readFile(resolve(io.workingFolder, input.path));
  } catch (cause) {
    return failure(EXIT.input, [{ message: `${input.path}: ${reasonInWords(cause)}`, remedy: "" }]);
  }
  if (keptFile !== null) {
    const there = await keptResult(keptFile, bytes, choices);
    if (there !== null) return { type: "result", result: there, kept: true };
  }
  const outcome = await fit(bytes);
  switch (outcome.type) {
    case "analysed":
      return { type: "result", result: outcome.analysed.result, kept: false };
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
  bytes: Uint8Array,
  { protocol }: Choices,
): Promise<RunglineResult | null> {
  const there = await readResultFile(file);
  if (there === null || there.run.version !== programVersion()) return null;
  if (there.source.sha256 !== sha256(bytes)) return null;
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
