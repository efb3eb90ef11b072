import type { Watch } from "../base/index.ts";

/**
 * Why a fit ended. `gradient`, `step` and `cost` are convergence; `iterationLimit` says that the allowance ran out,
 * or that no step shortens the residual although none of the three criteria holds.
 */
export type Termination = "gradient" | "step" | "cost" | "iterationLimit" | "cancelled" | "notFinite";

/**
 * model(theta, c) = offset(theta) + Phi(theta) c, the coefficients c being solved exactly for every theta.
 * `derivatives` is always called with the theta of the last call of `columns` (and `offset`), so that a problem may
 * keep intermediate results between the two.
 */
export interface SeparableProblem {
  /** m */
  readonly rows: number;
  /** p, nonlinear parameters theta */
  readonly nonlinear: number;
  /** k, linear coefficients c; may be 0 with an `offset` */
  readonly linear: number;
  /** y (m) */
  readonly data: Float64Array;
  /** 1/sigma (m); 0 leaves the row out: it counts in nothing, and its data and model may be NaN */
  readonly weights: Float64Array;
  /** Phi (m x k, column-major) */
  columns(theta: Float64Array, phi: Float64Array): void;
  /** D_j = d offset/d theta_j + sum_k c_k d Phi_k/d theta_j (m x p, column-major) */
  derivatives(theta: Float64Array, coefficients: Float64Array, out: Float64Array): void;
  /** The part of the model without a linear coefficient (m). */
  offset?(theta: Float64Array, out: Float64Array): void;
  /**
   * Columns and derivatives at one place, for one block of rows after another: what it returns writes those of the rows
   * first <= i < end, (end - first) x k and (end - first) x p, column-major. With it a pass over every row of a condensed
   * problem needs no matrix of all of them. For problems without `offset`.
   */
  blocks?(
    theta: Float64Array,
    coefficients: Float64Array,
  ): (first: number, end: number, phi: Float64Array, derivatives: Float64Array) => void;
  /** The same problem on few rows, good for parameters near theta; null where none is to be had. */
  condense?(theta: Float64Array): CondensedProblem | null;
}

/**
 * Few rows that stand for all of them (condense.ts): the solver goes most of its way on these, and they give the matrix
 * of its last steps; gradient, residuals and chi square of the answer are those of every row.
 */
export interface CondensedProblem {
  readonly problem: SeparableProblem;
  /** Weighted squares of the data that the rows cannot hold: chi square of the rows + lost = that of every row. */
  readonly lost: number;
  /** Whether the rows still stand for all of them at these parameters. */
  serves(theta: Float64Array): boolean;
}

export interface GeneralProblem {
  readonly rows: number;
  readonly parameters: number;
  readonly data: Float64Array;
  /** 1/sigma; 0 leaves the row out */
  readonly weights: Float64Array;
  model(theta: Float64Array, out: Float64Array): void;
  /** m x p, column-major; called with the theta of the last call of `model` */
  jacobian(theta: Float64Array, out: Float64Array): void;
}

export interface Tolerances {
  readonly gradient: number;
  readonly step: number;
  readonly cost: number;
}

export interface SolveOptions {
  /** Bounds (p); equal bounds hold a parameter. Default none. */
  readonly lower?: Float64Array | undefined;
  readonly upper?: Float64Array | undefined;
  /**
   * The change of each theta that counts as one (p), for the length of steps. Default: More's scaling by the largest
   * length that the parameter's projected derivative has had.
   */
  readonly scale?: Float64Array | undefined;
  /** Accepted steps; trials that are refused are allowed ten times as many. Default 200. */
  readonly maxIterations?: number | undefined;
  /**
   * Converged when |r|^2 falls, and is promised to fall, by no more than this part of itself. Default 1e-13.
   * A fall below the rounding error of |r|^2 counts as none.
   */
  readonly costTolerance?: number | undefined;
  /** Converged when no free derivative makes a cosine with the residual above this. Default 1e-9. */
  readonly gradientTolerance?: number | undefined;
  /** Converged when |S delta| <= this times |S theta|, S the scaling. Default 1e-12. */
  readonly stepTolerance?: number | undefined;
  /** Asked at every trial whether to stop; told of every iteration as a part of `maxIterations`. */
  readonly watch?: Watch | undefined;
  /** The matrix that steers the step takes every stride-th row only; gradient and covariance take all. Default 1. */
  readonly stride?: number | undefined;
  /**
   * `exact`: from every row, by orthogonal factors, or from condensed rows that were tested against every row. `condensed`:
   * where the problem has condensed rows the whole answer is theirs, without a condition number, for fits that only prepare
   * the next one. Default `exact`.
   */
  readonly answer?: "exact" | "condensed" | undefined;
  /** `auto` uses normal equations where they are safe; the others are for tests. Default `auto`. */
  readonly steering?: "auto" | "normal" | "orthogonal" | undefined;
}

export interface SeparableSolution {
  readonly theta: Float64Array;
  readonly coefficients: Float64Array;
  /** model at every row, those left out included */
  readonly fitted: Float64Array;
  /** (y - model) weight; 0 at rows left out */
  readonly residuals: Float64Array;
  readonly chi2: number;
  /** rows with weight - rank; parameters at an active bound are held and do not count */
  readonly degreesOfFreedom: number;
  readonly termination: Termination;
  readonly converged: boolean;
  /** accepted steps and, apart, model evaluations */
  readonly iterations: number;
  readonly evaluations: number;
  /** the value that each criterion had last, Infinity where it was never reached, beside its tolerance */
  readonly reached: Tolerances;
  readonly tolerances: Tolerances;
  /** distance of the linearised minimum from here, in standard errors of all parameters together */
  readonly remaining: number;
  /** of the free [D | Phi], unit-length weighted columns */
  readonly rank: number;
  readonly condition: number;
  /** -1 held by the lower bound, 1 by the upper, 0 free (p) */
  readonly activeBounds: Int8Array;
  /** 1 where the data do not determine the parameter (p + k, theta first) */
  readonly undetermined: Uint8Array;
  /**
   * (p+k) x (p+k), row-major, theta first, not scaled by the residuals. Parameters at an active bound have variance
   * 0 and no covariance; undetermined ones NaN. All NaN where the fit ended before derivatives could be had.
   */
  readonly covariance: Float64Array;
}
