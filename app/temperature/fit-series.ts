import { symmetric, type Quantity } from "../base/index.ts";
import { boseEinsteinGap, phononWidth, varshni } from "../laws/index.ts";
import type { TemperatureLaw, TemperatureSeries } from "../protocol/index.ts";
import { fitLaw, linearLeastSquares, type LawProblem } from "../solve/index.ts";

/** One quantity of one sample at several temperatures: K, eV, one standard error in eV. */
export interface TemperaturePoint {
  readonly temperature_K: number;
  readonly value: number;
  readonly sigma: number;
}

type LawName = TemperatureLaw["law"];

interface LawChoice {
  readonly name: LawName;
  /** Names and units of the parameters that are free, in the order of the law. */
  readonly parameters: readonly { readonly name: string; readonly unit: string; readonly at: number }[];
  /** All parameters of the law, the last of them the one that stands in a nonlinear place. */
  readonly count: number;
  /** value and derivatives by all parameters. */
  evaluate(temperature: number, values: Float64Array, out: Float64Array): void;
  /** The last parameter's grid for the start; empty where it does not count. */
  readonly grid: readonly number[];
  readonly lower: readonly number[];
  readonly upper?: readonly number[];
}

/** Start values of temperatures and phonon energies, from far below to far above what crystals show. */
const KELVIN_GRID = Array.from({ length: 40 }, (_, i) => 10 * 1.17 ** i);
const PHONON_GRID = Array.from({ length: 40 }, (_, i) => 0.5e-3 * 1.17 ** i);

const GAP_LAWS: readonly LawChoice[] = [
  {
    name: "varshni",
    parameters: [
      { name: "gap0", unit: "eV", at: 0 },
      { name: "alpha", unit: "eV/K", at: 1 },
      { name: "beta", unit: "K", at: 2 },
    ],
    count: 3,
    evaluate: (t, v, out) => varshni(t, v[0]!, v[1]!, v[2]!, out),
    grid: KELVIN_GRID,
    lower: [-Infinity, -Infinity, 1e-3],
    // Beyond, the law is a parabola that alpha and beta describe together alone, without end.
    upper: [Infinity, Infinity, 1e4],
  },
  {
    name: "bose-einstein",
    parameters: [
      { name: "gapB", unit: "eV", at: 0 },
      { name: "coupling", unit: "eV", at: 1 },
      { name: "theta", unit: "K", at: 2 },
    ],
    count: 3,
    evaluate: (t, v, out) => boseEinsteinGap(t, v[0]!, v[1]!, v[2]!, out),
    grid: KELVIN_GRID,
    lower: [-Infinity, -Infinity, 1],
  },
];

const WIDTH_PARAMETERS = [
  { name: "width0", unit: "eV", at: 0 },
  { name: "acoustic", unit: "eV/K", at: 1 },
  { name: "optical", unit: "eV", at: 2 },
  { name: "phonon_energy", unit: "eV", at: 3 },
];

function widthLaw(name: LawName, free: readonly number[]): LawChoice {
  return {
    name,
    parameters: WIDTH_PARAMETERS.filter(({ at }) => free.includes(at)),
    count: 4,
    evaluate: (t, v, out) => phononWidth(t, v[0]!, v[1]!, v[2]!, v[3]!, out),
    grid: free.includes(3) ? PHONON_GRID : [0.02],
    // A width cannot fall with the number of phonons.
    lower: [0, 0, 0, 1e-4],
  };
}

const WIDTH_LAWS: readonly LawChoice[] = [
  widthLaw("phonons", [0, 1, 2, 3]),
  widthLaw("optical", [0, 2, 3]),
  widthLaw("acoustic", [0, 1]),
];

/** Below this probability a law counts as rejected, and its errors are scaled. */
const REJECTED = 0.01;
/** Lead in the information criterion that decides between laws (Burnham and Anderson 2002, section 2.6: "considerably less support" from 4, "essentially none" from 10). */
const DECIDED = 6;

/**
 * What      The laws of gap or width against temperature fitted to one series, each with errors, and which of them the
 *           data prefer by Akaike's criterion for known errors, chi2/c + 2 k; c is 1, or the reduced chi square of the best
 *           law where even that is rejected (then chi square in stated errors would decide too much).
 * Shapes    points (m), any order; grid: temperatures at which each law is evaluated for a figure.
 * Units     K, eV.
 * Domain    A law is fitted where there is at least one point more than it has parameters, at different temperatures;
 *           laws without that are left out. Errors are scaled by the root of reduced chi square where p < 0.01.
 * Accuracy  tests/reference/temperature-laws.test.ts.
 * Source    app/laws/temperature.ts for the laws; Akaike, IEEE Trans. Autom. Control 19, 716 (1974); c and
 *           weights: Burnham and Anderson, Model Selection and Multimodel Inference (2002), sections 2.5 and 2.9.
 */
export function fitTemperatureSeries(
  kind: "gap" | "width",
  points: readonly TemperaturePoint[],
  factor: number,
  grid: readonly number[] = [],
): Pick<TemperatureSeries, "laws" | "preferred" | "decided"> {
  const different = new Set(points.map((point) => point.temperature_K)).size;
  const plain = (kind === "gap" ? GAP_LAWS : WIDTH_LAWS)
    .filter((law) => different > law.parameters.length)
    .map((law) => fitOne(law, points, factor, grid));
  // Where even the best law is rejected the stated errors are too small, and chi square counts in scaled ones.
  const inflation = Math.min(...plain.filter((law) => law.stationary).map((law) => law.scaled_by ** 2));
  const fitted = plain.map((law) => ({
    ...law,
    aic: Number.isFinite(inflation) ? law.chi2! / inflation + 2 * law.parameters.length : null,
  }));
  const sound = fitted.filter((law) => law.aic !== null && law.stationary);
  const best = sound.reduce<TemperatureLaw | null>(
    (found, law) => (found === null || law.aic! < found.aic! ? law : found),
    null,
  );
  let sum = 0;
  for (const law of sound) sum += Math.exp(-(law.aic! - best!.aic!) / 2);
  const laws = fitted.map((law) => {
    if (best === null || !sound.includes(law)) return law;
    const above = law.aic! - best.aic!;
    return { ...law, aic_difference: above, weight: Math.exp(-above / 2) / sum };
  });
  // A law that holds the best one and a part more can never fall behind by more than that part's 2: it is no rival.
  const names = (law: TemperatureLaw): readonly string[] => law.parameters.map(({ name }) => name);
  const rivals = laws.filter(
    (law) =>
      law.aic_difference !== null &&
      best !== null &&
      law.law !== best.law &&
      !names(best).every((name) => names(law).includes(name)),
  );
  const decided = rivals.length > 0 && rivals.every((law) => law.aic_difference! >= DECIDED);
  return { laws, preferred: best?.law ?? null, decided };
}

function fitOne(
  law: LawChoice,
  points: readonly TemperaturePoint[],
  factor: number,
  grid: readonly number[],
): TemperatureLaw {
  const m = points.length;
  const data = Float64Array.from(points, (point) => point.value);
  const sigmas = Float64Array.from(points, (point) => point.sigma);
  const out = new Float64Array(law.count + 1);
  const free = law.parameters.map(({ at }) => at);
  const problem: LawProblem = {
    data,
    sigmas,
    parameters: law.count,
    model: (values, to) =>
      points.forEach((point, i) => {
        law.evaluate(point.temperature_K, values, out);
        to[i] = out[0]!;
      }),
    jacobian: (values, to) =>
      points.forEach((point, i) => {
        law.evaluate(point.temperature_K, values, out);
        for (let j = 0; j < law.count; j++) to[j * m + i] = out[j + 1]!;
      }),
  };
  const fit = fitLaw(problem, startOf(law, free, points, data, sigmas), {
    fixed: Array.from({ length: law.count }, (_, j) => !free.includes(j)),
    lower: Float64Array.from(law.lower),
    ...(law.upper !== undefined && { upper: Float64Array.from(law.upper) }),
  });
  // At that end only a ratio of the parameters is known.
  const degenerate = fit.activeBounds[law.count - 1] === 1;
  const dof = fit.degreesOfFreedom;
  const scaled = fit.p !== null && fit.p < REJECTED ? Math.sqrt(fit.chi2 / dof) : 1;
  const quantity = (at: number): Quantity => {
    const value = fit.values[at]!;
    const sigma = scaled * Math.sqrt(fit.covariance[at * law.count + at]!);
    // A scale that is not known within a factor of ten says nothing, though the matrix could be inverted.
    const unknown = fit.undetermined[at] === 1 || (at === law.count - 1 && sigma > 10 * Math.abs(value));
    if (unknown || (degenerate && at > 0)) return { value: null, sigma: null, low: null, high: null };
    if (fit.activeBounds[at] !== 0) return { value, sigma: null, low: null, high: null };
    return symmetric(value, sigma, factor);
  };
  return {
    law: law.name,
    parameters: law.parameters.map(({ name, unit, at }) => ({ name, unit, quantity: quantity(at) })),
    chi2: fit.chi2,
    dof,
    p: fit.p,
    aic: null,
    aic_difference: null,
    weight: null,
    stationary: fit.stationary,
    scaled_by: scaled,
    residuals: points.map((point) => {
      law.evaluate(point.temperature_K, fit.values, out);
      return (point.value - out[0]!) / point.sigma;
    }),
    curve: grid.map((temperature) => {
      law.evaluate(temperature, fit.values, out);
      return Number.isFinite(out[0]!) ? out[0]! : null;
    }),
  };
}

/** The best of a grid of the nonlinear parameter, the others by linear least squares. */
function startOf(
  law: LawChoice,
  free: readonly number[],
  points: readonly TemperaturePoint[],
  data: Float64Array,
  sigmas: Float64Array,
): Float64Array {
  const m = points.length;
  const last = law.count - 1;
  const linear = free.filter((at) => at !== last);
  const weights = sigmas.map((sigma) => 1 / sigma);
  const out = new Float64Array(law.count + 1);
  const best = { chi2: Infinity, values: new Float64Array(law.count) };
  for (const nonlinear of law.grid) {
    const values = new Float64Array(law.count);
    values[last] = nonlinear;
    const columns = new Float64Array(linear.length * m);
    points.forEach((point, i) => {
      law.evaluate(point.temperature_K, values, out);
      linear.forEach((at, j) => (columns[j * m + i] = out[at + 1]!));
    });
    const solution = linearLeastSquares(columns, m, linear.length, data, weights);
    if (solution.rank < linear.length || solution.chi2 >= best.chi2) continue;
    linear.forEach((at, j) => (values[at] = Math.max(solution.coefficients[j]!, law.lower[at]!)));
    best.chi2 = solution.chi2;
    best.values = values;
  }
  if (best.chi2 === Infinity) best.values[last] = law.grid[Math.floor(law.grid.length / 2)]!;
  return best.values;
}
