import { forwardSubstitute } from "./cholesky.ts";
import type { Steering } from "./dampedStep.ts";
import { weigh } from "./gather.ts";
import { LinearStage } from "./linearStage.ts";
import { SteeringBuilder } from "./steering.ts";
import type { SeparableProblem } from "./types.ts";

/** A pivot of the triangle below this part of its column cannot carry the gradient of every row back to a right side. */
const LEAST_PIVOT = 1e-12;

/**
 * What      The condensed rows beside the full ones in a search: their matrices, kept at the same theta, give the factor of
 *           the linear coefficients and the matrix that steers the step; residual and gradient are those of every row.
 * Shapes    Phi (rows x k), D (rows x p) of the condensed problem, weighted, column-major.
 * Accuracy  that of the condensed rows (condense.ts); what the matrix loses costs iterations, not digits.
 */
export class Companion {
  readonly phi: Float64Array;
  readonly derivative: Float64Array;
  readonly rows: number;
  readonly builder: SteeringBuilder;
  private readonly problem: SeparableProblem;
  private readonly stage: LinearStage;
  private readonly weight: Float64Array;
  private readonly none: Float64Array;

  constructor(problem: SeparableProblem) {
    const { rows, nonlinear: p, linear: k } = problem;
    this.problem = problem;
    this.rows = rows;
    this.weight = problem.weights;
    this.phi = new Float64Array(rows * k);
    this.derivative = new Float64Array(rows * p);
    this.none = new Float64Array(rows);
    this.stage = new LinearStage(rows, k, rows);
    this.builder = new SteeringBuilder(rows, p, k, "auto", 1);
  }

  /** Columns at theta, and their factor into `stage`; false where either cannot be had. */
  takeColumns(theta: Float64Array, stage: LinearStage): boolean {
    const { problem, weight, phi } = this;
    if (problem.linear > 0) problem.columns(theta, phi);
    return weigh(phi, problem.linear, weight) && stage.factorOf(this.stage, phi);
  }

  /** At the theta of the last `takeColumns` that was accepted. */
  takeDerivatives(theta: Float64Array, coefficients: Float64Array): boolean {
    const { problem, weight, derivative } = this;
    problem.derivatives(theta, coefficients, derivative);
    return weigh(derivative, problem.nonlinear, weight);
  }

  /** The matrix of the condensed rows under the gradient of every row; null where the two do not go together. */
  steer(gradient: Float64Array): Steering | null {
    const { problem, builder, phi, derivative, none } = this;
    const p = problem.nonlinear;
    const steering = builder.build(this.stage, phi, derivative, none);
    steering.gradient.set(gradient);
    if (!steering.orthogonal) return steering;
    const lower = new Float64Array(p * p);
    for (let i = 0; i < p; i++) {
      for (let j = i; j < p; j++) lower[j * p + i] = steering.matrix[i * p + j]!;
      if (!(Math.abs(lower[i * p + i]!) > LEAST_PIVOT * steering.lengths[i]!)) return null;
    }
    steering.right.set(gradient);
    forwardSubstitute(lower, p, steering.right);
    return steering;
  }
}
