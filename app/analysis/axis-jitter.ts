import type { FitPoints } from "../fit/index.ts";

/** Jitter of the axis from point to point as the residuals show it. */
export interface PointJitter {
  /** Standard deviation in eV. */
  readonly jitter_eV: number;
  /** Its variance over the standard error of that. */
  readonly significance: number;
  /**
   * Correlation of neighbouring residuals where the curve is steep, weighed by the slopes: about 0 for an axis that jitters
   * from point to point, towards 1 where the lines have another shape than the model's.
   */
  readonly repeats: number;
}

/**
 * What      A jitter j of the axis adds variance (s_i j)^2 where the curve is steep, s_i its slope. Least squares of the squared
 *           standardised residuals, less their mean where the curve is flat, on w_i = (s_i/sigma_i)^2 gives j^2.
 * Shapes    fitted, residuals (m); residuals in standard deviations.
 * Domain    null where the curve has no slope to speak of or fewer than 50 points; a general misfit is not taken for it, since what
 *           is regressed is the excess over the mean square.
 * Source    test of a variance that depends on a covariate: Breusch and Pagan, Econometrica 47, 1287 (1979).
 */
export function pointJitter(
  points: FitPoints,
  fitted: Float64Array,
  residuals: Float64Array,
): PointJitter | null {
  const { energy, sigma } = points;
  const m = energy.length;
  if (m < 50 || fitted.length !== m) return null;
  const w = new Float64Array(m);
  let mean = 0;
  let square = 0;
  for (let i = 1; i < m - 1; i++) {
    const slope = (fitted[i + 1]! - fitted[i - 1]!) / (energy[i + 1]! - energy[i - 1]!);
    w[i] = (slope / sigma[i]!) ** 2;
  }
  for (let i = 0; i < m; i++) {
    mean += w[i]! / m;
    square += residuals[i]! ** 2 / m;
  }
  let top = 0;
  let bottom = 0;
  let fourth = 0;
  for (let i = 0; i < m; i++) {
    const d = w[i]! - mean;
    const excess = residuals[i]! ** 2 - square;
    top += d * excess;
    bottom += d * d;
    fourth += excess * excess;
  }
  if (!(bottom > 0) || !Number.isFinite(top)) return null;
  const variance = top / bottom;
  const error = Math.sqrt(fourth / m / bottom);
  return {
    jitter_eV: Math.sqrt(Math.max(0, variance)),
    significance: variance / error,
    repeats: repeats(w, residuals),
  };
}

function repeats(w: Float64Array, residuals: Float64Array): number {
  let pairs = 0;
  let squares = 0;
  for (let i = 1; i < w.length; i++) {
    const both = Math.sqrt(w[i - 1]! * w[i]!);
    pairs += both * residuals[i - 1]! * residuals[i]!;
    squares += 0.5 * both * (residuals[i - 1]! ** 2 + residuals[i]! ** 2);
  }
  return squares > 0 ? pairs / squares : 0;
}
