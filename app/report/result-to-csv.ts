import { quotedLevels, type LineResult, type RunglineResult } from "../protocol/index.ts";
import { areaUnit, signalUnitWords } from "./area-unit.ts";
import { csvLine } from "./csv.ts";
import { gravestFirst } from "./notes.ts";
import { powerRows } from "./power-to-csv.ts";

type Quantity = LineResult["energy_eV"];
type Cell = string | number | boolean | null;

export const RESULT_CSV_COLUMNS = [
  "file",
  "section",
  "name",
  "n",
  "value",
  "sigma",
  "low",
  "high",
  "unit",
  "text",
] as const;

/** The first line of a result as CSV; by it a file is known as one that may be replaced. */
export const RESULT_CSV_MARK = csvLine(RESULT_CSV_COLUMNS).trimEnd();

/**
 * Results as one tidy table (RFC 4180): one row a number, in the same columns throughout, energies in eV, full
 * precision; empty where a number is not determined. `sigma` is one standard error, `low` and `high` the interval at
 * the level of the protocol; the systematic part stands in rows of its own.
 */
export function resultToCsv(...results: readonly RunglineResult[]): string {
  return csvLine(RESULT_CSV_COLUMNS) + results.map(resultRows).join("");
}

function resultRows(result: RunglineResult): string {
  const out: string[] = [];
  const row = (
    section: string,
    name: string,
    n: number | null,
    quantity: Quantity,
    unit: string,
    text = "",
  ): void => {
    out.push(
      csvLine([
        result.source.file,
        section,
        name,
        n,
        quantity.value,
        quantity.sigma,
        // What is held has no interval.
        quantity.sigma === 0 ? null : quantity.low,
        quantity.sigma === 0 ? null : quantity.high,
        unit,
        text,
      ]),
    );
  };
  const number = (
    section: string,
    name: string,
    value: number | null,
    unit = "",
    n: number | null = null,
  ): void => row(section, name, n, { value, sigma: null, low: null, high: null }, unit);
  const words = (section: string, name: string, text: string, n: number | null = null): void =>
    row(section, name, n, { value: null, sigma: null, low: null, high: null }, "", text);

  const signalUnit = signalUnitWords(result.reading.signal_unit);
  const area = areaUnit(result.reading.signal_unit);

  words("source", "file", result.source.file);
  words("source", "sha256", result.source.sha256);
  number("source", "points", result.source.points);
  for (const column of result.reading.columns)
    words("reading", column.role, `column ${column.column} "${column.header}": ${column.reason}`);
  for (const fact of result.reading.facts) words("reading", fact.key, `${fact.label}: ${fact.text}`);
  number("reading", "skipped", result.reading.skipped);
  number("reading", "used_points", result.reading.used_points);
  number("reading", "range_low", result.reading.range_eV[0], "eV");
  number("reading", "range_high", result.reading.range_eV[1], "eV");
  number("reading", "median_sigma", result.reading.noise.median_sigma, signalUnit);
  words("status", "status", result.status);

  const { series, systematic, width_law, strength_law, tail, derived, fit } = result;
  if (series !== null) {
    const levels = quotedLevels(series);
    const defect = systematic?.held_defect;
    const range = `n ${series.fit_n[0]} to ${series.fit_n[1]}${defect === undefined ? "" : `, for the defect held at ${defect.defect0}`}`;
    const how = levels.scaled ? `${range}, error scaled by the scatter since the law is rejected` : range;
    row("series", "gap", null, levels.gap_eV, "eV", how);
    row("series", "rydberg", null, levels.rydberg_eV, "eV", how);
    row("series", "defect0", null, levels.defect0, "", levels.defect0.sigma === 0 ? `${range}, held` : how);
    row("series", "defect2", null, series.defect2, "", range);
    number("series", "chi2", series.chi2);
    number("series", "dof", series.dof);
    number("series", "p", series.p);
    if (levels.scaled) {
      row("series_unscaled", "gap", null, series.gap_eV, "eV");
      row("series_unscaled", "rydberg", null, series.rydberg_eV, "eV");
      row("series_unscaled", "defect0", null, series.defect0, "");
    }
    const { names, matrix } = series.correlation;
    names.forEach((name, i) =>
      names
        .slice(i + 1)
        .forEach((other, k) => number("correlation", `${name} ${other}`, matrix[i]?.[i + 1 + k] ?? null)),
    );
    for (const one of series.ranges) {
      const text = `n ${one.n_min} to ${one.n_max}`;
      row("range", "gap", one.n_min, one.gap_eV, "eV", text);
      row("range", "rydberg", one.n_min, one.rydberg_eV, "eV", text);
      row("range", "defect0", one.n_min, one.defect0, "", text);
    }
    for (const one of series.readings)
      row(
        "reading_of_n",
        "defect0",
        one.shift,
        { value: one.defect0, sigma: null, low: null, high: null },
        "",
        `strength chi2 ${one.strength_chi2 ?? "not determined"}, width chi2 ${one.width_chi2 ?? "not determined"}${
          one.chosen ? ", chosen" : ""
        }`,
      );
  }
  if (systematic !== null) {
    const part = (value: number | null): Quantity => ({ value: null, sigma: value, low: null, high: null });
    row("systematic", "gap", null, part(systematic.gap_eV), "eV");
    row("systematic", "rydberg", null, part(systematic.rydberg_eV), "eV");
    row("systematic", "defect0", null, part(systematic.defect0), "");
    if (systematic.held_defect !== undefined) {
      row("held_defect", "gap", null, part(systematic.held_defect.gap_eV), "eV");
      row("held_defect", "rydberg", null, part(systematic.held_defect.rydberg_eV), "eV");
      row("held_defect", "defect0", null, part(systematic.held_defect.sigma), "");
    }
    for (const trial of systematic.trials) {
      const plain = (value: number | null): Quantity => ({ value, sigma: null, low: null, high: null });
      row("trial", "gap", null, plain(trial.gap_eV), "eV", trial.name);
      row("trial", "rydberg", null, plain(trial.rydberg_eV), "eV", trial.name);
      row("trial", "defect0", null, plain(trial.defect0), "", trial.name);
    }
  }
  if (width_law !== null) {
    row("width_law", "floor", null, width_law.floor_eV, "eV");
    row("width_law", "coefficient", null, width_law.coefficient_eV, "eV", `base ${width_law.base}`);
    row("width_law", "exponent", null, width_law.exponent, "");
    if (width_law.free_exponent !== undefined)
      row("width_law", "free_exponent", null, width_law.free_exponent, "", "set free as a test");
    number("width_law", "chi2", width_law.chi2);
    number("width_law", "dof", width_law.dof);
    number("width_law", "p", width_law.p);
  }
  if (strength_law !== null) {
    row(
      "strength_law",
      "coefficient",
      null,
      strength_law.coefficient,
      area,
      `law ${strength_law.law}, base ${strength_law.base}`,
    );
    number("strength_law", "half_at_n", strength_law.half_at_n);
    number("strength_law", "chi2", strength_law.chi2);
    number("strength_law", "dof", strength_law.dof);
    number("strength_law", "p", strength_law.p);
  }
  if (tail !== null) row("tail", "factor", null, tail.factor, "", `n ${tail.from_n} to ${tail.to_n}`);
  for (const line of result.lines) {
    row("line", "energy", line.n, line.energy_eV, "eV", line.in_level_fit ? "" : "not in the level fit");
    row("line", "width", line.n, line.width_eV, "eV");
    row("line", "area", line.n, line.area, area);
    row("line", "asymmetry", line.n, line.asymmetry, "");
    number("line", "significance", line.significance, "", line.n);
    number("line", "bic_gain", line.bic_gain, "", line.n);
    row("line", "peak", line.n, line.peak, signalUnit);
    number("line", "spacing", line.spacing_eV, "eV", line.n);
    number("line", "width_over_spacing", line.width_over_spacing, "", line.n);
    row("line", "hbar over width", line.n, line.lifetime_ps, "ps");
    row("line", "law_offset", line.n, line.law_offset_eV, "eV");
    row("line", "area_n3", line.n, line.area_n3, area);
    row("line", "strength", line.n, line.strength_per_cm3, "1/cm^3");
  }
  if (derived !== null) {
    row("derived", "bohr_radius", null, derived.bohr_radius_nm, "nm", derived.bohr_radius_from);
    row("derived", "binding", derived.binding_eV.n, derived.binding_eV, "eV");
    row("derived", "apparent_gap", null, derived.apparent_gap_eV, "eV");
    number("derived", "highest_n", derived.highest_n);
    number("derived", "highest_resolved_n", derived.highest_resolved_n);
    for (const radius of derived.radius_um) row("derived", "radius", radius.n, radius, "um");
  }
  for (const one of result.background)
    row("background", `${one.term} ${one.name}`, null, one.quantity, signalUnitWords(one.unit));
  if (fit !== null) {
    words("fit", "domain", fit.domain);
    words("fit", "termination", fit.termination);
    words("fit", "sigma_from", fit.sigma_from);
    for (const name of [
      "chi2",
      "dof",
      "reduced_chi2",
      "aic",
      "bic",
      "durbin_watson",
      "runs_p",
      "lag1",
      "effective_points",
      "iterations",
      "condition",
      "rank",
      "parameters",
    ] as const)
      number("fit", name, fit[name]);
    number("fit", "window_low", fit.window_eV[0], "eV");
    number("fit", "window_high", fit.window_eV[1], "eV");
  }
  for (const note of gravestFirst(result.notes))
    words("note", note.code, `${note.level} about ${note.about}: ${note.text} Remedy: ${note.remedy}`);
  for (const [key, value] of flatten(result.protocol, "")) words("protocol", key, String(value));
  powerRows(result, { row, number, words });
  words("run", "version", result.run.version);
  words("run", "node", result.run.node);
  words("run", "started", result.run.started);
  for (const [name, value] of Object.entries(result.run.seconds)) number("run", name, value, "s");
  return out.join("");
}

/** Dotted keys and values; lists as JSON, as `--set` takes them. */
function flatten(value: unknown, path: string): (readonly [string, Cell])[] {
  if (typeof value === "object" && value !== null && !Array.isArray(value))
    return Object.entries(value).flatMap(([key, part]) =>
      flatten(part, path === "" ? key : `${path}.${key}`),
    );
  return [[path, typeof value === "string" ? value : JSON.stringify(value)]];
}
