import { longContrasts, noiseContrasts, robustScale } from "./white-noise.ts";
import { smoothCurve } from "./smooth-curve.ts";

/** The noise of a curve, estimated from the curve itself. */
export interface NoiseEstimate {
  /** One standard deviation per point (m). */
  readonly sigma: Float64Array;
  /** The curve without its noise, for weights (m). */
  readonly smooth: Float64Array;
  /** True where the noise clearly changes with the height of the curve. */
  readonly varies: boolean;
}

/** Fewest points for which a change of the noise with the height can be told. */
const ENOUGH = 600;
/** Gain in chi square over a constant from which on the change is believed. */
const CLEARLY = 16;
/** Sum of the squared autocorrelations of sixth differences: so many contrasts count as one. */
const CONTRASTS_PER_POINT = 3.17;

/**
 * What      White noise as a constant, or, where that is clearly refused, with variance a + b u + c u^2 of the height
 *           u of the smoothed curve above its lowest point (a, b, c >= 0): readout, shot and proportional noise for a
 *           transmission, and near enough for its logarithm.
 * Shapes    x, y, relative (m); see white-noise.ts.
 * Units     sigma and smooth in the unit of y.
 */
export function estimateNoise(x: Float64Array, y: Float64Array, relative: Float64Array): NoiseEstimate {
  const m = x.length;
  const short = noiseContrasts(x, y, relative);
  const first = robustScale(short.z);
  const { z } = longContrasts(
    x,
    y,
    relative,
    short,
    smoothCurve(
      y,
      relative.map((factor) => factor * first),
    ),
    first,
  );
  const { order } = short;
  const common = Math.max(robustScale(z), digitNoise(y));
  const flat = relative.map((factor) => factor * common);
  const smooth = smoothCurve(y, flat);
  const constant = { sigma: flat, smooth, varies: false };
  if (m < ENOUGH || !(common > 0)) return constant;

  const zero = smooth.reduce((least, value) => Math.min(least, value), Infinity);
  const top = smooth.reduce((most, value) => Math.max(most, value), -Infinity);
  if (!(top > zero)) return constant;
  const height = smooth.map((value) => (value - zero) / (top - zero));
  const bins = binByHeight(height, z, order);
  const model = fitVariance(bins);
  if (model === null) return constant;
  const sigma = new Float64Array(m);
  const [a, b, c] = model;
  for (let i = 0; i < m; i++) {
    const u = height[i]!;
    sigma[i] = relative[i]! * Math.sqrt(a + b * u + c * u * u);
  }
  return { sigma, smooth: smoothCurve(y, sigma), varies: true };
}

interface Bin {
  readonly height: number;
  readonly variance: number;
  /** Standard error of the variance. */
  readonly error: number;
}

/** Ten classes of equal number by height; the robust variance of the contrasts in each. */
function binByHeight(height: Float64Array, z: Float64Array, order: number): Bin[] {
  const middle = order >> 1;
  const places = Array.from({ length: z.length }, (_, i) => i).sort(
    (a, b) => height[a + middle]! - height[b + middle]! || a - b,
  );
  const count = 10;
  return Array.from({ length: count }, (_, k) => {
    const members = places.slice(
      Math.floor((k * places.length) / count),
      Math.floor(((k + 1) * places.length) / count),
    );
    const scale = robustScale(members.map((i) => z[i]!));
    const variance = scale * scale;
    const mean = members.reduce((sum, i) => sum + height[i + middle]!, 0) / members.length;
    // Robust scales lose a little against the mean square; 1.3 covers it.
    const error = variance * Math.sqrt((2 * 1.3 * CONTRASTS_PER_POINT) / members.length);
    return { height: mean, variance, error };
  });
}

/** The best a + b u + c u^2 with no negative part, or null where a constant is not clearly refused. */
function fitVariance(bins: readonly Bin[]): readonly [number, number, number] | null {
  if (bins.some((bin) => !(bin.variance > 0))) return null;
  const constant = solve(bins, [0]);
  if (constant === null) return null;
  const subsets = [[0], [1], [2], [0, 1], [0, 2], [1, 2], [0, 1, 2]];
  let best: { chi2: number; terms: readonly number[] } | null = null;
  for (const subset of subsets) {
    const trial = solve(bins, subset);
    if (trial === null || trial.terms.some((term) => term < 0)) continue;
    if (best === null || trial.chi2 < best.chi2 - 1e-9) best = trial;
  }
  // Four standard errors: a height that explains no more than chance leaves the constant.
  if (best === null || constant.chi2 - best.chi2 < CLEARLY) return null;
  const [a = 0, b = 0, c = 0] = best.terms;
  // Below the lowest class nothing is known: keep a floor there.
  const floor = 0.05 * Math.min(...bins.map((bin) => bin.variance));
  return [Math.max(a, floor), b, c];
}

/** Weighted normal equations of at most three terms, by elimination; relative errors as weights. */
function solve(bins: readonly Bin[], subset: readonly number[]): { chi2: number; terms: number[] } | null {
  const p = subset.length;
  const rows = Array.from({ length: p }, () => new Float64Array(p + 1));
  for (const bin of bins) {
    const w = 1 / (bin.error * bin.error);
    for (let i = 0; i < p; i++) {
      for (let j = 0; j < p; j++) rows[i]![j]! += w * bin.height ** subset[i]! * bin.height ** subset[j]!;
      rows[i]![p]! += w * bin.height ** subset[i]! * bin.variance;
    }
  }
  for (let i = 0; i < p; i++) {
    const pivot = rows[i]![i]!;
    if (!(Math.abs(pivot) > 0)) return null;
    for (let k = 0; k < p; k++) {
      if (k === i) continue;
      const factor = rows[k]![i]! / pivot;
      for (let j = i; j <= p; j++) rows[k]![j]! -= factor * rows[i]![j]!;
    }
  }
  const terms = [0, 0, 0];
  for (let i = 0; i < p; i++) terms[subset[i]!] = rows[i]![p]! / rows[i]![i]!;
  let chi2 = 0;
  for (const bin of bins) {
    const model = terms[0]! + bin.height * (terms[1]! + bin.height * terms[2]!);
    chi2 += ((bin.variance - model) / bin.error) ** 2;
  }
  return Number.isFinite(chi2) ? { chi2, terms } : null;
}

/** The rounding noise of numbers written with few digits: their smallest step over sqrt(12); 0 where steps are fine. */
function digitNoise(y: Float64Array): number {
  const sorted = y.slice().sort();
  let step = Infinity;
  let distinct = 1;
  for (let i = 1; i < sorted.length; i++) {
    const gap = sorted[i]! - sorted[i - 1]!;
    if (gap > 0) distinct++;
    if (gap > 1e-12 * Math.abs(sorted[i]!) && gap < step) step = gap;
  }
  return distinct < sorted.length / 2 && Number.isFinite(step) ? step / Math.sqrt(12) : 0;
}
