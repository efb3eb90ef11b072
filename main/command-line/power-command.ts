import { readFile } from "node:fs/promises";
import { resolve } from "node:path";
import type { RunglineResult } from "../../app/protocol/index.ts";
import {
  gravestFirst,
  noteLine,
  protocolToJson,
  resultToCsv,
  resultToJson,
  resultToLatex,
  resultToText,
  seriesCurvesToCsv,
} from "../../app/report/index.ts";
import {
  listInputs,
  programVersion,
  reasonInWords,
  runPowerInline,
  writeWhole,
  type InputFile,
} from "../services/index.ts";
import { readChoices, type ChoiceOptions } from "./choices.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT } from "./exit-status.ts";
import { placeOutput, type Format } from "./output-place.ts";
import { makeProgress } from "./progress-bar.ts";
import { sayFault } from "./say.ts";

export interface PowerOptions extends ChoiceOptions {
  readonly out?: string;
  readonly format?: Format;
  readonly curves?: boolean;
  readonly control?: readonly string[];
}

/**
 * `rungline power FILE...`: columns of one file, several files or a folder as one power series, to one result. What cannot
 * take part is named, and the rest finished.
 */
export async function powerCommand(
  words: readonly string[],
  options: PowerOptions,
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<number> {
  const choices = await readChoices(options, io.workingFolder);
  const inputs = await listInputs(words, io.workingFolder);
  // One series is one result, whatever it was gathered from.
  const single = { ...inputs, files: inputs.files.slice(0, 1), hasFolder: false };
  const place = await placeOutput(
    options.out,
    options.format,
    single,
    io.workingFolder,
    options.curves === true,
  );
  let status: number = EXIT.done;
  for (const { word, why } of inputs.nothingFound) {
    io.stderr(`rungline: ${word}: ${why}\n`);
    status = EXIT.input;
  }
  const { files, unreadable } = await readAll(inputs.files, io);
  if (unreadable > 0) status = EXIT.input;
  if (files.length === 0) return EXIT.input;
  const beside = options.control === undefined ? null : await listInputs(options.control, io.workingFolder);
  for (const { word, why } of beside?.nothingFound ?? []) io.stderr(`rungline: ${word}: ${why}\n`);
  const control = beside === null ? null : await readAll(beside.files, io);
  // Without its control the series would say less than was asked for.
  if (beside !== null && control !== null && (beside.nothingFound.length > 0 || control.unreadable > 0))
    return EXIT.input;

  const progress = await makeProgress(io, [
    files.length === 1 ? files[0]!.file : `${files.length} files as one power series`,
  ]);
  progress.begin(0);
  const run = { version: programVersion(), node: process.version, started: io.now() };
  const outcome = await (io.runPower ?? runPowerInline)(
    { files, choices: choices.choices, ...(control === null ? {} : { control: control.files }) },
    run,
    (fraction, step) => progress.update(0, fraction, step),
    signal,
  );
  if (outcome.type === "cancelled" || signal.aborted) {
    progress.end(0, "cancelled", true);
    progress.close();
    return EXIT.cancelled;
  }
  if (outcome.type === "refused") {
    progress.end(0, "no result", true);
    progress.close();
    for (const { message, remedy } of outcome.wordings)
      io.stderr(`rungline: ${message}${remedy === "" ? "" : `\n  ${remedy}`}\n`);
    return EXIT.input;
  }
  if (outcome.type === "fault") {
    progress.end(0, "no result", true);
    progress.close();
    const fault = new Error(outcome.message);
    fault.stack = outcome.stack;
    sayFault(fault, io);
    return EXIT.fault;
  }
  const { result, spectra } = outcome.analysed;
  const text = render(result, place.format);
  // Written first, then said to be done.
  if (place.kind === "file") {
    await writeWhole(place.protocol, protocolToJson(choices.protocol));
    if (place.curves !== null) await writeWhole(place.curves, seriesCurvesToCsv(spectra, result));
    await writeWhole(place.result, text);
  }
  progress.end(0, outcomeInWords(result), true);
  progress.close();
  for (const { label, message } of result.power?.fit?.failed ?? []) {
    io.stderr(`rungline: ${message.startsWith(label) ? "" : `${label}: `}${message}\n`);
    status = Math.max(status, EXIT.input);
  }
  for (const note of gravestFirst(result.notes)) io.stderr(`  ${noteLine(note)}\n`);
  if (place.kind === "print") await io.stdout(text);
  return result.status === "converged" ? status : Math.max(status, EXIT.fit);
}

async function readAll(
  inputs: readonly InputFile[],
  io: CommandLineIo,
): Promise<{ files: { file: string; bytes: Uint8Array }[]; unreadable: number }> {
  const files: { file: string; bytes: Uint8Array }[] = [];
  let unreadable = 0;
  for (const input of inputs) {
    try {
      files.push({ file: input.file, bytes: await readFile(resolve(io.workingFolder, input.path)) });
    } catch (cause) {
      unreadable++;
      io.stderr(`rungline: ${input.path}: ${reasonInWords(cause)}\n`);
    }
  }
  return { files, unreadable };
}

function render(result: RunglineResult, format: Format): string {
  if (format === "json") return resultToJson(result);
  if (format === "latex") return resultToLatex(result);
  return format === "csv" ? resultToCsv(result) : resultToText(result);
}

function outcomeInWords(result: RunglineResult): string {
  if (result.power === null || result.power === undefined) return "no series seen";
  const { spectra, lines } = result.power;
  const bleaching = lines.filter((line) => line.reading === "bleaches").length;
  const how = result.status === "converged" ? "converged" : "not converged";
  return `${spectra.length} powers, ${lines.length} lines, ${bleaching} of them bleaching; ${how}`;
}
