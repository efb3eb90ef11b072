import {
  quotedLevels,
  COMPARISON_CHOICES_SCHEMA,
  type Comparison,
  type Protocol,
  type RunglineResult,
} from "../protocol/index.ts";
import { signalName } from "./area-unit.ts";
import { cautionsFor, CRYOGEN_CAUTION, LASER_CAUTION } from "./cautions.ts";
import { comparisonTables } from "./comparison-tables.ts";
import { comparisonNotes } from "./comparison-to-text.ts";
import type { FittedCurves } from "./curves-csv.ts";
import type { DataTable } from "./data-table.ts";
import {
  ELECTRONVOLT,
  energyUnit,
  formatEnergy,
  formatNumber,
  formatQuantity,
  formatProbability,
} from "./format-quantity.ts";
import { comparisonFigures } from "./figures/comparison-figures.ts";
import { figureToSvg } from "./figures/figure-to-svg.ts";
import { FULL_WIDTH_MM, type Figure } from "./figures/figure.ts";
import { powerFigures } from "./figures/power-figures.ts";
import { powerSpectraFigures } from "./figures/power-spectra-figure.ts";
import { seriesFigures } from "./figures/series-figures.ts";
import { spectrumFigures } from "./figures/spectrum-figure.ts";
import type { PowerSpectrum } from "./figures/stack-spectra.ts";
import { temperatureFigures } from "./figures/temperature-figures.ts";
import { methodsInWords } from "./methods.ts";
import { gravestFirst } from "./notes.ts";
import { powerTables } from "./power-tables.ts";
import { protocolInWords } from "./protocol-in-words.ts";
import { REPORT_STYLE } from "./report-style.ts";
import { resultTables } from "./result-tables.ts";
import { protocolToJson } from "./result-to-json.ts";
import {
  columnsInWords,
  ERRORS_FROM_WORDS,
  noiseInWords,
  statusInWords,
  systematicWords,
  TERMINATION_WORDS,
} from "./result-to-text.ts";
import { escapeMarkup, richToHtml } from "./rich-text.ts";
import { tableToHtml } from "./table-to-html.ts";

/** By its beginning a file is known as a report that may be replaced. */
export const REPORT_HTML_MARK = '<!doctype html>\n<html lang="en" data-rungline="report/1">';

export interface ReportInput {
  readonly results: readonly RunglineResult[];
  /** Fitted curves of each result where they are at hand, in the order of the results. */
  readonly curves: readonly (FittedCurves | null)[];
  /** All spectra of each power series where they are at hand, from the lowest power, in the order of the results. */
  readonly spectra?: readonly (readonly PowerSpectrum[] | null)[];
  readonly comparison: Comparison | null;
  /** The program that makes the report. */
  readonly run: { readonly version: string; readonly node: string; readonly started: string };
}

/** One result with all that a report shows of it. */
export interface SampleContents {
  readonly result: RunglineResult;
  /** As the header names it, else the file. */
  readonly name: string;
  readonly figures: readonly Figure[];
  readonly tables: readonly DataTable[];
}

export interface ReportContents {
  readonly samples: readonly SampleContents[];
  readonly comparison: { readonly figures: readonly Figure[]; readonly tables: readonly DataTable[] } | null;
}

/** Figures and tables of all results and of their comparison: what the report shows and what can be had alone. */
export function reportContents({ results, curves, spectra = [], comparison }: ReportInput): ReportContents {
  return {
    samples: results.map((result, i) => {
      const power = result.power ?? null;
      const fitted = curves[i] ?? null;
      const series = spectra[i] ?? null;
      return {
        result,
        name: sampleName(result),
        figures: [
          ...(fitted === null ? [] : spectrumFigures(result, fitted)),
          ...seriesFigures(result),
          ...(series === null ? [] : powerSpectraFigures(result, series)),
          ...(power === null ? [] : powerFigures(power)),
        ],
        tables: [...resultTables(result), ...(power === null ? [] : powerTables(power, result))],
      };
    }),
    comparison:
      comparison === null
        ? null
        : {
            figures: [
              ...comparisonFigures(comparison),
              ...(comparison.temperature === null ? [] : temperatureFigures(comparison.temperature)),
            ],
            tables: comparisonTables(comparison),
          },
  };
}

function factText(result: RunglineResult, key: string): string | null {
  return result.reading.facts.find((fact) => fact.key === key)?.text ?? null;
}

function sampleName(result: RunglineResult): string {
  return factText(result, "sample") ?? result.source.file;
}

/**
 * What      Results as one HTML document that stands alone: style inside, figures as vector graphics, no script, no link
 *           to anything outside, the results themselves as data at the end, so that the runs can be repeated from it.
 *           The same results give the same text but for `run`.
 */
export function reportToHtml(input: ReportInput): string {
  const contents = reportContents(input);
  const { samples } = contents;
  const several = samples.length > 1;
  const title = several
    ? `Exciton series of ${samples.length} samples`
    : `Exciton series of ${samples[0]!.name}`;
  const body = [
    `<header><h1>${escapeMarkup(title)}</h1>`,
    `<p class="lead">${lead(input)}</p></header>`,
    ...(several ? [overview(samples)] : []),
    ...comparisonSection(input.comparison, contents),
    ...samples.map((sample, i) => sampleSection(sample, i, several, (input.curves[i] ?? null) !== null)),
    ...protocolSection(input.results),
    methodsSection(input),
    ...cautionSection(input),
    repeatSection(input),
  ];
  return `${REPORT_HTML_MARK}
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'">
<title>${escapeMarkup(title)}</title>
<style>${REPORT_STYLE}</style>
</head>
<body>
${body.join("\n")}
${[...input.results, ...choicesOf(input.comparison)].map(embedded).join("\n")}
</body>
</html>
`;
}

function lead({ results, run }: ReportInput): string {
  const files = results.length === 1 ? "one spectrum" : `${results.length} results`;
  return escapeMarkup(
    `Gap, Rydberg energy, quantum defect and linewidth law from ${files}, each number with one standard error in brackets in units of its last place. ` +
      `Report by Rungline ${run.version} on Node ${run.node}, ${run.started}.`,
  );
}

/** How the samples were compared, so that the same comparison can be had from the report. */
function choicesOf(comparison: Comparison | null): object[] {
  return comparison === null ? [] : [{ schema: COMPARISON_CHOICES_SCHEMA, choices: comparison.choices }];
}

/** In HTML data the only thing that could end the element is its closing tag. */
function embedded(data: object): string {
  return `<script type="application/json">${JSON.stringify(data).replaceAll("<", "\\u003c")}</script>`;
}

function doubts(result: RunglineResult): number {
  return result.notes.filter((note) => note.level === "doubt").length;
}

function overview(samples: readonly SampleContents[]): string {
  const rows = samples
    .map(({ result, name }, i) => {
      const levels = result.series === null ? null : quotedLevels(result.series);
      const cells = [
        `<a href="#sample-${i + 1}">${escapeMarkup(name)}</a>`,
        escapeMarkup(factText(result, "batch") ?? ""),
        escapeMarkup(factText(result, "temperature") ?? ""),
        escapeMarkup(result.source.file),
        escapeMarkup(result.status.replace("-", " ")),
        number(levels === null ? "" : formatEnergy(levels.gap_eV, ELECTRONVOLT, THIN)),
        number(
          levels === null ? "" : formatEnergy(levels.rydberg_eV, energyUnit(levels.rydberg_eV.value), THIN),
        ),
        number(levels === null ? "" : formatQuantity(levels.defect0.value, levels.defect0.sigma, "", THIN)),
        String(result.derived?.highest_n ?? ""),
        String(doubts(result)),
      ];
      return `<tr>${cells.map((cell, k) => `<td${k >= 5 ? ' class="n"' : ""}>${cell}</td>`).join("")}</tr>`;
    })
    .join("\n");
  const heads = [
    "sample",
    "batch",
    "temperature",
    "file",
    "status",
    "<i>E</i><sub>g</sub>",
    "<i>Ry</i>",
    "<i>δ</i>",
    "highest <i>n</i>",
    "doubts",
  ];
  return `<nav aria-label="Samples"><div class="table"><table><caption>Samples of this report</caption><thead><tr>${heads
    .map((head, k) => `<th scope="col"${k >= 5 ? ' class="n"' : ""}>${head}</th>`)
    .join("")}</tr></thead><tbody>${rows}</tbody></table></div></nav>`;
}

const THIN = { groupSpace: "\u202f", exactWord: "held" } as const;

function number(text: string): string {
  return escapeMarkup(text.replace(/^-/, "−"));
}

function comparisonSection(comparison: Comparison | null, { comparison: shown }: ReportContents): string[] {
  if (comparison === null || shown === null) return [];
  const notes = comparisonNotes(comparison);
  return [
    `<section id="comparison"><h2>Comparison</h2>`,
    shown.tables.map(tableToHtml).join("\n"),
    figuresToHtml(shown.figures, "c"),
    ...(notes.length === 0 ? [] : ["<h3>Notes on the comparison</h3>", notesToHtml(notes)]),
    "</section>",
  ];
}

function sampleSection(sample: SampleContents, i: number, several: boolean, withCurves: boolean): string {
  const { result, name, figures, tables } = sample;
  const id = `sample-${i + 1}`;
  return [
    `<section class="${several ? "sample" : "only"}" id="${id}">`,
    `<h2>${escapeMarkup(several ? `${name}` : "Result")}</h2>`,
    result.status === "converged" ? "" : `<p class="banner">${escapeMarkup(statusInWords(result))}</p>`,
    keyNumbers(result),
    readingToHtml(result),
    ...(figures.length === 0
      ? []
      : [
          "<h3>Figures</h3>",
          ...(withCurves
            ? []
            : [
                '<p class="remark">The spectrum itself is not drawn: its fitted curves did not lie beside the result (rungline fit --curves and rungline power --curves write them).</p>',
              ]),
          figuresToHtml(figures, `s${i + 1}`),
        ]),
    "<h3>Tables</h3>",
    tables.map(tableToHtml).join("\n"),
    fitToHtml(result),
    "<h3>Notes, the gravest first</h3>",
    notesToHtml(result.notes),
    "</section>",
  ].join("\n");
}

function keyNumbers(result: RunglineResult): string {
  const { series, width_law: width, derived, systematic } = result;
  if (series === null) return "";
  const levels = quotedLevels(series);
  const scaled = levels.scaled ? ", error scaled by the scatter" : "";
  const rydberg = energyUnit(series.rydberg_eV.value);
  const bare = (quantity: { value: number | null; sigma: number | null }): string =>
    formatQuantity(quantity.value, quantity.sigma, "", THIN);
  const plain = <Q extends object>(quantity: Q): Q & { low: null; high: null } => ({
    ...quantity,
    low: null,
    high: null,
  });
  const part = (value: number | null | undefined): string => {
    if (value === null || value === undefined) return "";
    return `, systematic ${systematicWords(value)}`;
  };
  const entries: [string, string][] = [
    [`gap${scaled}${part(systematic?.gap_eV)}`, formatEnergy(plain(levels.gap_eV), ELECTRONVOLT, THIN)],
    [
      `Rydberg energy${scaled}${part(systematic?.rydberg_eV)}`,
      formatEnergy(plain(levels.rydberg_eV), rydberg, THIN),
    ],
    [
      `quantum defect${scaled}${systematic?.defect0 === null || systematic === null ? "" : `, systematic ±${formatNumber(systematic.defect0, 2)}`}`,
      bare(levels.defect0),
    ],
    ...(width === null
      ? []
      : [
          [
            "width floor",
            formatEnergy(plain(width.floor_eV), energyUnit(width.floor_eV.value ?? 1e-6), THIN),
          ] as [string, string],
          ["width exponent", bare(width.exponent)] as [string, string],
        ]),
    ...(derived === null
      ? []
      : [
          [
            "highest n seen, told apart",
            `${derived.highest_n ?? "–"}, ${derived.highest_resolved_n ?? "–"}`,
          ] as [string, string],
        ]),
  ];
  return `<div class="key">${entries.map(([name, value]) => `<div><span>${escapeMarkup(name)}</span><b>${number(value)}</b></div>`).join("")}</div>`;
}

function definitions(entries: readonly (readonly [string, string])[]): string {
  return `<dl>${entries
    .filter(([, text]) => text !== "")
    .map(([term, text]) => `<dt>${escapeMarkup(term)}</dt><dd>${escapeMarkup(text)}</dd>`)
    .join("")}</dl>`;
}

function readingToHtml(result: RunglineResult): string {
  const { source, reading, run } = result;
  const [low, high] = reading.range_eV;
  return `<h3>Job and reading</h3>${definitions([
    ["File", `${source.file}, ${source.points} points`],
    ["SHA-256", source.sha256],
    ["Status", statusInWords(result)],
    ["Header", reading.facts.map((fact) => `${fact.label}: ${fact.text}`).join("; ")],
    ["Columns", columnsInWords(result)],
    [
      "Signal",
      `${signalName(reading.signal_unit)}; ${formatNumber(low, 8)} to ${formatNumber(high, 8)} eV; ${reading.used_points} of ${source.points} points used, ${reading.skipped} rows skipped`,
    ],
    ["Noise", noiseInWords(result)],
    ["Dialect", dialectInWords(result)],
    ["Protocol", protocolInWords(result.protocol).join("; ")],
    ["Fitted by", `Rungline ${run.version} on Node ${run.node}, ${run.started}`],
  ])}`;
}

/** Marks that would be lost between other marks. */
const MARK_NAMES: Readonly<Record<string, string>> = {
  " ": "spaces",
  "\t": "tab",
  ",": "comma",
  ";": "semicolon",
  ".": "point",
  true: "yes",
};

function dialectInWords({ reading: { dialect } }: RunglineResult): string {
  const told = Object.entries(dialect).filter(
    ([key, value]) => !key.endsWith("_reason") && value !== null && value !== "" && value !== false,
  );
  return told
    .map(([key, value]) => {
      const shown = MARK_NAMES[String(value)] ?? String(value);
      return `${key.replace(/([A-Z])/g, " $1").toLowerCase()} ${shown}`;
    })
    .join("; ");
}

function fitToHtml(result: RunglineResult): string {
  const { fit } = result;
  if (fit === null) return "";
  return `<h3>Quality of the fit</h3>${definitions([
    [
      "Window",
      `${formatNumber(fit.window_eV[0], 8)} to ${formatNumber(fit.window_eV[1], 8)} eV, fitted as ${fit.domain}`,
    ],
    ["Stopped by", `${TERMINATION_WORDS[fit.termination]} after ${fit.iterations} iterations`],
    [
      "Chi square",
      `${formatNumber(fit.chi2, 6)} for ${fit.dof} degrees of freedom, reduced ${formatNumber(fit.reduced_chi2)}`,
    ],
    ["AIC, BIC", `${fit.aic?.toFixed(1) ?? "–"}, ${fit.bic?.toFixed(1) ?? "–"}`],
    [
      "Residuals",
      `p of runs ${formatProbability(fit.runs_p)}; Durbin-Watson ${formatNumber(fit.durbin_watson, 3)}; correlation of neighbours ${formatNumber(fit.lag1, 2)}; effective points ${formatNumber(fit.effective_points, 5)}`,
    ],
    ["Parameters", `${fit.parameters}, rank ${fit.rank}, condition ${formatNumber(fit.condition, 2)}`],
    ["Standard errors", ERRORS_FROM_WORDS[fit.sigma_from]],
  ])}`;
}

function notesToHtml(notes: RunglineResult["notes"]): string {
  if (notes.length === 0) return "<p>None.</p>";
  const items = gravestFirst(notes).map(
    (note) =>
      `<li class="${note.level}"><b>${note.level === "doubt" ? "Doubt" : "Assumed"}</b> ${escapeMarkup(note.text)}` +
      `${note.remedy === "" ? "" : ` <i>Remedy:</i> ${escapeMarkup(note.remedy)}.`} <code>${escapeMarkup(note.code)}, ${escapeMarkup(note.about)}</code></li>`,
  );
  return `<ul class="notes">${items.join("\n")}</ul>`;
}

function figuresToHtml(figures: readonly Figure[], prefix: string): string {
  const items = figures.map(
    (figure) =>
      `<figure class="${figure.width_mm === FULL_WIDTH_MM ? "wide" : "column"}">${figureToSvg(figure, `${prefix}-`)}<figcaption>${richToHtml(figure.caption)}</figcaption></figure>`,
  );
  return `<div class="figures">${items.join("\n")}</div>`;
}

function protocolSection(results: readonly RunglineResult[]): string[] {
  const groups = new Map<string, { protocol: Protocol; files: string[] }>();
  for (const { protocol, source } of results) {
    const key = protocolToJson(protocol);
    const group = groups.get(key) ?? { protocol, files: [] };
    group.files.push(source.file);
    groups.set(key, group);
  }
  const one = groups.size === 1;
  return [
    `<section id="protocol"><h2>Protocol</h2><p>All choices that turned ${one ? "each spectrum" : "the spectra"} into a result, defaults spelled out.</p>`,
    ...[...groups].map(
      ([json, { files }]) =>
        `${one ? "" : `<h3>${escapeMarkup(files.join(", "))}</h3>`}<pre>${escapeMarkup(json)}</pre>`,
    ),
    "</section>",
  ];
}

function methodsSection({ results, comparison }: ReportInput): string {
  const items = methodsInWords(results, comparison).map(({ title, text }) => [title, text] as const);
  return `<section id="methods"><h2>Methods and sources</h2>${definitions(items)}</section>`;
}

function cautionSection({ results, comparison }: ReportInput): string[] {
  const cautions = new Set(results.flatMap((result) => cautionsFor(result)));
  if (results.some((result) => (result.power ?? null) !== null)) cautions.add(LASER_CAUTION);
  if ((comparison?.temperature ?? null) !== null) cautions.add(CRYOGEN_CAUTION);
  return cautions.size === 0
    ? []
    : [
        `<section id="cautions"><h2>Cautions</h2>${[...cautions].map((text) => `<p class="caution">${escapeMarkup(text)}</p>`).join("")}</section>`,
      ];
}

function repeatSection({ results }: ReportInput): string {
  const rows = results
    .map(
      ({ source, run }) =>
        `<tr><td>${escapeMarkup(source.file)}</td><td class="hash"><code>${escapeMarkup(source.sha256)}</code></td><td>${escapeMarkup(run.version)}</td><td>${escapeMarkup(run.node)}</td><td>${escapeMarkup(run.started)}</td></tr>`,
    )
    .join("\n");
  return `<section id="repeat"><h2>To repeat the run</h2>
<p>This file carries its results and their protocol as data: <code>rungline fit FILE --protocol REPORT.html</code> repeats the run of one protocol to the last bit and names a changed input, protocol or version; <code>rungline compare REPORT.html --choices REPORT.html</code> repeats the comparison with its weights and typed columns. Inputs are known by their SHA-256.</p>
<div class="table"><table><caption>Inputs and versions</caption><thead><tr><th scope="col">file</th><th scope="col">SHA-256</th><th scope="col">version</th><th scope="col">runtime</th><th scope="col">fitted</th></tr></thead><tbody>${rows}</tbody></table></div></section>`;
}
