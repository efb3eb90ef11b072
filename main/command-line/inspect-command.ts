import { readFile } from "node:fs/promises";
import { resolve } from "node:path";
import { inspectionToText } from "../../app/report/index.ts";
import { inspectFile, wordIssue, type FileRequest } from "../../app/tasks/index.ts";
import { listInputs, reasonInWords } from "../services/index.ts";
import { readChoices, type ChoiceOptions } from "./choices.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT } from "./exit-status.ts";
import { sayFault } from "./say.ts";

/** `rungline inspect FILE...`: how each file was read, and what was skipped. */
export async function inspectCommand(
  words: readonly string[],
  options: ChoiceOptions,
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<number> {
  const { choices } = await readChoices(options, io.workingFolder);
  const inputs = await listInputs(words, io.workingFolder);
  let status: number = EXIT.done;
  for (const { word, why } of inputs.nothingFound) {
    io.stderr(`rungline: ${word}: ${why}\n`);
    status = EXIT.input;
  }
  let shown = 0;
  for (const { path, file } of inputs.files) {
    if (signal.aborted) return EXIT.cancelled;
    let bytes: Uint8Array;
    try {
      bytes = await readFile(resolve(io.workingFolder, path));
    } catch (cause) {
      io.stderr(`rungline: ${path}: ${reasonInWords(cause)}\n`);
      status = Math.max(status, EXIT.input);
      continue;
    }
    const inspection = tryInspect({ file, bytes, choices });
    if (inspection instanceof Error) {
      sayFault(inspection, io, path);
      status = Math.max(status, EXIT.fault);
    } else if (inspection.ok) {
      await io.stdout((shown++ > 0 ? "\n" : "") + inspectionToText(inspection.value));
    } else {
      for (const { message, remedy } of inspection.issues.map(wordIssue))
        io.stderr(`rungline: ${message}${remedy === "" ? "" : `\n  ${remedy}`}\n`);
      status = Math.max(status, EXIT.input);
    }
  }
  return status;
}

/** A fault in one file is said and does not keep the others from being shown. */
function tryInspect(request: FileRequest): ReturnType<typeof inspectFile> | Error {
  try {
    return inspectFile(request);
  } catch (thrown) {
    return thrown instanceof Error ? thrown : new Error(String(thrown));
  }
}
