import { quotedLevels, type RunglineResult } from "../protocol/index.ts";
import { csvLine } from "./csv.ts";

export const SUMMARY_SCHEMA = "rungline-summary/1";

/** Energies in eV; new columns come last, so that programs that count columns go on reading. */
export const SUMMARY_COLUMNS = [
  "file",
  "status",
  "lines",
  "n_min",
  "n_max",
  "gap_eV",
  "gap_sigma_eV",
  "gap_systematic_eV",
  "rydberg_eV",
  "rydberg_sigma_eV",
  "rydberg_systematic_eV",
  "defect0",
  "defect0_sigma",
  "defect0_systematic",
  "width_floor_eV",
  "width_floor_sigma_eV",
  "width_coefficient_eV",
  "width_coefficient_sigma_eV",
  "width_exponent",
  "width_exponent_sigma",
  "highest_n",
  "highest_resolved_n",
  "reduced_chi2",
  "doubts",
  "sha256",
  "sample",
  "batch",
  "temperature",
  "level_errors",
] as const;

/** By its beginning a file is known as a summary that may be replaced. */
export const SUMMARY_MARK = csvLine(SUMMARY_COLUMNS.slice(0, 6)).trimEnd();

export type SummaryRow = Readonly<Record<(typeof SUMMARY_COLUMNS)[number], string | number | null>>;

/** What one result gives to the table over many: small, so that a long run need not keep whole results. */
export function summaryRow(result: RunglineResult): SummaryRow {
  const { series, systematic, width_law: width, derived, fit } = result;
  const levels = series === null ? null : quotedLevels(series);
  const fact = (key: string): string | null =>
    result.reading.facts.find((one) => one.key === key)?.text ?? null;
  return {
    file: result.source.file,
    status: result.status,
    lines: result.lines.length,
    n_min: series?.fit_n[0] ?? null,
    n_max: series?.fit_n[1] ?? null,
    gap_eV: levels?.gap_eV.value ?? null,
    gap_sigma_eV: levels?.gap_eV.sigma ?? null,
    gap_systematic_eV: systematic?.gap_eV ?? null,
    rydberg_eV: levels?.rydberg_eV.value ?? null,
    rydberg_sigma_eV: levels?.rydberg_eV.sigma ?? null,
    rydberg_systematic_eV: systematic?.rydberg_eV ?? null,
    defect0: levels?.defect0.value ?? null,
    defect0_sigma: levels?.defect0.sigma ?? null,
    defect0_systematic: systematic?.defect0 ?? null,
    width_floor_eV: width?.floor_eV.value ?? null,
    width_floor_sigma_eV: width?.floor_eV.sigma ?? null,
    width_coefficient_eV: width?.coefficient_eV.value ?? null,
    width_coefficient_sigma_eV: width?.coefficient_eV.sigma ?? null,
    width_exponent: width?.exponent.value ?? null,
    width_exponent_sigma: width?.exponent.sigma ?? null,
    highest_n: derived?.highest_n ?? null,
    highest_resolved_n: derived?.highest_resolved_n ?? null,
    reduced_chi2: fit?.reduced_chi2 ?? null,
    doubts: result.notes
      .filter((note) => note.level === "doubt")
      .map((note) => note.code)
      .join(" "),
    sha256: result.source.sha256,
    sample: fact("sample"),
    batch: fact("batch"),
    temperature: fact("temperature"),
    // Scaled by the scatter where the level law was rejected; true for one defect only where that was held.
    level_errors:
      levels === null
        ? null
        : [
            levels.scaled ? "scaled" : "plain",
            ...(systematic?.held_defect === undefined ? [] : ["for the held defect"]),
          ].join(", "),
  };
}

/** One row a spectrum (RFC 4180), for a look over a folder of results. */
export function summaryToCsv(rows: readonly SummaryRow[]): string {
  return (
    csvLine(SUMMARY_COLUMNS) +
    rows.map((row) => csvLine(SUMMARY_COLUMNS.map((column) => row[column]))).join("")
  );
}

/** The same table as JSON. */
export function summaryToJson(rows: readonly SummaryRow[]): string {
  return `${JSON.stringify({ schema: SUMMARY_SCHEMA, spectra: rows }, null, 2)}\n`;
}
