import { lineCurve, type Curves } from "../analysis/index.ts";
import type { RunglineResult } from "../protocol/index.ts";
import { csvLine } from "./csv.ts";

/** What a figure of a fitted spectrum needs; NaN where a value is not there. */
export interface FittedCurves {
  readonly energy_eV: Float64Array;
  readonly signal: Float64Array;
  readonly model: Float64Array;
  readonly background: Float64Array;
  readonly residual: Float64Array;
}

const ENERGY = "energy (eV)";
const RESIDUAL = "residual (sigma)";

/** By its beginning a file is known as curves that may be replaced. */
export const CURVES_CSV_MARK = `${ENERGY},`;

/**
 * What      The fitted curves of one spectrum as RFC 4180 text: a row a point; signal, its standard error, whether the
 *           point was used, model, background, tail of the series, residual, then each line alone.
 * Units     eV; all curves in the unit of the signal, named in its heading; residual in standard errors.
 * Domain    Blank outside the fitted window.
 */
export function curvesToCsv(curves: Curves, result: RunglineResult): string {
  const lines = result.lines.flatMap((line) => {
    const values = lineCurve(result, line, curves.energy_eV);
    return values === null ? [] : [{ n: line.n, values }];
  });
  const parts = [
    csvLine([
      ENERGY,
      curves.unit === "1/cm" ? "alpha (1/cm)" : "optical depth",
      "sigma",
      "used",
      "model",
      "background",
      "tail",
      RESIDUAL,
      ...lines.map(({ n }) => `line n = ${n}`),
    ]),
  ];
  const cell = (value: number | undefined): number | null =>
    value === undefined || !Number.isFinite(value) ? null : value;
  curves.energy_eV.forEach((energy, i) => {
    const used = curves.used[i] === 1;
    parts.push(
      csvLine([
        energy,
        cell(curves.signal[i]),
        cell(curves.sigma[i]),
        used ? 1 : 0,
        cell(curves.model[i]),
        cell(curves.background[i]),
        cell(curves.tail?.[i]),
        cell(curves.residual[i]),
        ...lines.map(({ values }) => (used ? short(values[i]!) : null)),
      ]),
    );
  });
  return parts.join("");
}

/** A line alone is for figures: nine digits. */
function short(value: number): number {
  return Number(value.toPrecision(9));
}

/** Curves read back for a report; null where the text is none, or belongs to other data than the result. */
export function curvesFromCsv(text: string, result: RunglineResult): FittedCurves | null {
  const [head = "", ...rows] = text.split(/\r?\n/).filter((line) => line !== "");
  const names = head.split(",");
  const columns = [ENERGY, names[1]!, "model", "background", RESIDUAL].map((name) => names.indexOf(name));
  if (columns.some((column) => column < 0)) return null;
  const values = columns.map(() => new Float64Array(rows.length));
  rows.forEach((row, i) => {
    const cells = row.split(",");
    columns.forEach((column, k) => {
      const cell = cells[column];
      values[k]![i] = cell === undefined || cell === "" ? NaN : Number(cell);
    });
  });
  const [energy_eV, signal, model, background, residual] = values as [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  const [low, high] = result.reading.range_eV;
  if (energy_eV[0] !== low || energy_eV[energy_eV.length - 1] !== high) return null;
  return { energy_eV, signal, model, background, residual };
}
