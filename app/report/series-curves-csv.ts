import type { RunglineResult } from "../protocol/index.ts";
import { csvLine } from "./csv.ts";
import type { FittedCurves } from "./curves-csv.ts";
import type { PowerSpectrum } from "./figures/stack-spectra.ts";

const COLUMNS = ["power (uW)", "energy (eV)"] as const;
const CURVES = ["model", "background", "residual (sigma)"] as const;

/** By its beginning a file is known as the curves of a power series that may be replaced. */
export const SERIES_CURVES_CSV_MARK = `${COLUMNS.join(",")},`;

/**
 * What      The fitted curves of a power series as RFC 4180 text: a row a point, spectrum after spectrum from the lowest
 *           power; signal, model, background without lines, residual.
 * Units     uW, eV; curves in the unit of the signal, named in its heading; residual in standard errors.
 * Domain    Blank where a spectrum was not fitted.
 */
export function seriesCurvesToCsv(spectra: readonly PowerSpectrum[], result: RunglineResult): string {
  const signal = result.reading.signal_unit === "1/cm" ? "alpha (1/cm)" : "optical depth";
  const cell = (value: number | undefined): number | null =>
    value === undefined || !Number.isFinite(value) ? null : value;
  const parts = [csvLine([...COLUMNS, signal, ...CURVES])];
  for (const { power_uW, curves } of spectra)
    curves.energy_eV.forEach((energy, i) =>
      parts.push(
        csvLine([
          power_uW,
          energy,
          cell(curves.signal[i]),
          cell(curves.model[i]),
          cell(curves.background[i]),
          cell(curves.residual[i]),
        ]),
      ),
    );
  return parts.join("");
}

/** The curves read back for a report; null where the text is none, or is of other powers than the result. */
export function seriesCurvesFromCsv(text: string, result: RunglineResult): readonly PowerSpectrum[] | null {
  if (!text.startsWith(SERIES_CURVES_CSV_MARK)) return null;
  const [head = "", ...rows] = text.split(/\r?\n/).filter((line) => line !== "");
  if (head.split(",").slice(3).join() !== CURVES.join()) return null;
  const read = rows.map((row) => row.split(",").map((cell) => (cell === "" ? NaN : Number(cell))));
  const powers = (result.power?.spectra ?? []).map(({ power_uW }) => power_uW).sort((a, b) => a - b);
  const column = (rows: readonly number[][], i: number): Float64Array =>
    Float64Array.from(rows, (row) => row[i] ?? NaN);
  const spectra: { power_uW: number; curves: FittedCurves }[] = [];
  let from = 0;
  while (from < read.length) {
    const power_uW = read[from]![0]!;
    let to = from;
    // Two spectra at one power are told apart by the energy, which starts anew.
    while (
      to < read.length &&
      read[to]![0] === power_uW &&
      (to === from || read[to]![1]! > read[to - 1]![1]!)
    )
      to++;
    const own = read.slice(from, to);
    spectra.push({
      power_uW,
      curves: {
        energy_eV: column(own, 1),
        signal: column(own, 2),
        model: column(own, 3),
        background: column(own, 4),
        residual: column(own, 5),
      },
    });
    from = Math.max(to, from + 1);
  }
  return spectra.map(({ power_uW }) => power_uW).join() === powers.join() ? spectra : null;
}
