/**
 * What      Weighted least squares with variances v_i + tau^2 of one mean a group, or of a straight line, and the
 *           generalised homogeneity statistic Q(tau^2) = sum (y_i - fit_i)^2/(v_i + tau^2).
 * Shapes    y, variances (n); beta (p); covariance (p x p, row-major).
 * Units     those of y; variances in their squares.
 * Domain    v_i + tau^2 > 0 for every i; every group has a member; x not all equal.
 * Accuracy  means are taken about the first value and lines about the weighted centre, so that a common offset of y and
 *           x costs no digits; tests/reference/random-effects.test.ts.
 * Source    Cochran, Biometrics 10, 101 (1954); DerSimonian and Kacker, Contemp. Clin. Trials 28, 105 (2007), eq. 4.
 */
export interface WeightedFit {
  readonly beta: Float64Array;
  readonly covariance: Float64Array;
  readonly q: number;
}

export interface Observations {
  readonly y: Float64Array;
  readonly variances: Float64Array;
  /** Number of parameters p. */
  readonly parameters: number;
  fit(tau2: number): WeightedFit;
}

/** One common mean. */
export function commonMean(y: Float64Array, variances: Float64Array): Observations {
  return groupMeans(
    y,
    variances,
    Array.from(y, () => 0),
    1,
  );
}

/** One mean for each of `count` groups (indices from 0). */
export function groupMeans(
  y: Float64Array,
  variances: Float64Array,
  groups: readonly number[],
  count: number,
): Observations {
  const fit = (tau2: number): WeightedFit => {
    const origin = new Float64Array(count).fill(NaN);
    const weights = new Float64Array(count);
    const sums = new Float64Array(count);
    groups.forEach((group, i) => {
      if (Number.isNaN(origin[group]!)) origin[group] = y[i]!;
      const w = 1 / (variances[i]! + tau2);
      weights[group]! += w;
      sums[group]! += w * (y[i]! - origin[group]!);
    });
    const beta = origin.map((value, g) => value + sums[g]! / weights[g]!);
    const covariance = new Float64Array(count * count);
    weights.forEach((w, g) => (covariance[g * count + g] = 1 / w));
    let q = 0;
    groups.forEach((group, i) => (q += (y[i]! - beta[group]!) ** 2 / (variances[i]! + tau2)));
    return { beta, covariance, q };
  };
  return { y, variances, parameters: count, fit };
}

/** A straight line a + b (x - centre): beta is (a, b). */
export function straightLine(
  y: Float64Array,
  variances: Float64Array,
  x: Float64Array,
  centre: number,
): Observations {
  const fit = (tau2: number): WeightedFit => {
    const weights = variances.map((v) => 1 / (v + tau2));
    let sum = 0;
    let meanX = 0;
    let meanY = 0;
    weights.forEach((w, i) => {
      sum += w;
      meanX += w * (x[i]! - centre);
      meanY += w * (y[i]! - y[0]!);
    });
    meanX /= sum;
    meanY /= sum;
    let spread = 0;
    let product = 0;
    weights.forEach((w, i) => {
      const dx = x[i]! - centre - meanX;
      spread += w * dx * dx;
      product += w * dx * (y[i]! - y[0]! - meanY);
    });
    const slope = product / spread;
    let q = 0;
    weights.forEach((w, i) => {
      q += w * (y[i]! - y[0]! - meanY - slope * (x[i]! - centre - meanX)) ** 2;
    });
    const beta = Float64Array.of(y[0]! + meanY - slope * meanX, slope);
    const covariance = Float64Array.of(
      1 / sum + meanX ** 2 / spread,
      -meanX / spread,
      -meanX / spread,
      1 / spread,
    );
    return { beta, covariance, q };
  };
  return { y, variances, parameters: 2, fit };
}
