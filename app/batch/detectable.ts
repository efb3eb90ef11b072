import { normalQuantile } from "../solve/index.ts";
import { twoSidedQuantile } from "./quantiles.ts";

/**
 * What      The smallest true difference that would have been found with probability `power` at the two-sided level
 *           `alpha` when its standard error is sigma: (t_alpha/2 + z_power) sigma. For m tests alpha is divided by m, the
 *           first step of Holm's procedure.
 * Units     of sigma.
 * Source    Currie, Anal. Chem. 40, 586 (1968), eq. 4b with unequal risks; Student's t for sigma with few degrees of
 *           freedom.
 */
export function detectableDifference(
  sigma: number,
  degreesOfFreedom: number,
  alpha: number,
  tests: number,
  power: number,
): number {
  return (twoSidedQuantile(alpha / Math.max(1, tests), degreesOfFreedom) + normalQuantile(power)) * sigma;
}

/**
 * Degrees of freedom of a variance made of exactly known parts and of parts estimated with few degrees of freedom
 * (Welch-Satterthwaite: JCGM 100:2008, G.4.1, eq. G.2b). Infinity where nothing is estimated.
 */
export function effectiveDegrees(
  variance: number,
  estimated: readonly { readonly variance: number; readonly degreesOfFreedom: number }[],
): number {
  let sum = 0;
  for (const part of estimated)
    if (part.variance > 0) sum += part.variance ** 2 / Math.max(part.degreesOfFreedom, Number.MIN_VALUE);
  return sum > 0 ? variance ** 2 / sum : Infinity;
}
