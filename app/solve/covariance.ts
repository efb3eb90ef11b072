import { conditionOfTriangle, invertTriangle } from "./invertTriangle.ts";
import { RANK_TOLERANCE } from "./linearStage.ts";
import { pivotedQr } from "./pivotedQr.ts";
import { RowBlockTriangle } from "./rowBlockTriangle.ts";

export interface JacobianAnalysis {
  /** (n x n, row-major) (J'J)^-1; rows and columns of undetermined parameters are NaN. */
  readonly covariance: Float64Array;
  readonly rank: number;
  /** Largest over smallest singular value of the unit-length columns; Infinity where rank < n, NaN where not wanted. */
  readonly condition: number;
  /** 1 where the data do not determine the parameter, whatever the others are. */
  readonly undetermined: Uint8Array;
  /** |Q'r|: how far the linearised minimum still is, in standard errors (all parameters together). */
  readonly remaining: number;
}

/** A parameter takes part in the null space when this much of it, in units of a column's length, does. */
const NULL_PART = 1e-6;

/**
 * What      Covariance of least squares at a solution, (J'J)^-1 = R^-1 R^-T, from the QR of the weighted columns with
 *           every row; rank by column pivoting; parameters in the null space are told apart from those that the data
 *           still determine.
 * Shapes    columns as groups (rows x counts[g], column-major, leading dimension ld); for `remaining` the residual (rows),
 *           or, where that belongs to other rows, its product with the columns, J'r (n).
 * Units     covariance in products of the parameters' units; it assumes that the weights are 1/sigma and that the
 *           model is linear over one standard error. It is not scaled by the residuals.
 * Domain    finite numbers; zero columns are undetermined.
 * Accuracy  tests/reference/strd.test.ts lists the digits of certified standard deviations.
 * Source    Golub and Van Loan, Matrix Computations, 4th ed., 5.3 and 5.5.
 */
export function analyseJacobian(
  groups: readonly Float64Array[],
  counts: readonly number[],
  ld: number,
  rows: number,
  right: { readonly residual: Float64Array } | { readonly gradient: Float64Array },
  wantCondition = true,
): JacobianAnalysis {
  let n = 0;
  for (const count of counts) n += count;
  const covariance = new Float64Array(n * n);
  const undetermined = new Uint8Array(n);
  if (n === 0) return { covariance, rank: 0, condition: 1, undetermined, remaining: 0 };
  const size = n + 1;
  const triangle = new RowBlockTriangle(size);
  const residual = "residual" in right ? right.residual : new Float64Array(rows);
  triangle.factor([...groups, residual], [...counts, 1], [...counts.map(() => ld), ld], rows);
  const scale = new Float64Array(n);
  const small = new Float64Array(size * size);
  const permutation = new Int32Array(size);
  for (let j = 0; j < size; j++) {
    permutation[j] = j;
    let norm = 0;
    for (let i = 0; i < size; i++) norm += triangle.r[i * size + j]! ** 2;
    const factor = j === n ? 1 : norm > 0 ? 1 / Math.sqrt(norm) : 1;
    if (j < n) scale[j] = factor;
    for (let i = 0; i < size; i++) {
      small[j * size + i] = triangle.r[i * size + j]! * factor;
    }
  }
  const rank = pivotedQr(small, size, size, 0, 0, n, permutation, RANK_TOLERANCE);
  let remaining = 0;
  const image = new Float64Array(rank);
  for (let j = 0; j < rank; j++) {
    image[j] = small[n * size + j]!;
    if ("gradient" in right) {
      let sum = right.gradient[permutation[j]!]! * scale[permutation[j]!]!;
      for (let i = 0; i < j; i++) sum -= small[j * size + i]! * image[i]!;
      image[j] = sum / small[j * size + j]!;
    }
    remaining += image[j]! ** 2;
  }

  // Columns of R^-1 (rank x rank), packed by column.
  const inverse = invertTriangle(small, size, rank);
  let condition = NaN;
  if (wantCondition) condition = rank === n ? conditionOfTriangle(small, size, inverse, n) : Infinity;
  for (let a = 0; a < rank; a++) {
    const i = permutation[a]!;
    for (let b = 0; b <= a; b++) {
      const j = permutation[b]!;
      let sum = 0;
      for (let l = a; l < rank; l++) sum += inverse[l * rank + a]! * inverse[l * rank + b]!;
      sum *= scale[i]! * scale[j]!;
      covariance[i * n + j] = sum;
      covariance[j * n + i] = sum;
    }
  }
  // The null space is spanned by (-R11^-1 R12, I); a basic parameter with no part in it is still determined.
  for (let d = rank; d < n; d++) {
    undetermined[permutation[d]!] = 1;
    for (let a = 0; a < rank; a++) {
      let part = 0;
      for (let l = a; l < rank; l++) part += inverse[l * rank + a]! * small[d * size + l]!;
      if (Math.abs(part) > NULL_PART) undetermined[permutation[a]!] = 1;
    }
  }
  for (let i = 0; i < n; i++) {
    if (undetermined[i] === 0) continue;
    for (let j = 0; j < n; j++) {
      covariance[i * n + j] = NaN;
      covariance[j * n + i] = NaN;
    }
  }
  return { covariance, rank, condition, undetermined, remaining: Math.sqrt(remaining) };
}
