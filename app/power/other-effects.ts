import type { PowerResult } from "../protocol/index.ts";
import { fitCurve } from "./fit-curve.ts";
import { formsCovariance, type LinearForm } from "./line-table.ts";
import { joinLines } from "./saturation.ts";
import { NOT_DETERMINED, symmetric } from "../base/index.ts";
import { LINE_QUANTITIES, type LineTable, type PowerSpectrum } from "./types.ts";
import type { Broadening } from "./widths.ts";
import { seriesOf } from "./line-table.ts";

export type Trend = PowerResult["other"]["gap_shift_eV"];

export const NO_TREND: Trend = {
  per_uW: NOT_DETERMINED,
  at_highest: NOT_DETERMINED,
  significance: null,
  limit: null,
};

/** One-sided 95 % of a normal distribution, in standard errors. */
export const ONE_SIDED = 1.6449;

/** A slope with its value at the highest power and, where it is not seen at two standard errors, its limit. */
export function trendOf(slope: number, sigma: number, highest: number, factor: number): Trend {
  if (!Number.isFinite(slope) || !(sigma > 0)) return NO_TREND;
  return {
    per_uW: symmetric(slope, sigma, factor),
    at_highest: symmetric(slope * highest, sigma * highest, factor),
    significance: slope / sigma,
    limit: Math.abs(slope) < 2 * sigma ? (Math.abs(slope) + ONE_SIDED * sigma) * highest : null,
  };
}

/**
 * What      Shift of all lines together per power: E_n(P) = e_n + b P by generalised least squares; the gap of each
 *           spectrum instead, where it was free. Not determined where the spectra share their energies.
 */
export function gapShift(table: LineTable, spectra: readonly PowerSpectrum[], factor: number): Trend {
  const highest = Math.max(...table.power_uW);
  const free = spectra.filter((s) => (s.gap_eV?.value ?? null) !== null && (s.gap_eV?.sigma ?? 0) > 0);
  const distinctGaps = new Set(free.map((s) => s.gap_eV!.value)).size;
  if (free.length >= 3 && distinctGaps > 1) {
    const r = free.length;
    const covariance = new Float64Array(r * r);
    free.forEach((s, i) => (covariance[i * r + i] = s.gap_eV!.sigma! ** 2));
    const fit = fitCurve({
      data: Float64Array.from(free, (s) => s.gap_eV!.value!),
      covariance,
      parameters: 2,
      at: (theta, i, out) => {
        out[0] = 1;
        out[1] = free[i]!.power_uW;
        return theta[0]! + theta[1]! * free[i]!.power_uW;
      },
      start: Float64Array.of(free[0]!.gap_eV!.value!, 0),
    });
    return fit === null ? NO_TREND : trendOf(fit.values[1]!, Math.sqrt(fit.covariance[3]!), highest, factor);
  }
  const lines = table.n.flatMap((_, line) => {
    const series = seriesOf(table, LINE_QUANTITIES.energy, line);
    const moves = series.values.length > 1 && Math.max(...series.values) - Math.min(...series.values) > 1e-12;
    return moves ? [{ line, spectra: series.spectra }] : [];
  });
  if (lines.length === 0) return NO_TREND;
  const joined = joinLines(table, LINE_QUANTITIES.energy, lines);
  const k = lines.length;
  // Counted from each line's first value, so that no digits are lost beside 2 eV.
  const origin = lines.map((_, a) => joined.values[joined.line.indexOf(a)]!);
  const fit = fitCurve({
    data: joined.values.map((v, i) => v - origin[joined.line[i]!]!),
    covariance: joined.covariance,
    parameters: k + 1,
    at: (theta, i, out) => {
      out.fill(0);
      out[joined.line[i]!] = 1;
      out[k] = joined.power[i]!;
      return theta[joined.line[i]!]! + theta[k]! * joined.power[i]!;
    },
    start: new Float64Array(k + 1),
  });
  if (fit === null) return NO_TREND;
  const sigma = Math.sqrt(fit.covariance[k * (k + 1) + k]!);
  return trendOf(fit.values[k]!, sigma, highest, factor);
}

/** Lines whose width serves as a thermometer: the lowest ones, which no other exciton reaches. */
const THERMOMETER_LINES = 3;

export function heating(
  table: LineTable,
  broadening: readonly (Broadening | null)[],
  factor: number,
): PowerResult["other"]["heating"] {
  const usable = broadening
    .flatMap((one, line) => (one === null || one.growth === null ? [] : [{ line, growth: one.growth }]))
    .slice(0, Math.min(THERMOMETER_LINES, Math.max(1, Math.floor(table.n.length / 3))));
  if (usable.length === 0) return { n: [], ...NO_TREND };
  const forms: LinearForm[] = usable.map(({ growth }) => growth.form);
  const fit = fitCurve({
    data: Float64Array.from(usable, ({ growth }) => growth.value),
    covariance: formsCovariance(table, forms),
    parameters: 1,
    at: (theta, _i, out) => {
      out[0] = 1;
      return theta[0]!;
    },
    start: Float64Array.of(usable[0]!.growth.value),
  });
  const n = usable.map(({ line }) => table.n[line]!);
  if (fit === null) return { n, ...NO_TREND };
  return {
    n,
    ...trendOf(fit.values[0]!, Math.sqrt(fit.covariance[0]!), Math.max(...table.power_uW), factor),
  };
}

export function broadeningTrends(
  table: LineTable,
  broadening: readonly (Broadening | null)[],
  factor: number,
): PowerResult["other"]["broadening"] {
  const highest = Math.max(...table.power_uW);
  return table.n.map((n, line) => {
    const one = broadening[line];
    if (one === undefined || one === null || one.growth === null) return { n, ...NO_TREND };
    return { n, ...trendOf(one.zero * one.growth.value, one.zero * one.growth.sigma, highest, factor) };
  });
}

/** Highest n seen at the lowest and at the highest power. */
export function highestSeen(spectra: readonly PowerSpectrum[]): PowerResult["other"]["highest_n"] {
  const known = spectra.filter((s) => s.highest_n !== null).sort((a, b) => a.power_uW - b.power_uW);
  if (known.length < 2) return { at_lowest: known[0]?.highest_n ?? null, at_highest: null, lost: null };
  const [first, last] = [known[0]!.highest_n!, known[known.length - 1]!.highest_n!];
  return { at_lowest: first, at_highest: last, lost: first - last };
}
