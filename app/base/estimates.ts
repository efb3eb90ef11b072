/**
 * Fitted numbers kept together, because lone sigmas forget correlation.
 * Shapes: names, units, values (p); covariance (p x p, row-major), in products of the units.
 */
export interface Estimates {
  readonly names: readonly string[];
  readonly units: readonly string[];
  readonly values: Float64Array;
  readonly covariance: Float64Array;
  readonly degreesOfFreedom: number;
  /** `given`: from the stated or estimated noise; `residuals`: scaled by the residuals, or from their correlation. */
  readonly sigmaFrom: "given" | "residuals";
}

/** One standard uncertainty of parameter i. */
export function sigmaOf(estimates: Estimates, i: number): number {
  return Math.sqrt(estimates.covariance[i * estimates.values.length + i]!);
}

/**
 * Variance of a derived number by first-order propagation, g' C g.
 * Shapes: gradient (p), covariance (p x p, row-major).
 */
export function propagate(gradient: ArrayLike<number>, covariance: Float64Array): number {
  const p = gradient.length;
  let sum = 0;
  for (let i = 0; i < p; i++) {
    const gi = gradient[i]!;
    if (gi === 0) continue;
    for (let j = 0; j < p; j++) sum += gi * covariance[i * p + j]! * gradient[j]!;
  }
  return sum;
}
