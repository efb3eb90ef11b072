import { chiSquareSurvival } from "../solve/index.ts";
import { bleaching } from "./bleaching-law.ts";
import { fitCurve } from "./fit-curve.ts";
import type { JointSaturation, LawChoice } from "./saturation.ts";

export interface Scaling {
  readonly exponent: number;
  readonly sigma: number;
  readonly fit_n: readonly [number, number];
  /** Chi square of the power law against free S_n, with lines - 2 degrees of freedom. */
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly p: number;
}

/**
 * What      S_n = S (n/n_0)^k fitted to the areas themselves with one zero-power area per line, so that lines whose
 *           bleaching is not seen count for what they say and nothing is selected. Judged against free S_n.
 */
export function fitScaling(joint: JointSaturation, n: readonly number[], choice: LawChoice): Scaling | null {
  const lines = n.length;
  if (lines < 3) return null;
  const { joined } = joint;
  // Weighted straight line through the seen ln S_n as a start.
  const variance = (a: number): number =>
    joint.covariance[(lines + a) * 2 * lines + lines + a]! / joint.saturation[a]! ** 2;
  const seen = n.map((_, a) => a).filter((a) => joint.saturation[a]! > 0 && variance(a) < 1);
  if (seen.length < 2) return null;
  const middle =
    seen.reduce((sum, a) => sum + Math.log(n[a]!) / variance(a), 0) /
    seen.reduce((sum, a) => sum + 1 / variance(a), 0);
  const slope0 = weightedSlope(
    seen.map((a) => Math.log(n[a]!)),
    seen.map((a) => Math.log(joint.saturation[a]!)),
    seen.map((a) => 1 / variance(a)),
  );
  const start = new Float64Array(lines + 2);
  start.set(joint.zero);
  start[lines] = slope0.intercept + slope0.slope * middle;
  start[lines + 1] = slope0.slope;
  const fit = fitCurve({
    data: joined.values,
    covariance: joined.covariance,
    parameters: lines + 2,
    at: (theta, i, out) => {
      out.fill(0);
      const a = joined.line[i]!;
      const reach = Math.log(n[a]!) - middle;
      const u = Math.exp(theta[lines]! + theta[lines + 1]! * reach) * joined.power[i]!;
      const { factor, slope } = bleaching(choice.law, u, choice.ratio);
      out[a] = factor;
      out[lines] = theta[a]! * slope * u;
      out[lines + 1] = theta[a]! * slope * u * reach;
      return theta[a]! * factor;
    },
    start,
  });
  if (fit === null) return null;
  const p = lines + 2;
  const chi2 = Math.max(0, fit.chi2 - joint.fit.chi2);
  return {
    exponent: fit.values[lines + 1]!,
    sigma: Math.sqrt(fit.covariance[(lines + 1) * p + lines + 1]!),
    fit_n: [n[0]!, n[lines - 1]!],
    chi2,
    degreesOfFreedom: lines - 2,
    p: chiSquareSurvival(chi2, lines - 2),
  };
}

export function weightedSlope(
  x: readonly number[],
  y: readonly number[],
  weights: readonly number[],
): { slope: number; intercept: number; gain: number[] } {
  const total = weights.reduce((sum, w) => sum + w, 0);
  const mean = x.reduce((sum, one, i) => sum + weights[i]! * one, 0) / total;
  const square = x.reduce((sum, one, i) => sum + weights[i]! * (one - mean) ** 2, 0);
  const gain = x.map((one, i) => (weights[i]! * (one - mean)) / square);
  const slope = gain.reduce((sum, g, i) => sum + g * y[i]!, 0);
  const centre = y.reduce((sum, one, i) => sum + weights[i]! * one, 0) / total;
  return { slope, intercept: centre - slope * mean, gain };
}
