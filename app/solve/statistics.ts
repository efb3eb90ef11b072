import { lowerGamma, upperGamma } from "./incompleteGamma.ts";

/** Probability that a chi square with `degreesOfFreedom` exceeds `chi2`; NaN without a degree of freedom. */
export function chiSquareSurvival(chi2: number, degreesOfFreedom: number): number {
  return upperGamma(degreesOfFreedom / 2, chi2 / 2);
}

/** Probability that a standard normal number lies below x; relative accuracy in the lower tail. */
export function normalCdf(x: number): number {
  if (Number.isNaN(x)) return NaN;
  const half = 0.5 * x * x;
  if (x < -1) return 0.5 * upperGamma(0.5, half);
  if (x > 1) return 1 - 0.5 * upperGamma(0.5, half);
  return 0.5 + 0.5 * Math.sign(x) * lowerGamma(0.5, half);
}

/**
 * What      x with normalCdf(x) = p.
 * Domain    0 < p < 1; -Infinity and Infinity at the ends, NaN outside.
 * Accuracy  1e-14 relative; tests/app/solve/statistics.test.ts.
 * Source    Start: Abramowitz and Stegun 26.2.23 (error 4.5e-4); then Halley's iteration on the distribution itself.
 */
export function normalQuantile(p: number): number {
  if (!(p >= 0 && p <= 1)) return NaN;
  if (p === 0) return -Infinity;
  if (p === 1) return Infinity;
  if (p === 0.5) return 0;
  if (p > 0.5) return -normalQuantile(1 - p);
  const t = Math.sqrt(-2 * Math.log(p));
  let x =
    (2.515517 + t * (0.802853 + t * 0.010328)) / (1 + t * (1.432788 + t * (0.189269 + t * 0.001308))) - t;
  for (let turn = 0; turn < 4; turn++) {
    // Relative error of the tail over the density's logarithmic slope.
    const density = Math.exp(-0.5 * x * x) / Math.sqrt(2 * Math.PI);
    if (density === 0) break;
    const error = (normalCdf(x) - p) / density;
    const change = error / (1 + 0.5 * x * error);
    x -= change;
    if (Math.abs(change) <= 1e-16 * Math.abs(x)) break;
  }
  return x;
}

/**
 * Durbin-Watson statistic, sum (r_i - r_{i-1})^2 / sum r_i^2: 2 without correlation of neighbours, towards 0 with
 * positive, towards 4 with negative (Durbin and Watson, Biometrika 37, 409 (1950)). NaN for fewer than two.
 */
export function durbinWatson(residuals: ArrayLike<number>): number {
  let differences = 0;
  let squares = 0;
  for (let i = 0; i < residuals.length; i++) {
    const r = residuals[i]!;
    squares += r * r;
    if (i > 0) differences += (r - residuals[i - 1]!) ** 2;
  }
  return residuals.length < 2 || squares === 0 ? NaN : differences / squares;
}

/** Correlation of neighbouring residuals about their mean. NaN for fewer than two or without spread. */
export function neighbourCorrelation(residuals: ArrayLike<number>): number {
  const n = residuals.length;
  if (n < 2) return NaN;
  let mean = 0;
  for (let i = 0; i < n; i++) mean += residuals[i]! / n;
  let product = 0;
  let square = 0;
  for (let i = 0; i < n; i++) {
    const d = residuals[i]! - mean;
    square += d * d;
    if (i > 0) product += d * (residuals[i - 1]! - mean);
  }
  return square === 0 ? NaN : product / square;
}

export interface RunsTest {
  readonly runs: number;
  /** Expected number of runs of sign and its standard deviation when signs are in random order. */
  readonly expected: number;
  readonly deviation: number;
  /** Two-sided, by the normal approximation; NaN where all signs are equal. */
  readonly p: number;
}

/**
 * Runs of equal sign among the residuals; zeros are left out (Wald and Wolfowitz, Ann. Math. Stat. 11, 147 (1940)).
 */
export function runsTest(residuals: ArrayLike<number>): RunsTest {
  let positive = 0;
  let negative = 0;
  let runs = 0;
  let last = 0;
  for (let i = 0; i < residuals.length; i++) {
    const sign = Math.sign(residuals[i]!);
    if (sign !== 1 && sign !== -1) continue;
    if (sign === 1) positive++;
    else negative++;
    if (sign !== last) runs++;
    last = sign;
  }
  const n = positive + negative;
  const product = 2 * positive * negative;
  const expected = n === 0 ? NaN : product / n + 1;
  const deviation = n < 2 ? NaN : Math.sqrt((product * (product - n)) / (n * n * (n - 1)));
  const p = deviation > 0 ? 2 * normalCdf(-Math.abs(runs - expected) / deviation) : NaN;
  return { runs, expected, deviation, p };
}

/**
 * Akaike's and Schwarz's criteria for known errors, where -2 log likelihood is chi square up to a constant:
 * AIC = chi2 + 2 k, BIC = chi2 + k ln n (Akaike 1974; Schwarz 1978).
 */
export function informationCriteria(
  chi2: number,
  points: number,
  parameters: number,
): { readonly aic: number; readonly bic: number } {
  return { aic: chi2 + 2 * parameters, bic: chi2 + parameters * Math.log(points) };
}
