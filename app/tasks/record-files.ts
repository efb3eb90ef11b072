import {
  comparisonToCsv,
  comparisonToLatex,
  figureFile,
  protocolToJson,
  reportContents,
  reportToHtml,
  resultsToJson,
  resultToCsv,
  resultToJson,
  resultToLatex,
  type ReportInput,
} from "../report/index.ts";
import type { RecordPart } from "./messages.ts";

export interface TextFile {
  readonly name: string;
  readonly text: string;
}

/** Files of one part, and the name of the archive that a shell makes of them where there are several. */
export interface RecordFiles {
  readonly archive: string;
  readonly files: readonly TextFile[];
}

const BASE_OF_MANY = "rungline";

/** What is kept of a record: one file or several. */
export function recordFiles(input: ReportInput, part: RecordPart): RecordFiles {
  const names = recordNames(input);
  const base = names.length === 1 ? names[0]! : BASE_OF_MANY;
  switch (part) {
    case "report":
      return plain({ name: `${base}.report.html`, text: reportToHtml(input) });
    case "figures":
      return gathered(`${base}.figures.zip`, figures(input, names));
    case "csv":
      return gathered(`${base}.tables.zip`, [
        ...input.results.map((result, i) => ({ name: `${names[i]!}.csv`, text: resultToCsv(result) })),
        ...(input.comparison === null
          ? []
          : [{ name: "comparison.csv", text: comparisonToCsv(input.comparison) }]),
      ]);
    case "latex":
      return plain({
        name: `${base}.tables.tex`,
        text: [
          resultToLatex(...input.results),
          ...(input.comparison === null ? [] : [comparisonToLatex(input.comparison)]),
        ].join("\n"),
      });
    case "results":
      return plain(
        input.results.length === 1
          ? { name: `${base}.json`, text: resultToJson(input.results[0]!) }
          : { name: `${base}.results.json`, text: resultsToJson(input.results) },
      );
    case "protocol":
      return gathered(`${base}.protocols.zip`, protocols(input, names));
  }
}

function figures(input: ReportInput, names: readonly string[]): TextFile[] {
  const { samples, comparison } = reportContents(input);
  return [
    ...samples.flatMap(({ figures: own }, i) =>
      own.map((figure) => ({ name: `${names[i]!}-${figure.name}.svg`, text: figureFile(figure) })),
    ),
    ...(comparison?.figures ?? []).map((figure) => ({
      name: `${figure.name}.svg`,
      text: figureFile(figure),
    })),
  ];
}

/** One protocol where all results have the same. */
function protocols({ results }: ReportInput, names: readonly string[]): TextFile[] {
  const texts = results.map(({ protocol }) => protocolToJson(protocol));
  if (new Set(texts).size === 1)
    return [
      {
        name: results.length === 1 ? `${names[0]!}.protocol.json` : `${BASE_OF_MANY}.protocol.json`,
        text: texts[0]!,
      },
    ];
  return texts.map((text, i) => ({ name: `${names[i]!}.protocol.json`, text }));
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

function plain(file: TextFile): RecordFiles {
  return { archive: file.name, files: [file] };
}

function gathered(archive: string, files: readonly TextFile[]): RecordFiles {
  return { archive, files };
}
