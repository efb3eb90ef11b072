import { linearQuadraticLaw, SATURATION } from "../laws/index.ts";
import { chiSquareSurvival } from "../solve/index.ts";
import { bleaching, type BleachingLaw } from "./bleaching-law.ts";
import { fitCurve, type CurveFit } from "./fit-curve.ts";
import { seriesOf, type LineSeries } from "./line-table.ts";
import type { LineQuantity, LineTable } from "./types.ts";

/** A saturation law fitted to one quantity of one line. `fit.values`: zero-power value and S, 1/uW. */
export interface Saturation {
  readonly series: LineSeries;
  readonly fit: CurveFit;
  readonly zero: number;
  readonly saturation: number;
  readonly sigma: number;
}

export interface LineTests {
  /** Chi square against a constant minus that of the law, and its probability with one degree of freedom. */
  readonly bleaching: { readonly gain: number; readonly p: number };
  /** A_0 (1 - S P + c P^2) on the lowest powers that it describes. */
  readonly unbounded: {
    readonly saturation: number;
    readonly sigma: number;
    readonly curvature: number;
    readonly curvatureSigma: number;
    readonly gain: number;
  } | null;
  /** The law taken of (S P)^m. */
  readonly exponent: {
    readonly value: number;
    readonly sigma: number;
    readonly gain: number;
    readonly p: number;
  } | null;
}

export interface LawChoice {
  readonly law: BleachingLaw;
  readonly ratio: number;
}

/** S P of the smallest S tried, as far as every law reaches below zero. */
function leastSaturation(choice: LawChoice, highest: number): number {
  const reach =
    choice.law === "gaussian-two-beam"
      ? 0.9 / (1 + Math.max(1, choice.ratio))
      : choice.law === "separate-pump"
        ? 0.6
        : choice.law === "gaussian-scanned"
          ? 0.2
          : 0.4;
  return -reach / highest;
}

/** Fewest distinct powers for a law with two parameters. */
const FEWEST_POWERS = 2;
/** Above this many standard errors of S the law may be asked for its exponent. */
const SEEN = 3;
/** Fewest distinct powers for the linear-quadratic test, which is cut to the low powers that it describes. */
const FEWEST_FOR_TEST = 4;
const DESCRIBES_ABOVE = 0.05;

/**
 * What      Zero-power value and initial fall S of one quantity of one line by the saturation law, generalised least
 *           squares with the covariance between the powers (repeats included). S may come out a little below zero.
 * Units     powers uW, S 1/uW.
 */
export function fitSaturation(
  table: LineTable,
  quantity: LineQuantity,
  line: number,
  choice: LawChoice,
): Saturation | null {
  const series = seriesOf(table, quantity, line);
  return saturationOf(series, choice);
}

export function saturationOf(series: LineSeries, choice: LawChoice): Saturation | null {
  if (distinct(series.power) < FEWEST_POWERS) return null;
  const highest = Math.max(...series.power);
  const fit = fitCurve({
    data: series.values,
    covariance: series.covariance,
    parameters: 2,
    at: (theta, i, out) => {
      const power = series.power[i]!;
      const { factor, slope } = bleaching(choice.law, theta[1]! * power, choice.ratio);
      out[0] = factor;
      out[1] = theta[0]! * slope * power;
      return theta[0]! * factor;
    },
    start: startOf(series, choice),
    lower: Float64Array.of(-Infinity, leastSaturation(choice, highest)),
  });
  if (fit === null) return null;
  return {
    series,
    fit,
    zero: fit.values[0]!,
    saturation: fit.values[1]!,
    sigma: Math.sqrt(fit.covariance[3]!),
  };
}

/** Best of a grid in S, the zero-power value by linear least squares for each. */
function startOf(series: LineSeries, choice: LawChoice): Float64Array {
  const r = series.values.length;
  const highest = Math.max(...series.power);
  let best = Float64Array.of(series.values[0]!, 0);
  let least = Infinity;
  for (let step = -1; step < 40; step++) {
    const s = step < 0 ? 0 : (1e-3 * 10 ** (step / 5)) / highest;
    let ff = 0;
    let fy = 0;
    let yy = 0;
    for (let i = 0; i < r; i++) {
      const weight = 1 / series.covariance[i * r + i]!;
      const f = bleaching(choice.law, s * series.power[i]!, choice.ratio).factor;
      ff += weight * f * f;
      fy += weight * f * series.values[i]!;
      yy += weight * series.values[i]! ** 2;
    }
    const cost = yy - (fy * fy) / ff;
    if (cost < least) {
      least = cost;
      best = Float64Array.of(fy / ff, s);
    }
  }
  return best;
}

/** The tests of one line's areas: against no bleaching, against rising absorption, against another power of P. */
export function testLine(found: Saturation, choice: LawChoice): LineTests {
  const { series, fit } = found;
  const constant = fitCurve({
    data: series.values,
    covariance: series.covariance,
    parameters: 1,
    at: (theta, _i, out) => {
      out[0] = 1;
      return theta[0]!;
    },
    start: Float64Array.of(found.zero),
  });
  const gain = Math.max(0, (constant?.chi2 ?? fit.chi2) - fit.chi2);
  return {
    bleaching: { gain, p: chiSquareSurvival(gain, 1) },
    unbounded: unboundedTest(found, choice),
    exponent: exponentTest(found, choice),
  };
}

function unboundedTest(found: Saturation, choice: LawChoice): LineTests["unbounded"] {
  const { series, fit } = found;
  const powers = [...new Set(series.power)].sort((a, b) => a - b);
  if (powers.length < 3) return null;
  for (let count = powers.length; ; count--) {
    const part = cutAbove(series, powers[count - 1]!);
    const scratch = new Float64Array(SATURATION.size);
    // In a, a S and a c the law is linear; a start off zero keeps its derivatives.
    const start = Float64Array.of(found.zero, 0, 0);
    const one = fitCurve({
      data: part.values,
      covariance: part.covariance,
      parameters: 3,
      at: (theta, i, out) => {
        linearQuadraticLaw(part.power[i]!, theta[0]!, theta[1]!, theta[2]!, scratch);
        out[0] = scratch[SATURATION.byArea0]!;
        out[1] = scratch[SATURATION.bySaturation]!;
        out[2] = scratch[SATURATION.byCurvature]!;
        return scratch[SATURATION.area]!;
      },
      start,
    });
    const describes = one !== null && (one.p === null || one.p > DESCRIBES_ABOVE);
    if (!describes && count > FEWEST_FOR_TEST) continue;
    if (one === null) return null;
    const whole = part.values.length === series.values.length;
    const lawChi2 = whole ? fit.chi2 : (saturationOf(part, choice)?.fit.chi2 ?? Number.NaN);
    return {
      saturation: one.values[1]!,
      sigma: Math.sqrt(one.covariance[4]!),
      curvature: one.values[2]!,
      curvatureSigma: Math.sqrt(one.covariance[8]!),
      gain: lawChi2 - one.chi2,
    };
  }
}

function cutAbove(series: LineSeries, highest: number): LineSeries {
  const kept = Array.from(series.power.keys()).filter((i) => series.power[i]! <= highest);
  const r = series.values.length;
  const covariance = new Float64Array(kept.length ** 2);
  kept.forEach((a, i) =>
    kept.forEach((b, j) => (covariance[i * kept.length + j] = series.covariance[a * r + b]!)),
  );
  return {
    spectra: kept.map((i) => series.spectra[i]!),
    power: Float64Array.from(kept, (i) => series.power[i]!),
    values: Float64Array.from(kept, (i) => series.values[i]!),
    covariance,
  };
}

function exponentTest(found: Saturation, choice: LawChoice): LineTests["exponent"] {
  const { series, fit } = found;
  if (!(found.saturation > SEEN * found.sigma) || distinct(series.power) < 4) return null;
  const one = fitCurve({
    data: series.values,
    covariance: series.covariance,
    parameters: 3,
    at: (theta, i, out) => {
      const log = Math.log(series.power[i]!) + theta[1]!;
      const u = series.power[i]! > 0 ? Math.exp(theta[2]! * log) : 0;
      const { factor, slope } = bleaching(choice.law, u, choice.ratio);
      out[0] = factor;
      out[1] = u > 0 ? theta[0]! * slope * u * theta[2]! : 0;
      out[2] = u > 0 ? theta[0]! * slope * u * log : 0;
      return theta[0]! * factor;
    },
    start: Float64Array.of(found.zero, Math.log(found.saturation), 1),
    lower: Float64Array.of(-Infinity, -Infinity, 0.1),
    upper: Float64Array.of(Infinity, Infinity, 6),
  });
  if (one === null) return null;
  const gain = Math.max(0, fit.chi2 - one.chi2);
  return {
    value: one.values[2]!,
    sigma: Math.sqrt(one.covariance[8]!),
    gain,
    p: chiSquareSurvival(gain, 1),
  };
}

/**
 * What      All lines at once: zero-power areas and S_n of every line from all areas with their full covariance.
 * Shapes    areas (k) and saturations (k); covariance (2k x 2k, row-major) areas first; gain (2k x data), the data in
 *           the order of `places` (quantity places of the table).
 */
export interface JointSaturation {
  readonly zero: Float64Array;
  readonly saturation: Float64Array;
  readonly covariance: Float64Array;
  readonly fit: CurveFit;
  readonly joined: Joined;
}

/** The areas of several lines one after another. */
export interface Joined {
  /** Places of the data in the table's values. */
  readonly places: readonly number[];
  readonly line: Int32Array;
  readonly spectrum: Int32Array;
  readonly power: Float64Array;
  readonly values: Float64Array;
  readonly covariance: Float64Array;
}

export function joinLines(
  table: LineTable,
  quantity: LineQuantity,
  lines: readonly { readonly line: number; readonly spectra: readonly number[] }[],
): Joined {
  const m = table.power_uW.length;
  const k = table.n.length;
  const size = table.values.length;
  const line: number[] = [];
  const spectrum: number[] = [];
  const places: number[] = [];
  lines.forEach((one, order) =>
    one.spectra.forEach((j) => {
      line.push(order);
      spectrum.push(j);
      places.push((quantity * m + j) * k + one.line);
    }),
  );
  const r = places.length;
  const covariance = new Float64Array(r * r);
  for (let a = 0; a < r; a++)
    for (let b = 0; b < r; b++) covariance[a * r + b] = table.covariance[places[a]! * size + places[b]!]!;
  return {
    places,
    line: Int32Array.from(line),
    spectrum: Int32Array.from(spectrum),
    power: Float64Array.from(spectrum, (j) => table.power_uW[j]!),
    values: Float64Array.from(places, (at) => table.values[at]!),
    covariance,
  };
}

export function fitTogether(
  table: LineTable,
  quantity: LineQuantity,
  lines: readonly { readonly line: number; readonly found: Saturation }[],
  choice: LawChoice,
): JointSaturation | null {
  const k = lines.length;
  const joined = joinLines(
    table,
    quantity,
    lines.map(({ line, found }) => ({ line, spectra: found.series.spectra })),
  );
  const start = new Float64Array(2 * k);
  const lower = new Float64Array(2 * k).fill(-Infinity);
  lines.forEach(({ found }, a) => {
    start[a] = found.zero;
    start[k + a] = found.saturation;
    lower[k + a] = leastSaturation(choice, Math.max(...found.series.power));
  });
  const fit = fitCurve({
    data: joined.values,
    covariance: joined.covariance,
    parameters: 2 * k,
    at: (theta, i, out) => {
      out.fill(0);
      const a = joined.line[i]!;
      const power = joined.power[i]!;
      const { factor, slope } = bleaching(choice.law, theta[k + a]! * power, choice.ratio);
      out[a] = factor;
      out[k + a] = theta[a]! * slope * power;
      return theta[a]! * factor;
    },
    start,
    lower,
  });
  if (fit === null) return null;
  return {
    zero: fit.values.slice(0, k),
    saturation: fit.values.slice(k),
    covariance: fit.covariance,
    fit,
    joined,
  };
}

export function distinct(power: ArrayLike<number>): number {
  return new Set(Array.from(power)).size;
}

/**
 * What      Scatter of repeats at one power against their errors: chi square within the powers over its degrees of
 *           freedom, all lines together. 1 where nothing is repeated or the scatter is what the errors say (p > 0.01).
 */
export function repeatScatter(table: LineTable, quantity: LineQuantity): { factor: number; repeats: number } {
  let chi2 = 0;
  let freedom = 0;
  for (let line = 0; line < table.n.length; line++) {
    const series = seriesOf(table, quantity, line);
    const powers = [...new Set(series.power)];
    if (powers.length === series.power.length || powers.length === 0) continue;
    const one = fitCurve({
      data: series.values,
      covariance: series.covariance,
      parameters: powers.length,
      at: (theta, i, out) => {
        out.fill(0);
        const group = powers.indexOf(series.power[i]!);
        out[group] = 1;
        return theta[group]!;
      },
      start: Float64Array.from(powers, (p) => series.values[series.power.indexOf(p)]!),
    });
    if (one === null) continue;
    chi2 += one.chi2;
    freedom += one.degreesOfFreedom;
  }
  if (freedom === 0) return { factor: 1, repeats: 0 };
  const beyond = chi2 > freedom && chiSquareSurvival(chi2, freedom) < 0.01;
  return { factor: beyond ? Math.sqrt(chi2 / freedom) : 1, repeats: freedom };
}
