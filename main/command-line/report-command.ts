import { readFile } from "node:fs/promises";
import { basename, join, resolve } from "node:path";
import type { Comparison, RunglineResult } from "../../app/protocol/index.ts";
import {
  comparisonToCsv,
  comparisonToLatex,
  curvesFromCsv,
  FIGURE_DPI,
  FIGURE_KINDS,
  FULL_WIDTH_MM,
  makeFigurePress,
  NARROWEST_MM,
  ONE_COLUMN_MM,
  OWN_SIZE,
  reportContents,
  reportToHtml,
  resultToCsv,
  resultToLatex,
  seriesCurvesFromCsv,
  WIDEST_MM,
  type FigureChoices,
  type FigureKind,
  type FigurePress,
  type FittedCurves,
  type PowerSpectrum,
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
import { makeProgress } from "./progress-bar.ts";

export interface ReportOptions extends Pick<
  CompareOptions,
  "reference" | "against" | "values" | "errors" | "quality" | "powerN" | "choices"
> {
  readonly out?: string;
  readonly figures?: string;
  readonly figureKinds?: string;
  readonly figureWidth?: string;
  readonly figureDpi?: string;
  readonly tables?: string;
}

interface Output {
  readonly file: string;
  readonly kind: OutputKind;
  /** Made when it is written: many figures need not be held at once. */
  readonly content: () => string | Promise<Uint8Array>;
}

/** `rungline report RESULT...`: one HTML file, and figures and tables alone. */
export async function reportCommand(
  words: readonly string[],
  options: ReportOptions,
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<number> {
  const choices = await comparisonChoicesFrom(options, io.workingFolder);
  const look = figureLookFrom(options);
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
  const beside = await Promise.all(results.map((result, i) => curvesBeside(result, paths, i, io)));
  const input: ReportInput = {
    results,
    curves: beside.map(({ curves }) => curves),
    spectra: beside.map(({ spectra }) => spectra),
    comparison,
    run,
  };
  const press = options.figures === undefined ? null : await openPress();
  const outputs: Output[] = [
    ...(out === null ? [] : [{ file: out, kind: "report" as const, content: () => reportToHtml(input) }]),
    ...(press === null
      ? []
      : figureOutputs(resolve(io.workingFolder, options.figures!), input, paths, press, look)),
    ...(options.tables === undefined
      ? []
      : tableOutputs(resolve(io.workingFolder, options.tables), input, paths)),
  ];
  if (options.out === undefined && options.figures === undefined && options.tables === undefined)
    await io.stdout(reportToHtml(input));
  for (const { file, kind } of outputs) await refuseOther(file, kind);
  for (const folder of [options.figures, options.tables])
    if (folder !== undefined) await makeFolder(resolve(io.workingFolder, folder));
  if (!(await writeAll(outputs, io, signal))) return EXIT.cancelled;
  for (const character of press?.takeMissing() ?? [])
    io.stderr(
      `rungline: the typeface of the figures has no sign for "${character}": another stands for it\n`,
    );
  return refused.length > 0 ? EXIT.input : EXIT.done;
}

/** False where it was cancelled: what is written by then is whole. */
async function writeAll(
  outputs: readonly Output[],
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<boolean> {
  const bar = io.terminal !== null && outputs.length > 1 ? await makeProgress(io, ["writing"]) : null;
  bar?.begin(0);
  try {
    for (const [i, { file, content }] of outputs.entries()) {
      if (signal.aborted) return false;
      bar?.update(0, i / outputs.length, basename(file));
      await writeWhole(file, await content());
      // Nothing here waits for long, so Ctrl+C is heard only where it is let in.
      await new Promise((resolve) => setImmediate(resolve));
    }
    return true;
  } finally {
    bar?.close();
  }
}

async function refuseOther(file: string, kind: OutputKind): Promise<void> {
  if (!(await mayReplace(file, kind)))
    throw new UsageError(
      `${file}: exists and is not a ${kind} of Rungline; it is not replaced, choose another place`,
    );
}

interface CurvesBeside {
  readonly curves: FittedCurves | null;
  readonly spectra: readonly PowerSpectrum[] | null;
}

const NO_CURVES: CurvesBeside = { curves: null, spectra: null };

/**
 * NAME.curves.csv beside NAME.json, if it is of the same data; a file with several results has none. The spectrum of a power
 * series is that of its lowest power.
 */
async function curvesBeside(
  result: RunglineResult,
  paths: readonly string[],
  i: number,
  io: CommandLineIo,
): Promise<CurvesBeside> {
  const path = paths[i]!;
  if (paths.filter((other) => other === path).length > 1 || !/\.json$/i.test(path)) return NO_CURVES;
  const file = resolve(io.workingFolder, path.replace(/\.json$/i, ".curves.csv"));
  let text: string;
  try {
    text = await readFile(file, "utf8");
  } catch {
    return NO_CURVES;
  }
  const isSeries = (result.power ?? null) !== null;
  const spectra = isSeries ? seriesCurvesFromCsv(text, result) : null;
  const curves = isSeries ? (spectra?.[0]?.curves ?? null) : curvesFromCsv(text, result);
  if (curves === null) io.stderr(`rungline: ${file}: not the curves of ${path}; left out\n`);
  return { curves, spectra };
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

/** Which files a figure becomes, and how large. */
interface FigureLook {
  readonly kinds: readonly FigureKind[];
  readonly choices: FigureChoices;
}

function figureLookFrom(options: ReportOptions): FigureLook {
  const { figures, figureKinds, figureWidth, figureDpi } = options;
  const kinds = kindsFrom(figureKinds ?? FIGURE_KINDS[0]);
  for (const [option, value] of [
    ["--figure-kinds", figureKinds],
    ["--figure-width", figureWidth],
    ["--figure-dpi", figureDpi],
  ])
    if (value !== undefined && figures === undefined)
      throw new UsageError(`${option} says how figures are written: name their folder with --figures`);
  if (figureDpi !== undefined && !kinds.includes("png"))
    throw new UsageError("--figure-dpi is for PNG: ask for it with --figure-kinds png");
  return {
    kinds,
    choices: {
      width_mm: figureWidth === undefined ? null : widthFrom(figureWidth),
      dpi: figureDpi === undefined ? OWN_SIZE.dpi : dpiFrom(figureDpi),
    },
  };
}

function kindsFrom(words: string): readonly FigureKind[] {
  const found = words.split(",").map((word) => {
    const bare = word.trim().toLowerCase().replace(/^\./, "");
    const kind = FIGURE_KINDS.find((one) => one === bare);
    if (kind === undefined)
      throw new UsageError(
        `--figure-kinds ${words}: "${word.trim()}" is none of ${FIGURE_KINDS.join(", ")}; several are separated by commas`,
      );
    return kind;
  });
  return [...new Set(found)];
}

const WIDTH_NAMES: Readonly<Record<string, number>> = { column: ONE_COLUMN_MM, page: FULL_WIDTH_MM };

function widthFrom(words: string): number {
  const width = WIDTH_NAMES[words] ?? Number(words.replace(/\s*mm$/, ""));
  if (words.trim() === "" || !(width >= NARROWEST_MM && width <= WIDEST_MM))
    throw new UsageError(
      `--figure-width ${words}: is column (${ONE_COLUMN_MM} mm), page (${FULL_WIDTH_MM} mm) or a number of mm from ${NARROWEST_MM} to ${WIDEST_MM}`,
    );
  return width;
}

function dpiFrom(words: string): number {
  const dpi = FIGURE_DPI.find((one) => String(one) === words);
  if (dpi === undefined) throw new UsageError(`--figure-dpi ${words}: is one of ${FIGURE_DPI.join(", ")}`);
  return dpi;
}

/** Only where figures are asked for: typefaces and what writes PDF are large. */
async function openPress(): Promise<FigurePress> {
  const { drawingTools } = await import("../services/drawing-tools.ts");
  return makeFigurePress(await drawingTools());
}

function figureOutputs(
  folder: string,
  input: ReportInput,
  paths: readonly string[],
  press: FigurePress,
  { kinds, choices }: FigureLook,
): Output[] {
  const names = namesOf(input, paths);
  const { samples, comparison } = reportContents(input);
  const figures = [
    ...samples.flatMap((sample, i) =>
      sample.figures.map((figure) => ({ name: `${names[i]!}-${figure.name}`, figure })),
    ),
    ...(comparison?.figures ?? []).map((figure) => ({ name: figure.name, figure })),
  ];
  return figures.flatMap(({ name, figure }) =>
    kinds.map((kind): Output => ({
      file: join(folder, `${name}.${kind}`),
      kind: "figure",
      content: () => press.make(figure, kind, choices),
    })),
  );
}

function tableOutputs(folder: string, input: ReportInput, paths: readonly string[]): Output[] {
  const names = namesOf(input, paths);
  const { comparison } = input;
  return [
    ...input.results.flatMap((result, i): Output[] => [
      { file: join(folder, `${names[i]!}.tex`), kind: "result", content: () => resultToLatex(result) },
      { file: join(folder, `${names[i]!}.csv`), kind: "result", content: () => resultToCsv(result) },
    ]),
    ...(comparison === null
      ? []
      : [
          {
            file: join(folder, "comparison.tex"),
            kind: "comparison" as const,
            content: () => comparisonToLatex(comparison),
          },
          {
            file: join(folder, "comparison.csv"),
            kind: "comparison" as const,
            content: () => comparisonToCsv(comparison),
          },
        ]),
  ];
}
