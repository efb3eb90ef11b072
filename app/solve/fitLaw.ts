import type { Watch } from "../base/index.ts";
import { levenbergMarquardt } from "ml-levenberg-marquardt";
import { choleskyFactor, forwardSubstitute } from "./cholesky.ts";
import { solveGeneral } from "./solveGeneral.ts";
import { chiSquareSurvival } from "./statistics.ts";
import type { GeneralProblem, Termination } from "./types.ts";

export interface LawProblem {
  /** y (n) */
  readonly data: Float64Array;
  /** V (n x n, row-major) of the data; takes precedence over `sigmas`. */
  readonly covariance?: Float64Array | undefined;
  /** one standard error of each datum (n) */
  readonly sigmas?: Float64Array | undefined;
  readonly parameters: number;
  model(values: Float64Array, out: Float64Array): void;
  /** n x p, column-major */
  jacobian(values: Float64Array, out: Float64Array): void;
}

export interface LawOptions {
  /** true where the parameter keeps its start (p) */
  readonly fixed?: readonly boolean[] | undefined;
  readonly lower?: Float64Array | undefined;
  readonly upper?: Float64Array | undefined;
  /** Iterations of the first search, which cannot stop by itself. Default 60. */
  readonly searchIterations?: number | undefined;
  readonly watch?: Watch | undefined;
}

export interface LawFit {
  readonly values: Float64Array;
  /** (p x p, row-major), not scaled by the residuals; 0 for fixed and bound-held, NaN for undetermined parameters. */
  readonly covariance: Float64Array;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  /** Probability of a larger chi square; null without a degree of freedom. */
  readonly p: number | null;
  /** y - model (n), in the unit of the data. */
  readonly residuals: Float64Array;
  /** L^-1 (y - model) (n), V = L L': independent, of unit variance if the law holds. */
  readonly whitened: Float64Array;
  readonly stationary: boolean;
  /** The first search had not arrived and the room's own solver finished. */
  readonly polished: boolean;
  readonly termination: Termination;
  readonly rank: number;
  readonly condition: number;
  /** -1 held by the lower bound, 1 by the upper, 0 otherwise (p); fixed parameters 0 */
  readonly activeBounds: Int8Array;
  readonly undetermined: Uint8Array;
}

/** Stationary when the linearised minimum is nearer than this, in standard errors, or the cosine is below 1e-9. */
const NEAR_ENOUGH = 1e-6;

/**
 * What      A law with few parameters fitted to correlated data: min (y - f)' V^-1 (y - f). Data and model are whitened
 *           by the Cholesky factor of V, parameters counted in their own standard errors (others held), fixed ones
 *           left out, derivatives analytic. The search is ml-levenberg-marquardt's; it has no test of convergence
 *           and may step uphill or return its start, so the better of its answer and the start is tested for
 *           stationarity and, where it fails, finished by solveGeneral.
 * Shapes    LawProblem; start (p).
 * Units     those of the problem.
 * Domain    V must be positive definite (throws otherwise); n may be as small as the number of parameters.
 * Accuracy  tests/app/solve/fitLaw.test.ts.
 * Source    Aitken, Proc. R. Soc. Edinburgh 55, 42 (1935), for generalised least squares.
 */
export function fitLaw(problem: LawProblem, start: Float64Array, options: LawOptions = {}): LawFit {
  const n = problem.data.length;
  const p = problem.parameters;
  const whiten = whitenerOf(problem, n);
  const free: number[] = [];
  for (let j = 0; j < p; j++) if (options.fixed?.[j] !== true) free.push(j);
  const q = free.length;
  const values = Float64Array.from(start);
  free.forEach((j) => {
    values[j] = Math.min(
      Math.max(values[j]!, options.lower?.[j] ?? -Infinity),
      options.upper?.[j] ?? Infinity,
    );
  });
  const origin = Float64Array.from(values);

  const full = Float64Array.from(values);
  const fullJacobian = new Float64Array(n * p);
  const data = Float64Array.from(problem.data);
  whiten(data, 0);
  const place = (theta: ArrayLike<number>): void => {
    for (let a = 0; a < q; a++) full[free[a]!] = theta[a]!;
  };
  const whitenedProblem: GeneralProblem = {
    rows: n,
    parameters: q,
    data,
    weights: new Float64Array(n).fill(1),
    model: (theta, out) => {
      place(theta);
      problem.model(full, out);
      whiten(out, 0);
    },
    jacobian: (theta, out) => {
      place(theta);
      problem.jacobian(full, fullJacobian);
      for (let a = 0; a < q; a++) {
        out.set(fullJacobian.subarray(free[a]! * n, (free[a]! + 1) * n), a * n);
        whiten(out, a * n);
      }
    },
  };
  const begin = Float64Array.from(free, (j) => origin[j]!);
  const bounds = {
    lower: Float64Array.from(free, (j) => options.lower?.[j] ?? -Infinity),
    upper: Float64Array.from(free, (j) => options.upper?.[j] ?? Infinity),
    watch: options.watch,
  };
  let from: Float64Array = begin;
  if (q > 0 && n >= 2) from = search(whitenedProblem, begin, bounds, options.searchIterations ?? 60);
  let solution = solveGeneral(whitenedProblem, from, { ...bounds, maxIterations: 0 });
  const arrived =
    solution.reached.gradient <= solution.tolerances.gradient ||
    solution.remaining <= NEAR_ENOUGH + 64 * 2 ** -52 * norm(data);
  let termination: Termination = solution.termination;
  let polished = false;
  if (termination === "iterationLimit" && arrived) {
    termination = "gradient";
  } else if (termination === "iterationLimit") {
    polished = true;
    solution = solveGeneral(whitenedProblem, from, bounds);
    termination = solution.termination;
  }

  const covariance = new Float64Array(p * p);
  const activeBounds = new Int8Array(p);
  const undetermined = new Uint8Array(p);
  free.forEach((j, a) => {
    values[j] = solution.theta[a]!;
    activeBounds[j] = solution.activeBounds[a]!;
    undetermined[j] = solution.undetermined[a]!;
    free.forEach((i, b) => (covariance[j * p + i] = solution.covariance[a * q + b]!));
  });
  const residuals = new Float64Array(n);
  problem.model(values, residuals);
  for (let i = 0; i < n; i++) residuals[i] = problem.data[i]! - residuals[i]!;
  const degreesOfFreedom = solution.degreesOfFreedom;
  return {
    values,
    covariance,
    chi2: solution.chi2,
    degreesOfFreedom,
    p: degreesOfFreedom > 0 ? chiSquareSurvival(solution.chi2, degreesOfFreedom) : null,
    residuals,
    whitened: solution.residuals,
    stationary: termination === "gradient" || termination === "step" || termination === "cost",
    polished,
    termination,
    rank: solution.rank,
    condition: solution.condition,
    activeBounds,
    undetermined,
  };
}

/** The better of the start and what the search returns from it. */
function search(
  problem: GeneralProblem,
  begin: Float64Array,
  bounds: { readonly lower: Float64Array; readonly upper: Float64Array },
  maxIterations: number,
): Float64Array {
  const { rows, parameters: q, data } = problem;
  const model = new Float64Array(rows);
  const jacobian = new Float64Array(rows * q);
  const theta = Float64Array.from(begin);
  const unit = new Float64Array(q);
  problem.jacobian(begin, jacobian);
  for (let a = 0; a < q; a++) {
    const length = norm(jacobian.subarray(a * rows, (a + 1) * rows));
    unit[a] = length > 0 && Number.isFinite(length) ? 1 / length : Math.abs(begin[a]!) || 1;
  }
  // u counts standard errors with the others held; rounding must not carry theta across a bound.
  const place = (u: ArrayLike<number>): void => {
    for (let a = 0; a < q; a++) {
      theta[a] = Math.min(Math.max(begin[a]! + unit[a]! * u[a]!, bounds.lower[a]!), bounds.upper[a]!);
    }
  };
  const costAt = (u: ArrayLike<number>): number => {
    place(u);
    problem.model(theta, model);
    let sum = 0;
    for (let i = 0; i < rows; i++) sum += (data[i]! - model[i]!) ** 2;
    return sum;
  };
  const zero = new Array<number>(q).fill(0);
  const limit = (bound: Float64Array): number[] =>
    Array.from(bound, (b, a) => Math.min(Math.max((b - begin[a]!) / unit[a]!, -1e15), 1e15));
  let found: ArrayLike<number>;
  try {
    found = levenbergMarquardt(
      { x: Array.from({ length: rows }, (_, i) => i), y: data },
      (u) => {
        place(u);
        problem.model(theta, model);
        const values = Float64Array.from(model);
        return (i) => values[i]!;
      },
      {
        initialValues: zero,
        minValues: limit(bounds.lower),
        maxValues: limit(bounds.upper),
        maxIterations,
        // Its only criterion is absolute: below this nothing is left to fit.
        errorTolerance: 1e-300,
        jacobianFunction: (u) => {
          place(u);
          problem.jacobian(theta, jacobian);
          const values = Float64Array.from(jacobian);
          return (i) => Array.from({ length: q }, (_, a) => values[a * rows + i]! * unit[a]!);
        },
      },
    ).parameterValues;
  } catch {
    // The search gives up by throwing where its matrix is singular; the start remains.
    return begin;
  }
  const start = costAt(zero);
  const end = costAt(found);
  if (!(end < start)) return begin;
  place(found);
  return theta;
}

/** x[from .. from+n) := L^-1 x, V = L L', or x / sigma. */
function whitenerOf(problem: LawProblem, n: number): (x: Float64Array, from: number) => void {
  const { covariance, sigmas } = problem;
  if (covariance !== undefined) {
    if (covariance.length !== n * n) throw new Error("the covariance of the data must be n x n");
    // Unit diagonal first, so that definiteness is judged apart from units.
    const scale = Float64Array.from({ length: n }, (_, i) => 1 / Math.sqrt(covariance[i * n + i]!));
    const correlation = covariance.map((v, at) => v * scale[Math.floor(at / n)]! * scale[at % n]!);
    const factor = choleskyFactor(correlation, n);
    if (factor === null) throw new Error("the covariance of the data is not positive definite");
    return (x, from) => {
      for (let i = 0; i < n; i++) x[from + i] = x[from + i]! * scale[i]!;
      forwardSubstitute(factor, n, x, from);
    };
  }
  if (sigmas?.length !== n) throw new Error("data need a covariance or one sigma each");
  if (!sigmas.every((s) => s > 0)) throw new Error("every sigma must be positive");
  return (x, from) => {
    for (let i = 0; i < n; i++) x[from + i] = x[from + i]! / sigmas[i]!;
  };
}

function norm(v: Float64Array): number {
  let sum = 0;
  for (const x of v) sum += x * x;
  return Math.sqrt(sum);
}
