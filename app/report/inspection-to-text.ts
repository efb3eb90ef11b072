import type { Spectrum } from "../spectrum/index.ts";
import type { SkippedRow } from "../table/index.ts";
import { cautionsFor } from "./cautions.ts";
import { formatNumber } from "./format-quantity.ts";
import { gravestFirst } from "./notes.ts";
import { labelled, textTable, wrap } from "./text-table.ts";

/** How a file was read, as `inspectFile` of the tasks gives it. */
export interface ReadingShown {
  readonly file: string;
  readonly rows: number;
  readonly headers: readonly string[];
  readonly preview: readonly (readonly number[])[];
  readonly skipped: readonly SkippedRow[];
  readonly spectrum: Spectrum;
}

const PREVIEW_SHOWN = 5;
const SKIPPED_SHOWN = 20;

/** How a file was read: dialect, columns, units, range, noise, and what was skipped and why. */
export function inspectionToText(inspection: ReadingShown): string {
  const { spectrum } = inspection;
  const points = spectrum.energy_eV.length;
  const used = spectrum.used.reduce((sum, one) => sum + one, 0);
  const unit = spectrum.unit === "1" ? "" : ` ${spectrum.unit}`;
  const title = `Reading of ${inspection.file}`;
  const lines = [
    title,
    "=".repeat(Array.from(title).length),
    "",
    ...labelled("File", `${inspection.file}, ${inspection.rows} rows, SHA-256 ${spectrum.sha256}`),
    ...dialectInWords(spectrum.dialect),
    ...labelled(
      "Axis",
      `read in ${spectrum.axisUnitRead} (${spectrum.medium}), ${range(spectrum.energy_eV)} eV, ${points} points, median step ${step(
        spectrum.energy_eV,
      )} µeV`,
    ),
    ...labelled(
      "Signal",
      `${spectrum.quantityRead} read, ${spectrum.unit === "1" ? "optical depth (pure number)" : `absorption coefficient in ${spectrum.unit}`} used, ${rangeUsed(
        spectrum,
      )}${unit}; ${used} of ${points} points used`,
    ),
    ...labelled(
      "Noise",
      `${formatNumber(spectrum.noise.medianSigma, 3)}${unit} a point in the median (${NOISE_WORDS[spectrum.noise.source]})`,
    ),
    "",
    "Columns",
    ...textTable(
      spectrum.columns.map((column) => [
        String(column.column),
        column.header === "" ? "(no header)" : column.header,
        column.role,
        column.reason,
      ]),
      ["right", "left", "left", "left"],
    ),
  ];
  if (spectrum.facts.length > 0) {
    lines.push(
      "",
      "Header",
      ...textTable(
        spectrum.facts.map((fact) => [fact.key, fact.label, fact.text]),
        ["left", "left", "left"],
      ),
    );
  }
  if (inspection.preview.length > 0) {
    const width = inspection.headers.length;
    lines.push(
      "",
      "First rows",
      ...textTable(
        [
          inspection.headers.map((header, j) => (header === "" ? `column ${j + 1}` : header)),
          ...inspection.preview
            .slice(0, PREVIEW_SHOWN)
            .map((row) => row.map((x) => (Number.isFinite(x) ? String(x) : "(missing)"))),
        ],
        Array.from({ length: width }, () => "right" as const),
      ),
    );
  }
  lines.push("", "Skipped", ...skippedLines(inspection.skipped));
  lines.push("", "Notes");
  if (spectrum.notes.length === 0) lines.push("  none");
  for (const note of gravestFirst(spectrum.notes)) {
    lines.push(`  ${note.level === "doubt" ? "DOUBT" : "assumed"} ${note.code} (${note.about})`);
    lines.push(...wrap(note.text, "    "));
    if (note.remedy !== "") lines.push(...wrap(`Remedy: ${note.remedy}`, "    "));
  }
  const cautions = cautionsFor({
    notes: [...spectrum.notes],
    reading: { facts: spectrum.facts.map(({ key, label, text }) => ({ key, label, text })) },
  });
  if (cautions.length > 0) lines.push("", "Cautions", ...cautions.flatMap((caution) => wrap(caution, "  ")));
  return `${lines.join("\n").trimEnd()}\n`;
}

const NOISE_WORDS: Readonly<Record<Spectrum["noise"]["source"], string>> = {
  column: "given in the file",
  protocol: "given in the protocol",
  estimated: "estimated from the data",
};

const DELIMITER_WORDS: Readonly<Record<string, string>> = {
  ",": "comma",
  ";": "semicolon",
  "\t": "tab",
  " ": "spaces",
};

/** What was decided, then why; what does not apply is left out. */
function dialectInWords(dialect: Spectrum["dialect"]): string[] {
  const spoken = Object.entries(dialect)
    .filter(([, value]) => value !== null && value !== "" && value !== false)
    .map(([key, value]) => {
      const name = key
        .replace(/([A-Z])/g, " $1")
        .replaceAll("_", " ")
        .toLowerCase();
      if (value === true) return { name, words: name };
      const shown =
        key === "delimiter"
          ? (DELIMITER_WORDS[String(value)] ?? String(value))
          : key === "decimal" || key === "thousands"
            ? `"${String(value)}"`
            : String(value);
      return { name, words: `${name} ${shown}` };
    });
  const isReason = (name: string): boolean => name.endsWith("reason");
  return [
    ...labelled(
      "Dialect",
      spoken
        .filter(({ name }) => !isReason(name))
        .map(({ words }) => words)
        .join("; "),
    ),
    ...spoken
      .filter(({ name }) => isReason(name))
      .flatMap(({ name, words }) => labelled("", `${name.slice(0, -7)}: ${words.slice(name.length + 1)}`)),
  ];
}

function range(x: Float64Array): string {
  return x.length === 0 ? "no points" : `${x[0]!.toFixed(6)} to ${x[x.length - 1]!.toFixed(6)}`;
}

function rangeUsed(spectrum: Spectrum): string {
  let low = Infinity;
  let high = -Infinity;
  spectrum.signal.forEach((value, i) => {
    if (spectrum.used[i] === 0 || !Number.isFinite(value)) return;
    low = Math.min(low, value);
    high = Math.max(high, value);
  });
  return low > high ? "no points" : `${formatNumber(low)} to ${formatNumber(high)}`;
}

function step(energy_eV: Float64Array): string {
  if (energy_eV.length < 2) return formatNumber(null);
  const steps = Float64Array.from(
    { length: energy_eV.length - 1 },
    (_, i) => energy_eV[i + 1]! - energy_eV[i]!,
  ).sort();
  return formatNumber(1e6 * steps[Math.floor(steps.length / 2)]!, 3);
}

function skippedLines(skipped: readonly SkippedRow[]): string[] {
  if (skipped.length === 0) return ["  nothing"];
  const counts = new Map<string, number>();
  for (const one of skipped) counts.set(one.reason, (counts.get(one.reason) ?? 0) + 1);
  const lines = [
    `  ${skipped.length} in all: ${Array.from(counts, ([reason, count]) => `${count} ${reason}`).join(", ")}`,
    ...textTable(
      skipped
        .slice(0, SKIPPED_SHOWN)
        .map((one) => [
          `line ${one.line}`,
          one.column === null ? "whole line" : `column ${one.column}`,
          one.reason,
          one.found === "" ? "" : JSON.stringify(one.found),
        ]),
      ["left", "left", "left", "left"],
      "    ",
    ),
  ];
  if (skipped.length > SKIPPED_SHOWN) lines.push(`    and ${skipped.length - SKIPPED_SHOWN} more`);
  return lines;
}
