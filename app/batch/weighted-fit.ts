import { linearLeastSquares } from "../solve/index.ts";

/**
 * What      Weighted least squares of y = X beta with variances v_i + tau^2, and the generalised homogeneity statistic
 *           Q(tau^2) = sum (y_i - x_i' beta)^2/(v_i + tau^2).
 * Shapes    y, variances (n); columns (n x p, column-major); beta (p); covariance (p x p, row-major).
 * Units     those of y; variances in their squares.
 * Domain    v_i + tau^2 > 0 for every i.
 * Source    Cochran, Biometrics 10, 101 (1954); DerSimonian and Kacker, Contemp. Clin. Trials 28, 105 (2007), eq. 4.
 */
export interface WeightedFit {
  readonly beta: Float64Array;
  readonly covariance: Float64Array;
  readonly q: number;
  readonly degreesOfFreedom: number;
}

export interface Observations {
  readonly y: Float64Array;
  readonly variances: Float64Array;
  /** Design: a column of ones for one common mean, one indicator a batch, ones and x for a trend. */
  readonly columns: Float64Array;
  readonly parameters: number;
}

export function weightedFit({ y, variances, columns, parameters }: Observations, tau2: number): WeightedFit {
  const weights = variances.map((v) => 1 / Math.sqrt(v + tau2));
  const fit = linearLeastSquares(columns, y.length, parameters, y, weights);
  return {
    beta: fit.coefficients,
    covariance: fit.covariance,
    q: fit.chi2,
    degreesOfFreedom: fit.degreesOfFreedom,
  };
}

/** One common mean. */
export function commonMean(y: Float64Array, variances: Float64Array): Observations {
  return { y, variances, columns: new Float64Array(y.length).fill(1), parameters: 1 };
}

/** One mean for each of `groups` (indices from 0). */
export function groupMeans(
  y: Float64Array,
  variances: Float64Array,
  groups: readonly number[],
  count: number,
): Observations {
  const columns = new Float64Array(y.length * count);
  groups.forEach((group, i) => (columns[group * y.length + i] = 1));
  return { y, variances, columns, parameters: count };
}

/** A straight line, a + b (x - centre). */
export function straightLine(
  y: Float64Array,
  variances: Float64Array,
  x: Float64Array,
  centre: number,
): Observations {
  const n = y.length;
  const columns = new Float64Array(2 * n).fill(1, 0, n);
  for (let i = 0; i < n; i++) columns[n + i] = x[i]! - centre;
  return { y, variances, columns, parameters: 2 };
}
