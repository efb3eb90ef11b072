import { chiSquareQuantile } from "./quantiles.ts";
import { commonMean, type Observations } from "./weighted-fit.ts";

/**
 * What      Variance tau^2 of true differences beyond the stated errors, by moments:
 *           Paule-Mandel    Q(tau^2) = n - p, the positive root, 0 where Q(0) <= n - p
 *           DerSimonian-Laird  tau^2 = max(0, [Q(0) - (k - 1)]/(S_1 - S_2/S_1)), S_r = sum v_i^-r
 *           With one indicator a batch the first gives the variance within batches, common to all.
 * Shapes    Observations of weighted-fit.ts.
 * Units     squares of those of y.
 * Domain    n > p; NaN where there is no degree of freedom. All variances may be 0: then tau^2 is the plain variance.
 * Accuracy  1e-12 relative; tests/reference/random-effects.test.ts (published examples).
 * Source    Paule and Mandel, J. Res. Natl. Bur. Stand. 87, 377 (1982); DerSimonian and Laird, Control. Clin. Trials 7,
 *           177 (1986); DerSimonian and Kacker, Contemp. Clin. Trials 28, 105 (2007), eqs. 4 and 8; with covariates:
 *           Panityakul, Bumrungsup and Knapp, Biom. J. 55, 825 (2013).
 */
export function pauleMandel(observations: Observations): number {
  return profileRoot(observations, (dof) => dof);
}

/** Root of Q(tau^2) = target(degrees of freedom) by bisection, since Q falls monotonically; 0 where Q(0) is below. */
function profileRoot(observations: Observations, target: (degreesOfFreedom: number) => number): number {
  const { y, variances, parameters } = observations;
  const spread = (Math.max(...y) - Math.min(...y)) ** 2;
  const smallest = Math.min(...variances);
  const dof = y.length - parameters;
  if (!(dof > 0)) return NaN;
  const goal = target(dof);
  const q = (tau2: number): number => observations.fit(tau2).q;
  if (spread === 0) return 0;
  if (smallest > 0 && q(0) <= goal) return 0;
  // Q is at most sum (y - mean)^2/tau^2.
  let high = (y.length * spread) / Math.max(goal, 1e-6);
  while (q(high) > goal) high *= 4;
  let low = 0;
  for (let turn = 0; turn < 200 && high - low > 1e-15 * high; turn++) {
    const middle = low > 0 ? Math.sqrt(low) * Math.sqrt(high) : high / 1024;
    const at = low > 0 && high / low < 1.5 ? (low + high) / 2 : middle;
    if (at <= 0 || at === low || at === high) break;
    if (q(at) > goal) low = at;
    else high = at;
    // All of it below a thousandth of a millionth of the smallest stated variance: nothing.
    if (low === 0 && high < 1e-12 * Math.max(smallest, spread * 1e-12)) return 0;
  }
  return (low + high) / 2;
}

export function derSimonianLaird(y: Float64Array, variances: Float64Array): number {
  const k = y.length;
  if (k < 2 || variances.some((v) => !(v > 0))) return NaN;
  const { q } = commonMean(y, variances).fit(0);
  let first = 0;
  let second = 0;
  for (const v of variances) {
    first += 1 / v;
    second += 1 / (v * v);
  }
  return Math.max(0, (q - (k - 1)) / (first - second / first));
}

/**
 * Interval of tau^2 from the quantiles of Q (Viechtbauer, Stat. Med. 26, 37 (2007): "Q profile"): exact under normal
 * errors, wide where the batches are few.
 */
export function tauInterval(observations: Observations, level: number): readonly [number, number] {
  return [
    profileRoot(observations, (dof) => chiSquareQuantile((1 + level) / 2, dof)),
    profileRoot(observations, (dof) => chiSquareQuantile((1 - level) / 2, dof)),
  ];
}

export interface PooledMean {
  readonly mean: number;
  /** From the weights 1/(v + tau^2) alone. */
  readonly sigma: number;
  /**
   * The same from the scatter of the values about the mean, with k - 1 degrees of freedom (Hartung and Knapp, Stat.
   * Med. 20, 1771 (2001)): better where k is small. NaN for one value.
   */
  readonly sigmaFromScatter: number;
}

export function pooledMean(y: Float64Array, variances: Float64Array, tau2: number): PooledMean {
  const fit = commonMean(y, variances).fit(tau2);
  const sigma = Math.sqrt(fit.covariance[0]!);
  const k = y.length;
  return {
    mean: fit.beta[0]!,
    sigma,
    sigmaFromScatter: k > 1 ? sigma * Math.sqrt(fit.q / (k - 1)) : NaN,
  };
}
