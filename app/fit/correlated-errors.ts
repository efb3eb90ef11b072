import { autocorrelation, correlationTime } from "../solve/index.ts";
import { describeFit, type Solved, type SpectrumFit } from "./fit-spectrum.ts";
import { separableJacobian } from "./set-up-fit.ts";

/**
 * What      The same fit with the covariance that ordinary weights have under correlated noise:
 *           V = C J' S J C with C = (J'J)^-1, J the weighted Jacobian and S_ij = g_|i-j| the autocovariance of the weighted
 *           residuals, tapered by Bartlett's weights so that S is positive semidefinite. The values do not change.
 * Shapes    J (m x (p + k)); lags as correlationTime chooses them.
 * Units     those of the fit; g_0 is the variance of the residuals, so that noise which neighbours share, and which an estimate
 *           of white noise cannot see, counts too.
 * Domain    noise whose correlation depends on the distance in points only. Where the light was fitted, or parameters are held
 *           or tied, J is that of what was solved.
 * Accuracy  tests/app/fit/correlated-errors.test.ts: pulls of width one under noise of a moving average.
 * Source    Newey and West, Econometrica 55, 703 (1987), for one stationary autocovariance instead of products of scores.
 */
export function withCorrelatedErrors(fit: SpectrumFit): SpectrumFit {
  const { problem, solution } = fit;
  const { residuals } = solution;
  const m = residuals.length;
  const variance = solution.chi2 / Math.max(1, solution.degreesOfFreedom);
  const { lags } = correlationTime(residuals);
  const rho = autocorrelation(residuals, lags);
  const solved: Solved = fit.solved ?? {
    weights: problem.weights,
    covariance: solution.covariance,
    jacobian: () => separableJacobian(problem, solution),
    describe: (covariance) => describeFit(problem, { ...solution, covariance }),
  };
  const jacobian = solved.jacobian();
  const n = jacobian.length / m;
  for (let j = 0; j < n; j++)
    for (let i = 0; i < m; i++) jacobian[j * m + i] = jacobian[j * m + i]! * solved.weights[i]!;
  const taper = Float64Array.from({ length: lags + 1 }, (_, k) => (1 - k / (lags + 1)) * rho[k]!);
  const filtered = new Float64Array(m);
  const inner = new Float64Array(n * n);
  for (let b = 0; b < n; b++) {
    const column = jacobian.subarray(b * m, (b + 1) * m);
    for (let i = 0; i < m; i++) filtered[i] = column[i]!;
    for (let k = 1; k <= lags; k++) {
      const weight = taper[k]!;
      for (let i = k; i < m; i++) {
        filtered[i] = filtered[i]! + weight * column[i - k]!;
        filtered[i - k] = filtered[i - k]! + weight * column[i]!;
      }
    }
    for (let a = 0; a <= b; a++) {
      let sum = 0;
      for (let i = 0; i < m; i++) sum += jacobian[a * m + i]! * filtered[i]!;
      inner[a * n + b] = sum;
      inner[b * n + a] = sum;
    }
  }
  // What the data do not determine stays so, and says nothing about the rest.
  const known = solved.covariance.map((value) => (Number.isNaN(value) ? 0 : value));
  const covariance = product(product(known, inner, n), known, n);
  for (let i = 0; i < covariance.length; i++)
    covariance[i] = Number.isNaN(solved.covariance[i]!) ? NaN : covariance[i]! * variance;
  return solved.describe(covariance);
}

/** a b of square matrices (n x n, row-major). */
function product(a: Float64Array, b: Float64Array, n: number): Float64Array {
  const out = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let l = 0; l < n; l++) {
      const factor = a[i * n + l]!;
      if (factor === 0) continue;
      for (let j = 0; j < n; j++) out[i * n + j] = out[i * n + j]! + factor * b[l * n + j]!;
    }
  return out;
}
