import { analyseJacobian } from "./covariance.ts";
import { LinearStage } from "./linearStage.ts";

export interface LinearSolution {
  readonly coefficients: Float64Array;
  /** (k x k, row-major), not scaled by the residuals; NaN for coefficients that the data do not determine. */
  readonly covariance: Float64Array;
  readonly residuals: Float64Array;
  readonly chi2: number;
  readonly rank: number;
  /** Condition number of the weighted columns brought to unit length. */
  readonly condition: number;
  readonly degreesOfFreedom: number;
  readonly undetermined: Uint8Array;
}

/**
 * What      min over c of sum_i w_i^2 (y_i - sum_k c_k Phi_ik)^2, always by orthogonal factorisation, refined.
 * Shapes    columns (rows x k, column-major); data, weights (rows). Residuals are (y - model) w.
 * Units     weights are 1/sigma of the data; a weight of 0 leaves the row out, whatever its data say.
 * Domain    finite numbers where the weight is not 0; dependent columns get the coefficient 0 and are flagged.
 * Accuracy  tests/reference/strd-linear.test.ts.
 * Source    See linearStage.ts.
 */
export function linearLeastSquares(
  columns: Float64Array,
  rows: number,
  k: number,
  data: Float64Array,
  weights: Float64Array,
): LinearSolution {
  let used = 0;
  for (let i = 0; i < rows; i++) if (weights[i] !== 0) used++;
  const phi = new Float64Array(used * k);
  const target = new Float64Array(used);
  let at = 0;
  for (let i = 0; i < rows; i++) {
    const w = weights[i]!;
    if (w === 0) continue;
    target[at] = data[i]! * w;
    for (let j = 0; j < k; j++) phi[j * used + at] = columns[j * rows + i]! * w;
    at++;
  }
  const coefficients = new Float64Array(k);
  const residual = new Float64Array(used);
  const stage = new LinearStage(used, k, used, true);
  stage.solve(phi, target, coefficients, residual);
  const chi2 = stage.refine(phi, target, coefficients, residual);
  const analysis = analyseJacobian([phi], [k], used, used, { residual });
  const residuals = new Float64Array(rows);
  at = 0;
  for (let i = 0; i < rows; i++) if (weights[i] !== 0) residuals[i] = residual[at++]!;
  return {
    coefficients,
    covariance: analysis.covariance,
    residuals,
    chi2,
    rank: analysis.rank,
    condition: analysis.condition,
    degreesOfFreedom: used - analysis.rank,
    undetermined: analysis.undetermined,
  };
}
