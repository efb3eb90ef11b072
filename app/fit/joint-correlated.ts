import { autocorrelation, correlationTime } from "../solve/index.ts";
import { describeFit } from "./fit-spectrum.ts";
import type { JointFit } from "./joint-fit.ts";
import { separableJacobian } from "./set-up-fit.ts";

/**
 * What      The same joint fit with the covariance that ordinary weights have under noise that neighbours share, as
 *           withCorrelatedErrors does for one spectrum. With M_a = J_a' S_a J_a of each spectrum, P_a the covariance of what is
 *           its own with the shared parameters held, T_a = d(own)/d(shared) (1 at the shared places) and C the covariance
 *           of the shared ones:
 *             V_s = C [sum_a T_a' M_a T_a] C,   X_a = P_a M_a T_a C,
 *             V_aa = P_a M_a P_a + X_a T_a' + T_a X_a' + T_a V_s T_a',   V_ab = X_a T_b' + T_a X_b' + T_a V_s T_b'.
 * Shapes    allowed (N): for spectra where it is false S_a is 1, as the weights have it.
 * Units     those of the fit.
 * Domain    as withCorrelatedErrors; noise of different spectra is independent. Values do not change, nor does anything where
 *           no spectrum is allowed.
 * Accuracy  tests/app/fit/joint-fit.test.ts: the sandwich of one dense fit, and the fit of one spectrum.
 * Source    correlated-errors.ts for S; sharedCovariance.ts for the elimination.
 */
export function withCorrelatedJoint(joint: JointFit, allowed: readonly boolean[]): JointFit {
  if (!allowed.includes(true)) return joint;
  const { solution, names } = joint;
  const q = names.length;
  const known = (value: number): number => (Number.isFinite(value) ? value : 0);
  const shared = solution.sharedCovariance.map(known);
  const parts = joint.fits.map(({ problem, solution: own }, a) => {
    const n = own.theta.length + own.coefficients.length;
    const transfer = solution.sensitivity[a]!.map(known);
    const marginal = own.covariance.map(known);
    const through = transposed(product(transfer, shared, n, q, q), n, q);
    const held = product(transfer, through, n, q, n).map((value, i) => marginal[i]! - value);
    const inner = allowed[a]! ? scatterOf(problem, own) : plainScatter(problem, own);
    return {
      n,
      transfer,
      held,
      inner,
      undetermined: own.covariance.map((value) => (Number.isNaN(value) ? 1 : 0)),
    };
  });
  const between = new Float64Array(q * q);
  for (const { n, transfer, inner } of parts) {
    const part = product(transposed(transfer, n, q), product(inner, transfer, n, n, q), q, n, q);
    for (let i = 0; i < q * q; i++) between[i] = between[i]! + part[i]!;
  }
  const sharedCovariance = product(product(shared, between, q, q, q), shared, q, q, q);
  const mixed = parts.map(({ n, transfer, held, inner }) =>
    product(product(product(held, inner, n, n, n), transfer, n, n, q), shared, n, q, q),
  );
  const members = solution.members.map((member, a) => {
    const { n, transfer, held, inner, undetermined } = parts[a]!;
    const covariance = product(product(held, inner, n, n, n), held, n, n, n);
    const cross = product(mixed[a]!, transposed(transfer, n, q), n, q, n);
    const common = product(product(transfer, sharedCovariance, n, q, q), transposed(transfer, n, q), n, q, n);
    for (let i = 0; i < n; i++)
      for (let j = 0; j < n; j++) {
        const at = i * n + j;
        covariance[at] =
          undetermined[at] === 1 ? NaN : covariance[at]! + cross[at]! + cross[j * n + i]! + common[at]!;
      }
    return { ...member, covariance };
  });
  return {
    ...joint,
    solution: { ...solution, sharedCovariance, members },
    mixed,
    // Which lines ended at a bound does not change.
    fits: joint.fits.map((fit, a) => ({ ...describeFit(fit.problem, members[a]!), atBound: fit.atBound })),
  };
}

type Problem = JointFit["fits"][number]["problem"];
type Solution = JointFit["fits"][number]["solution"];

/** J by all parameters in units of the noise (m x n, column-major). */
function weightedJacobian(problem: Problem, solution: Solution): Float64Array {
  const jacobian = separableJacobian(problem, solution);
  const m = problem.rows;
  return jacobian.map((value, i) => value * problem.weights[i % m]!);
}

function plainScatter(problem: Problem, solution: Solution): Float64Array {
  const jacobian = weightedJacobian(problem, solution);
  return normalOf(jacobian, jacobian, problem.rows);
}

/** J' S J with S the tapered autocovariance of this spectrum's residuals (n x n). */
function scatterOf(problem: Problem, solution: Solution): Float64Array {
  const { residuals, chi2, degreesOfFreedom } = solution;
  const m = problem.rows;
  const variance = chi2 / Math.max(1, degreesOfFreedom);
  const { lags } = correlationTime(residuals);
  const rho = autocorrelation(residuals, lags);
  const jacobian = weightedJacobian(problem, solution);
  const filtered = jacobian.slice();
  for (let from = 0; from < jacobian.length; from += m)
    for (let k = 1; k <= lags; k++) {
      const weight = (1 - k / (lags + 1)) * rho[k]!;
      for (let i = k; i < m; i++) {
        filtered[from + i] = filtered[from + i]! + weight * jacobian[from + i - k]!;
        filtered[from + i - k] = filtered[from + i - k]! + weight * jacobian[from + i]!;
      }
    }
  return normalOf(jacobian, filtered, m).map((value) => value * variance);
}

/** a' b of two m x n matrices by columns, symmetric by what they are. */
function normalOf(a: Float64Array, b: Float64Array, m: number): Float64Array {
  const n = a.length / m;
  const out = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let r = 0; r < m; r++) sum += a[i * m + r]! * b[j * m + r]!;
      out[i * n + j] = sum;
      out[j * n + i] = sum;
    }
  return out;
}

/** a b with a (r x s) and b (s x t), row-major. */
function product(a: Float64Array, b: Float64Array, r: number, s: number, t: number): Float64Array {
  const out = new Float64Array(r * t);
  for (let i = 0; i < r; i++)
    for (let l = 0; l < s; l++) {
      const factor = a[i * s + l]!;
      if (factor === 0) continue;
      for (let j = 0; j < t; j++) out[i * t + j] = out[i * t + j]! + factor * b[l * t + j]!;
    }
  return out;
}

/** Of an r x t matrix, row-major. */
function transposed(a: Float64Array, r: number, t: number): Float64Array {
  return Float64Array.from({ length: r * t }, (_, at) => a[(at % r) * t + Math.floor(at / r)]!);
}
