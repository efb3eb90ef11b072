import { stopIfCancelled, type Watch } from "../base/index.ts";
import {
  comparisonToCsv,
  comparisonToLatex,
  protocolToJson,
  reportContents,
  reportToHtml,
  resultsToJson,
  resultToCsv,
  resultToJson,
  resultToLatex,
  type Figure,
  type FigurePress,
  type ReportInput,
} from "../report/index.ts";
import type { FigureWish, RecordPart } from "./messages.ts";

export interface KeptFile {
  readonly name: string;
  readonly content: string | Uint8Array;
}

/** Files of one part, and the name of the archive that a shell makes of them where there are several. */
export interface RecordFiles {
  readonly archive: string;
  readonly files: readonly KeptFile[];
}

const BASE_OF_MANY = "rungline";

/** What is kept of a record: one file or several. */
export function recordFiles(input: ReportInput, part: RecordPart): RecordFiles {
  const names = recordNames(input);
  const base = names.length === 1 ? names[0]! : BASE_OF_MANY;
  switch (part) {
    case "report":
      return plain({ name: `${base}.report.html`, content: reportToHtml(input) });
    case "csv":
      return gathered(`${base}.tables.zip`, [
        ...input.results.map((result, i) => ({ name: `${names[i]!}.csv`, content: resultToCsv(result) })),
        ...(input.comparison === null
          ? []
          : [{ name: "comparison.csv", content: comparisonToCsv(input.comparison) }]),
      ]);
    case "latex":
      return plain({
        name: `${base}.tables.tex`,
        content: [
          resultToLatex(...input.results),
          ...(input.comparison === null ? [] : [comparisonToLatex(input.comparison)]),
        ].join("\n"),
      });
    case "results":
      return plain(
        input.results.length === 1
          ? { name: `${base}.json`, content: resultToJson(input.results[0]!) }
          : { name: `${base}.results.json`, content: resultsToJson(input.results) },
      );
    case "protocol":
      return gathered(`${base}.protocols.zip`, protocols(input, names));
  }
}

/** Every figure of a record, by the name that its file has before the ending. */
export function recordFigures(input: ReportInput): { readonly name: string; readonly figure: Figure }[] {
  const names = recordNames(input);
  const { samples, comparison } = reportContents(input);
  return [
    ...samples.flatMap(({ figures }, i) =>
      figures.map((figure) => ({ name: `${names[i]!}-${figure.name}`, figure })),
    ),
    ...(comparison?.figures ?? []).map((figure) => ({ name: figure.name, figure })),
  ];
}

/**
 * Figures alone, one after the other. `pause` lets the thread hear others in between. Throws `Cancelled` when the watch
 * says so.
 */
export async function figureFiles(
  input: ReportInput,
  { name, kind, choices }: FigureWish,
  press: FigurePress,
  watch: Watch,
  pause: () => Promise<void>,
): Promise<RecordFiles> {
  const names = recordNames(input);
  const asked = recordFigures(input).filter((one) => name === null || one.name === name);
  const files: KeptFile[] = [];
  for (const one of asked) {
    await pause();
    stopIfCancelled(watch);
    watch.report(files.length / asked.length, one.name);
    files.push({ name: `${one.name}.${kind}`, content: await press.make(one.figure, kind, choices) });
  }
  return gathered(`${names.length === 1 ? names[0]! : BASE_OF_MANY}.figures.zip`, files);
}

/** One protocol where all results have the same. */
function protocols({ results }: ReportInput, names: readonly string[]): KeptFile[] {
  const texts = results.map(({ protocol }) => protocolToJson(protocol));
  if (new Set(texts).size === 1)
    return [
      {
        name: results.length === 1 ? `${names[0]!}.protocol.json` : `${BASE_OF_MANY}.protocol.json`,
        content: texts[0]!,
      },
    ];
  return texts.map((content, i) => ({ name: `${names[i]!}.protocol.json`, content }));
}

/** The file that a result came from without its ending; a number where two would be alike. */
export function recordNames({ results }: Pick<ReportInput, "results">): string[] {
  const bare = results.map(
    ({ source, power }) =>
      source.file
        .replace(/\.[^.]+$/, "")
        .replace(/[^\p{L}\p{N}._-]+/gu, "-")
        .replace(/^\.+/, "") + ((power ?? null) === null ? "" : ".power"),
  );
  return bare.map((name, i) =>
    bare.filter((other) => other === name).length > 1
      ? `${name}-${bare.slice(0, i + 1).filter((other) => other === name).length}`
      : name,
  );
}

function plain(file: KeptFile): RecordFiles {
  return { archive: file.name, files: [file] };
}

function gathered(archive: string, files: readonly KeptFile[]): RecordFiles {
  return { archive, files };
}
