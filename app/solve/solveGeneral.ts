import { solveSeparable } from "./solveSeparable.ts";
import type { GeneralProblem, SeparableSolution, SolveOptions } from "./types.ts";

/**
 * What      Nonlinear least squares without linear coefficients, min over theta of |W (y - model(theta))|^2: the
 *           separable loop with no columns, the whole model being its offset.
 * Shapes    GeneralProblem in types.ts. Everything else as solveSeparable.ts says.
 */
export function solveGeneral(
  problem: GeneralProblem,
  start: Float64Array,
  options: SolveOptions = {},
): SeparableSolution {
  return solveSeparable(
    {
      rows: problem.rows,
      nonlinear: problem.parameters,
      linear: 0,
      data: problem.data,
      weights: problem.weights,
      columns: () => undefined,
      offset: (theta, out) => {
        problem.model(theta, out);
      },
      derivatives: (theta, _none, out) => {
        problem.jacobian(theta, out);
      },
    },
    start,
    options,
  );
}
