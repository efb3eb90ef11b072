import { readFile } from "node:fs/promises";
import { resolve } from "node:path";
import {
  COMPARED_PARAMETERS,
  findComparisonChoices,
  resolveComparisonChoices,
  wordProtocolIssue,
  type Comparison,
  type ComparisonChoicesInput,
  type ProtocolIssue,
} from "../../app/protocol/index.ts";
import {
  comparisonNotes,
  comparisonToCsv,
  comparisonToJson,
  comparisonToLatex,
  comparisonToText,
  gravestFirst,
  noteLine,
} from "../../app/report/index.ts";
import { compareSamples, typedValues, wordBatchIssue, type BatchIssue } from "../../app/tasks/index.ts";
import {
  mayReplace,
  pathKind,
  programVersion,
  readResults,
  reasonInWords,
  requireFolderOf,
  writeWhole,
} from "../services/index.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT, UsageError } from "./exit-status.ts";
import { formatOf, type Format } from "./output-place.ts";

export interface CompareOptions {
  readonly reference?: string;
  readonly against?: string;
  readonly values?: string;
  readonly errors?: "total" | "statistical";
  readonly parameters?: string;
  readonly quality?: string;
  readonly alpha?: number;
  readonly powerN?: number;
  readonly choices?: string;
  readonly out?: string;
  readonly format?: Format;
}

/** `rungline compare RESULT...`: samples and batches side by side. */
export async function compareCommand(
  words: readonly string[],
  options: CompareOptions,
  io: CommandLineIo,
): Promise<number> {
  const choices = await comparisonChoicesFrom(options, io.workingFolder);
  const out = options.out === undefined ? null : resolve(io.workingFolder, options.out);
  if (out !== null) {
    if ((await pathKind(out)) === "folder") throw new UsageError(`--out ${options.out}: is a folder`);
    if (!(await mayReplace(out, "comparison")))
      throw new UsageError(
        `${out}: exists and is not a comparison of Rungline; it is not replaced, choose another --out`,
      );
    await requireFolderOf(out);
  }
  const { results, refused } = await readResults(words, io.workingFolder);
  for (const text of refused) io.stderr(`rungline: ${text}\n`);
  const compared = compareSamples(results, choices, {
    version: programVersion(),
    node: process.version,
    started: io.now(),
  });
  if (!compared.ok) {
    for (const issue of compared.issues) {
      const { message, remedy } = wordIssue(issue);
      io.stderr(`rungline: ${message}\n  ${remedy}\n`);
    }
    return compared.issues.some((issue) => issue.code === "batch/too-few") ? EXIT.input : EXIT.usage;
  }
  const comparison = compared.value;
  for (const note of gravestFirst(comparisonNotes(comparison))) io.stderr(`  ${noteLine(note)}\n`);
  const format = options.format ?? (out === null ? "text" : formatOf(out));
  const text = RENDER[format](comparison);
  if (out === null) await io.stdout(text);
  else await writeWhole(out, text);
  return refused.length > 0 ? EXIT.input : EXIT.done;
}

const RENDER: Readonly<Record<Format, (comparison: Comparison) => string>> = {
  json: comparisonToJson,
  csv: comparisonToCsv,
  text: comparisonToText,
  latex: comparisonToLatex,
};

export function wordIssue(issue: BatchIssue | ProtocolIssue): { message: string; remedy: string } {
  if (issue.code.startsWith("batch/")) return wordBatchIssue(issue as BatchIssue);
  const { message, remedy } = wordProtocolIssue(issue as ProtocolIssue);
  return { message: message.replace(/^protocol: /, "comparison: "), remedy };
}

export async function comparisonChoicesFrom(
  options: CompareOptions,
  workingFolder: string,
): Promise<ComparisonChoicesInput> {
  const { reference, against, errors, alpha, parameters, quality, values, powerN } = options;
  const file = options.choices === undefined ? {} : await readChoicesFile(options.choices, workingFolder);
  return {
    ...file,
    ...(reference !== undefined && { reference }),
    ...(against !== undefined && { against }),
    ...(errors !== undefined && { errors }),
    ...(alpha !== undefined && { alpha }),
    ...(parameters !== undefined && { parameters: parameters.split(",").map((one) => knownName(one)) }),
    ...(quality !== undefined && { quality: weightsFrom(quality) }),
    ...(powerN !== undefined && { power_n: powerN }),
    ...(values !== undefined && { values: await readValues(values, workingFolder) }),
  };
}

type Name = (typeof COMPARED_PARAMETERS)[number];

function knownName(text: string): Name {
  const name = text.trim();
  const known = COMPARED_PARAMETERS.find((one) => one === name || one === `${name}_eV`);
  if (known === undefined)
    throw new UsageError(`no parameter "${name}" to compare; known: ${COMPARED_PARAMETERS.join(", ")}`);
  return known;
}

/** `highest_n=1,width_floor_eV=-2`: weights by parameter. */
function weightsFrom(text: string): Partial<Record<Name, number>> {
  return Object.fromEntries(
    text.split(",").map((part) => {
      const [name = "", weight = ""] = part.split("=");
      if (weight.trim() === "" || !Number.isFinite(Number(weight)))
        throw new UsageError(`--quality ${part}: expected parameter=weight, for example highest_n=1`);
      return [knownName(name), Number(weight)];
    }),
  );
}

/** Choices of an earlier comparison; what is given beside them wins. */
async function readChoicesFile(file: string, workingFolder: string): Promise<ComparisonChoicesInput> {
  let text: string;
  try {
    text = await readFile(resolve(workingFolder, file), "utf8");
  } catch (cause) {
    throw new UsageError(`--choices ${file}: ${reasonInWords(cause)}`);
  }
  const found = findComparisonChoices(text);
  if (found === null)
    throw new UsageError(
      `--choices ${file}: no choices of a comparison; give a comparison as JSON or a report of several samples`,
    );
  const resolved = resolveComparisonChoices(found);
  if (resolved.ok) return resolved.value;
  const { message, remedy } = wordIssue(resolved.issues[0]!);
  throw new UsageError(`--choices ${file}: ${message.replace(/^comparison: /, "")}; ${remedy}`);
}

async function readValues(file: string, workingFolder: string): Promise<ReturnType<typeof typedValues>> {
  try {
    return typedValues(await readFile(resolve(workingFolder, file)));
  } catch (cause) {
    throw new UsageError(`--values ${file}: ${reasonInWords(cause)}`);
  }
}
