import {
  backSubstitute,
  chiSquareSurvival,
  choleskyFactor,
  fitLaw,
  forwardSubstitute,
} from "../solve/index.ts";

/** The coordinates are such that a few steps suffice; what is left is polished by the solver itself. */
const SEARCH_ITERATIONS = 12;

/**
 * A law to be fitted to numbers that come with their full covariance.
 * Shapes    observed (m); covariance (m x m, row-major); start (p); model writes m, jacobian m x p column-major.
 */
export interface LawProblem {
  readonly observed: Float64Array;
  readonly covariance: Float64Array;
  readonly start: Float64Array;
  /**
   * `search`: by ml-levenberg-marquardt, tested and polished (solve/fitLaw.ts), for numbers that are reported.
   * `newton`: Gauss-Newton steps from a start that is already near, for the many fits of tables and profiles; goes over to
   * the search where these do not arrive. Default `search`.
   */
  readonly how?: "search" | "newton" | undefined;
  /** Parameters that stay at their start (p); default none. */
  readonly held?: readonly boolean[] | undefined;
  model(theta: Float64Array, out: Float64Array): void;
  jacobian(theta: Float64Array, out: Float64Array): void;
}

export interface LawSolution {
  readonly values: Float64Array;
  /** p x p, row-major; zero rows at held parameters. From the given covariance, never scaled by the residuals. */
  readonly covariance: Float64Array;
  /** d values/d observed (p x m, row-major): the linearised fit. */
  readonly gain: Float64Array;
  /** observed - model (m). */
  readonly residuals: Float64Array;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly p: number;
  readonly converged: boolean;
}

/**
 * What      Generalised least squares of a law, min (y - f)' V^-1 (y - f), in coordinates u with theta = start + T u
 *           in which the whitened Jacobian at the start is orthonormal, so that every step is of order one.
 * Domain    null where V is not positive definite, or a number is not finite, or the law does not depend on a free
 *           parameter.
 * Accuracy  tests/reference/atomic-series.test.ts: limits to 1e-10 of themselves.
 * Source    Golub and Van Loan, Matrix Computations, 4th ed., 5.2 (Gram-Schmidt twice) and 6.1.
 */
export function fitToLaw(problem: LawProblem): LawSolution | null {
  const { observed, start } = problem;
  const m = observed.length;
  const p = start.length;
  const free: number[] = [];
  for (let j = 0; j < p; j++) if (problem.held?.[j] !== true) free.push(j);
  const whitening = makeWhitening(problem.covariance, m);
  if (whitening === null || !observed.every(Number.isFinite)) return null;
  const theta = Float64Array.from(start);
  const full = new Float64Array(m * p);

  const whitenedJacobian = (): Float64Array => {
    problem.jacobian(theta, full);
    const out = new Float64Array(m * free.length);
    free.forEach((j, k) => {
      for (let i = 0; i < m; i++) out[k * m + i] = full[j * m + i]!;
      whitening.apply(out, k * m);
    });
    return out;
  };

  if (free.length > 0) {
    const transform = orthonormalise(whitenedJacobian(), m, free.length);
    if (transform === null) return null;
    const toTheta = (u: Float64Array): void => {
      free.forEach((j, k) => {
        let sum = start[j]!;
        for (let l = 0; l < free.length; l++) sum += transform[k * free.length + l]! * u[l]!;
        theta[j] = sum;
      });
    };
    if (problem.how === "newton") {
      const arrived = stepNewton(problem, theta, free, whitening, whitenedJacobian);
      if (arrived) return finish(problem, theta, free, whitening, whitenedJacobian, true);
      theta.set(start);
    }
    const solution = fitLaw(
      {
        data: observed,
        covariance: problem.covariance,
        parameters: free.length,
        model: (u, out) => {
          toTheta(u);
          problem.model(theta, out);
        },
        jacobian: (u, out) => {
          toTheta(u);
          problem.jacobian(theta, full);
          out.fill(0, 0, m * free.length);
          for (let l = 0; l < free.length; l++) {
            free.forEach((j, k) => {
              const weight = transform[k * free.length + l]!;
              for (let i = 0; i < m; i++) out[l * m + i] = out[l * m + i]! + weight * full[j * m + i]!;
            });
          }
        },
      },
      new Float64Array(free.length),
      { searchIterations: SEARCH_ITERATIONS },
    );
    toTheta(solution.values);
    if (!theta.every(Number.isFinite)) return null;
    return finish(problem, theta, free, whitening, whitenedJacobian, solution.stationary);
  }
  return finish(problem, theta, free, whitening, whitenedJacobian, true);
}

const NEWTON_STEPS = 30;
/** Arrived when the step is shorter than this, in standard errors of all parameters together. */
const NEAR_ENOUGH = 1e-7;

/** Gauss-Newton with halved steps; theta ends at the minimum and true is returned, or it did not arrive. */
function stepNewton(
  problem: LawProblem,
  theta: Float64Array,
  free: readonly number[],
  whitening: Whitening,
  whitenedJacobian: () => Float64Array,
): boolean {
  const m = problem.observed.length;
  const k = free.length;
  const residual = new Float64Array(m);
  const evaluate = (): number => {
    problem.model(theta, residual);
    for (let i = 0; i < m; i++) residual[i] = problem.observed[i]! - residual[i]!;
    whitening.apply(residual, 0);
    let sum = 0;
    for (let i = 0; i < m; i++) sum += residual[i]! * residual[i]!;
    return sum;
  };
  let chi2 = evaluate();
  for (let turn = 0; turn < NEWTON_STEPS; turn++) {
    const jacobian = whitenedJacobian();
    const transform = orthonormalise(jacobian, m, k);
    if (transform === null || !Number.isFinite(chi2)) return false;
    const step = new Float64Array(k);
    let length = 0;
    for (let l = 0; l < k; l++) {
      let along = 0;
      for (let c = 0; c < k; c++)
        for (let i = 0; i < m; i++) along += transform[c * k + l]! * jacobian[c * m + i]! * residual[i]!;
      length += along * along;
      for (let c = 0; c < k; c++) step[c] = step[c]! + transform[c * k + l]! * along;
    }
    const from = free.map((j) => theta[j]!);
    let part = 1;
    for (;;) {
      free.forEach((j, c) => (theta[j] = from[c]! + part * step[c]!));
      const next = evaluate();
      if (next <= chi2 + 1e-9 * (1 + chi2)) {
        chi2 = next;
        break;
      }
      part /= 2;
      if (part < 1e-3) return false;
    }
    if (part === 1 && Math.sqrt(length) < NEAR_ENOUGH * (1 + Math.sqrt(chi2))) return true;
  }
  return false;
}

interface Whitening {
  /** x := L^-1 S x, the vector of m numbers from `offset`. */
  apply(x: Float64Array, offset: number): void;
  /** x := S L'^-1 x. */
  applyTransposed(x: Float64Array): void;
}

/** V = S^-1 L L' S^-1, S the inverse standard deviations: V brought to a unit diagonal before it is factored. */
function makeWhitening(covariance: Float64Array, m: number): Whitening | null {
  const scale = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    const variance = covariance[i * m + i]!;
    if (!(variance > 0 && variance < Infinity)) return null;
    scale[i] = 1 / Math.sqrt(variance);
  }
  const correlation = new Float64Array(m * m);
  for (let i = 0; i < m; i++)
    for (let j = 0; j < m; j++) correlation[i * m + j] = covariance[i * m + j]! * scale[i]! * scale[j]!;
  const factor = choleskyFactor(correlation, m);
  if (factor === null) return null;
  return {
    apply: (x, offset) => {
      for (let i = 0; i < m; i++) x[offset + i] = x[offset + i]! * scale[i]!;
      forwardSubstitute(factor, m, x, offset);
    },
    applyTransposed: (x) => {
      backSubstitute(factor, m, x);
      for (let i = 0; i < m; i++) x[i] = x[i]! * scale[i]!;
    },
  };
}

/** T (k x k, row-major) with orthonormal J T; null where a column depends on the others. */
function orthonormalise(jacobian: Float64Array, m: number, k: number): Float64Array | null {
  const q = Float64Array.from(jacobian);
  const transform = new Float64Array(k * k);
  for (let j = 0; j < k; j++) transform[j * k + j] = 1;
  for (let j = 0; j < k; j++) {
    const before = norm(q, j * m, m);
    if (!(before > 0 && before < Infinity)) return null;
    for (let pass = 0; pass < 2; pass++) {
      for (let l = 0; l < j; l++) {
        let dot = 0;
        for (let i = 0; i < m; i++) dot += q[l * m + i]! * q[j * m + i]!;
        for (let i = 0; i < m; i++) q[j * m + i] = q[j * m + i]! - dot * q[l * m + i]!;
        for (let i = 0; i <= l; i++)
          transform[i * k + j] = transform[i * k + j]! - dot * transform[i * k + l]!;
      }
    }
    const length = norm(q, j * m, m);
    if (!(length > 1e-13 * before)) return null;
    for (let i = 0; i < m; i++) q[j * m + i] = q[j * m + i]! / length;
    for (let i = 0; i < k; i++) transform[i * k + j] = transform[i * k + j]! / length;
  }
  return transform;
}

function norm(x: Float64Array, offset: number, m: number): number {
  let sum = 0;
  for (let i = 0; i < m; i++) sum += x[offset + i]! ** 2;
  return Math.sqrt(sum);
}

function finish(
  problem: LawProblem,
  values: Float64Array,
  free: readonly number[],
  whitening: Whitening,
  whitenedJacobian: () => Float64Array,
  converged: boolean,
): LawSolution | null {
  const m = problem.observed.length;
  const p = values.length;
  const k = free.length;
  const residuals = new Float64Array(m);
  problem.model(values, residuals);
  for (let i = 0; i < m; i++) residuals[i] = problem.observed[i]! - residuals[i]!;
  const whitened = Float64Array.from(residuals);
  whitening.apply(whitened, 0);
  let chi2 = 0;
  for (const one of whitened) chi2 += one * one;
  const covariance = new Float64Array(p * p);
  const gain = new Float64Array(p * m);
  if (k > 0) {
    const jacobian = whitenedJacobian();
    const transform = orthonormalise(jacobian, m, k);
    if (transform === null) return null;
    for (let a = 0; a < k; a++) {
      for (let b = 0; b < k; b++) {
        let sum = 0;
        for (let l = 0; l < k; l++) sum += transform[a * k + l]! * transform[b * k + l]!;
        covariance[free[a]! * p + free[b]!] = sum;
      }
    }
    // d theta/d y = T Q' W with Q = J T and W the whitening.
    for (let a = 0; a < k; a++) {
      const row = new Float64Array(m);
      for (let l = 0; l < k; l++) {
        for (let c = 0; c < k; c++) {
          const weight = transform[a * k + l]! * transform[c * k + l]!;
          for (let i = 0; i < m; i++) row[i] = row[i]! + weight * jacobian[c * m + i]!;
        }
      }
      whitening.applyTransposed(row);
      gain.set(row, free[a]! * m);
    }
  }
  const degreesOfFreedom = m - k;
  return {
    values,
    covariance,
    gain,
    residuals,
    chi2,
    degreesOfFreedom,
    p: degreesOfFreedom > 0 ? chiSquareSurvival(chi2, degreesOfFreedom) : 1,
    converged,
  };
}
