import { readFile } from "node:fs/promises";
import { basename, join, resolve } from "node:path";
import type { Comparison, RunglineResult } from "../../app/protocol/index.ts";
import {
  comparisonToCsv,
  comparisonToLatex,
  curvesFromCsv,
  figureFile,
  reportContents,
  reportToHtml,
  resultToCsv,
  resultToLatex,
  type FittedCurves,
  type ReportInput,
} from "../../app/report/index.ts";
import { compareSamples } from "../../app/tasks/index.ts";
import {
  makeFolder,
  mayReplace,
  pathKind,
  programVersion,
  readResults,
  requireFolderOf,
  writeWhole,
  type OutputKind,
} from "../services/index.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { comparisonChoicesFrom, wordIssue, type CompareOptions } from "./compare-command.ts";
import { EXIT, UsageError } from "./exit-status.ts";

export interface ReportOptions extends Pick<CompareOptions, "reference" | "against" | "values"> {
  readonly out?: string;
  readonly figures?: string;
  readonly tables?: string;
}

interface Output {
  readonly file: string;
  readonly kind: OutputKind;
  /** Made when it is written: many figures need not be held at once. */
  readonly text: () => string;
}

/** `rungline report RESULT...`: one HTML file, and figures and tables alone. */
export async function reportCommand(
  words: readonly string[],
  options: ReportOptions,
  io: CommandLineIo,
): Promise<number> {
  const choices = await comparisonChoicesFrom(options, io.workingFolder);
  const out = options.out === undefined ? null : resolve(io.workingFolder, options.out);
  if (out !== null) {
    if ((await pathKind(out)) === "folder") throw new UsageError(`--out ${options.out}: is a folder`);
    await refuseOther(out, "report");
    await requireFolderOf(out);
  }
  const { results, paths, refused } = await readResults(words, io.workingFolder);
  for (const text of refused) io.stderr(`rungline: ${text}\n`);
  if (results.length === 0) {
    if (refused.length === 0) io.stderr("rungline: no results to report\n");
    return EXIT.input;
  }
  const run = { version: programVersion(), node: process.version, started: io.now() };
  let comparison: Comparison | null = null;
  if (results.length > 1) {
    const compared = compareSamples(results, choices, run);
    if (compared.ok) comparison = compared.value;
    else if (compared.issues.some((issue) => issue.code !== "batch/too-few")) {
      for (const issue of compared.issues) {
        const { message, remedy } = wordIssue(issue);
        io.stderr(`rungline: ${message}\n  ${remedy}\n`);
      }
      return EXIT.usage;
    }
  }
  const curves = await Promise.all(results.map((result, i) => curvesBeside(result, paths, i, io)));
  const input: ReportInput = { results, curves, comparison, run };
  const outputs: Output[] = [
    ...(out === null ? [] : [{ file: out, kind: "report" as const, text: () => reportToHtml(input) }]),
    ...(options.figures === undefined
      ? []
      : figureOutputs(resolve(io.workingFolder, options.figures), input, paths)),
    ...(options.tables === undefined
      ? []
      : tableOutputs(resolve(io.workingFolder, options.tables), input, paths)),
  ];
  if (options.out === undefined && options.figures === undefined && options.tables === undefined)
    await io.stdout(reportToHtml(input));
  for (const { file, kind } of outputs) await refuseOther(file, kind);
  for (const folder of [options.figures, options.tables])
    if (folder !== undefined) await makeFolder(resolve(io.workingFolder, folder));
  for (const { file, text } of outputs) await writeWhole(file, text());
  return refused.length > 0 ? EXIT.input : EXIT.done;
}

async function refuseOther(file: string, kind: OutputKind): Promise<void> {
  if (!(await mayReplace(file, kind)))
    throw new UsageError(
      `${file}: exists and is not a ${kind} of Rungline; it is not replaced, choose another place`,
    );
}

/** NAME.curves.csv beside NAME.json, if it is of the same data; a file with several results has none. */
async function curvesBeside(
  result: RunglineResult,
  paths: readonly string[],
  i: number,
  io: CommandLineIo,
): Promise<FittedCurves | null> {
  const path = paths[i]!;
  if (paths.filter((other) => other === path).length > 1 || !/\.json$/i.test(path)) return null;
  const file = resolve(io.workingFolder, path.replace(/\.json$/i, ".curves.csv"));
  let text: string;
  try {
    text = await readFile(file, "utf8");
  } catch {
    return null;
  }
  const curves = curvesFromCsv(text, result);
  if (curves === null) io.stderr(`rungline: ${file}: not the curves of ${path}; left out\n`);
  return curves;
}

/** A name for files from the result's own file; a number where two would be alike. */
function namesOf(input: ReportInput, paths: readonly string[]): string[] {
  const bare = input.results.map((result, i) =>
    (/\.json$/i.test(paths[i]!) ? basename(paths[i]!).replace(/\.json$/i, "") : result.source.file)
      .replace(/[^\p{L}\p{N}._-]+/gu, "-")
      .replace(/^\.+/, ""),
  );
  return bare.map((name, i) =>
    bare.filter((other) => other === name).length > 1
      ? `${name}-${bare.slice(0, i + 1).filter((other) => other === name).length}`
      : name,
  );
}

function figureOutputs(folder: string, input: ReportInput, paths: readonly string[]): Output[] {
  const names = namesOf(input, paths);
  const { samples, comparison } = reportContents(input);
  return [
    ...samples.flatMap(({ figures }, i) =>
      figures.map((figure): Output => ({
        file: join(folder, `${names[i]!}-${figure.name}.svg`),
        kind: "figure",
        text: () => figureFile(figure),
      })),
    ),
    ...(comparison?.figures ?? []).map((figure): Output => ({
      file: join(folder, `${figure.name}.svg`),
      kind: "figure",
      text: () => figureFile(figure),
    })),
  ];
}

function tableOutputs(folder: string, input: ReportInput, paths: readonly string[]): Output[] {
  const names = namesOf(input, paths);
  const { comparison } = input;
  return [
    ...input.results.flatMap((result, i): Output[] => [
      { file: join(folder, `${names[i]!}.tex`), kind: "result", text: () => resultToLatex(result) },
      { file: join(folder, `${names[i]!}.csv`), kind: "result", text: () => resultToCsv(result) },
    ]),
    ...(comparison === null
      ? []
      : [
          {
            file: join(folder, "comparison.tex"),
            kind: "comparison" as const,
            text: () => comparisonToLatex(comparison),
          },
          {
            file: join(folder, "comparison.csv"),
            kind: "comparison" as const,
            text: () => comparisonToCsv(comparison),
          },
        ]),
  ];
}
