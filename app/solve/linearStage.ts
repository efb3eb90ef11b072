import { choleskyInto, backSubstitute, forwardSubstitute } from "./cholesky.ts";
import { accurateResidual } from "./accurateResidual.ts";
import { gramMatrix, residualOf, sumOfSquares, transposedTimes } from "./gram.ts";
import { pivotedQr } from "./pivotedQr.ts";
import { RowBlockTriangle } from "./rowBlockTriangle.ts";

/** Columns of unit length count as dependent when less than this part of one stands free of the others. */
export const RANK_TOLERANCE = 1e-13;

/**
 * Smallest squared sine between columns for which the normal equations are still used. Each correction by the true
 * residual then shrinks the error of the coefficients by eps k/1e-11, until it is that of an orthogonal solution.
 */
const NORMAL_LIMIT = 1e-11;
/** Corrections end where one moves less than this part of the data, and at the latest after MOST_TURNS. */
const SPENT = 1e-12;
const MOST_TURNS = 5;

/** Below this much work the orthogonal path costs nothing worth saving. */
const SMALL_WORK = 4_000;

/**
 * What      min over c of |t - Phi c|: coefficients and residual, for one matrix after another of the same shape.
 *           Normal equations of unit-length columns by Cholesky where the columns are well apart, else QR by row
 *           blocks with column pivoting and rank detection (dependent columns get the coefficient 0); both followed
 *           by a correction with the true residual (corrected semi-normal equations).
 * Shapes    Phi (rows x k, column-major, leading dimension ld), t (rows), c (k), residual (rows).
 * Units     weighted: Phi and t over sigma.
 * Domain    finite numbers; k may be 0.
 * Accuracy  tests/reference/strd-linear.test.ts lists the digits on certified problems.
 * Source    Bjorck, Numerical Methods for Least Squares Problems (1996), 6.6.5 (corrected semi-normal equations).
 */
export class LinearStage {
  readonly k: number;
  readonly ld: number;
  readonly rows: number;
  /** True after a solve that used the normal equations: `factor` and `scale` then hold their Cholesky factor. */
  normal = false;
  rank = 0;
  /** Smallest squared sine that the factor of the normal equations met. */
  pivot = 1;
  /** Cholesky factor of the Gram matrix of unit-length columns; column j of Phi times scale[j] has unit length. */
  readonly factor: Float64Array;
  readonly scale: Float64Array;
  private readonly orthogonalOnly: boolean;
  private readonly gram: Float64Array;
  private readonly work: Float64Array;
  private readonly correction: Float64Array;
  private readonly triangle: RowBlockTriangle;
  private readonly small: Float64Array;
  private readonly permutation: Int32Array;

  constructor(rows: number, k: number, ld: number, orthogonalOnly = false) {
    this.rows = rows;
    this.k = k;
    this.ld = ld;
    this.orthogonalOnly = orthogonalOnly || rows * k < SMALL_WORK;
    this.factor = new Float64Array(k * k);
    this.scale = new Float64Array(k);
    this.gram = new Float64Array(k * k);
    this.work = new Float64Array(k + 1);
    this.correction = new Float64Array(k);
    this.triangle = new RowBlockTriangle(k + 1);
    this.small = new Float64Array((k + 1) * (k + 1));
    this.permutation = new Int32Array(k + 1);
  }

  /** Writes c and the residual; returns the residual's sum of squares. */
  solve(phi: Float64Array, target: Float64Array, c: Float64Array, residual: Float64Array): number {
    const { k, ld, rows } = this;
    if (k === 0) {
      for (let i = 0; i < rows; i++) residual[i] = target[i]!;
      this.normal = true;
      return sumOfSquares(residual, rows);
    }
    this.normal = !this.orthogonalOnly && this.factorNormal(phi);
    c.fill(0, 0, k);
    if (this.normal) {
      this.rank = k;
      for (let i = 0; i < rows; i++) residual[i] = target[i]!;
      return this.correctAll(phi, target, c, residual);
    }
    this.factorOrthogonal(phi, target, c);
    residualOf(phi, k, ld, rows, c, target, residual);
    this.correct(phi, residual, c);
    residualOf(phi, k, ld, rows, c, target, residual);
    return sumOfSquares(residual, rows);
  }

  /**
   * Factor of the normal equations of another matrix, which stands for the one of the next `solveWith`; false where its
   * columns are too close to dependent.
   */
  factorOf(stand: LinearStage, phi: Float64Array): boolean {
    stand.normal = stand.k === 0 || stand.factorNormal(phi);
    this.normal = stand.normal;
    if (!this.normal) return false;
    this.rank = this.k;
    this.pivot = stand.pivot;
    this.factor.set(stand.factor);
    this.scale.set(stand.scale);
    return true;
  }

  /**
   * As `solve`, with the factor at hand in place of Phi's own and from the coefficients that c holds: corrections by the
   * true residual until they are spent.
   */
  solveWith(phi: Float64Array, target: Float64Array, c: Float64Array, residual: Float64Array): number {
    residualOf(phi, this.k, this.ld, this.rows, c, target, residual);
    return this.correctAll(phi, target, c, residual);
  }

  /** `residual` must be that of c. */
  private correctAll(
    phi: Float64Array,
    target: Float64Array,
    c: Float64Array,
    residual: Float64Array,
  ): number {
    const { k, ld, rows } = this;
    const enough = SPENT * SPENT * sumOfSquares(target, rows);
    for (let turn = 0; turn < MOST_TURNS; turn++) {
      const moved = this.correct(phi, residual, c);
      // The coefficients take the last correction too; the residual need not be summed again for it.
      if (moved <= enough) break;
      residualOf(phi, k, ld, rows, c, target, residual);
    }
    return sumOfSquares(residual, rows);
  }

  /**
   * Refines the last solution with residuals in twice the working precision, for as long as the corrections shrink.
   * Returns the sum of squares.
   */
  refine(phi: Float64Array, target: Float64Array, c: Float64Array, residual: Float64Array): number {
    const { k, ld, rows, correction } = this;
    const previous = new Float64Array(k);
    let last = Infinity;
    accurateResidual(phi, k, ld, rows, target, c, residual, correction);
    let cost = sumOfSquares(residual, rows);
    for (let turn = 0; turn < 6; turn++) {
      previous.set(c);
      this.applyCorrection(c);
      let size = 0;
      for (let j = 0; j < k; j++) size = Math.max(size, Math.abs(c[j]! - previous[j]!) / this.scale[j]!);
      accurateResidual(phi, k, ld, rows, target, c, residual, correction);
      const next = sumOfSquares(residual, rows);
      // Where the columns are too close to dependent the correction does not contract: take it back.
      if (!(size < 0.5 * last) || next > cost * (1 + 1e-12)) {
        c.set(previous);
        accurateResidual(phi, k, ld, rows, target, c, residual, correction);
        break;
      }
      last = size;
      cost = next;
    }
    return sumOfSquares(residual, rows);
  }

  /** c += (Phi'Phi)^-1 Phi' residual, by the factor at hand; what applyCorrection returns. */
  private correct(phi: Float64Array, residual: Float64Array, c: Float64Array): number {
    transposedTimes(phi, this.k, this.ld, this.rows, residual, this.correction);
    return this.applyCorrection(c);
  }

  /** Returns the square of the change in units of each column's length (0 where the factor is orthogonal). */
  private applyCorrection(c: Float64Array): number {
    const { k, scale, correction, work, permutation, rank, small } = this;
    if (this.normal) {
      for (let j = 0; j < k; j++) work[j] = correction[j]! * scale[j]!;
      forwardSubstitute(this.factor, k, work);
      backSubstitute(this.factor, k, work);
      let square = 0;
      for (let j = 0; j < k; j++) {
        c[j] = c[j]! + work[j]! * scale[j]!;
        square += work[j]! * work[j]!;
      }
      return square;
    }
    const rows = k + 1;
    for (let j = 0; j < rank; j++) {
      let sum = correction[permutation[j]!]! * scale[permutation[j]!]!;
      for (let i = 0; i < j; i++) sum -= small[j * rows + i]! * work[i]!;
      work[j] = sum / small[j * rows + j]!;
    }
    this.backSolve();
    for (let j = 0; j < rank; j++) {
      const at = permutation[j]!;
      c[at] = c[at]! + work[j]! * scale[at]!;
    }
    return 0;
  }

  /** work := R^-1 work for the leading `rank` columns. */
  private backSolve(): void {
    const { small, work, rank } = this;
    const rows = this.k + 1;
    for (let j = rank - 1; j >= 0; j--) {
      const value = work[j]! / small[j * rows + j]!;
      work[j] = value;
      for (let i = 0; i < j; i++) work[i] = work[i]! - small[j * rows + i]! * value;
    }
  }

  private factorNormal(phi: Float64Array): boolean {
    const { k, gram, scale } = this;
    gramMatrix(phi, k, this.ld, this.rows, gram);
    for (let j = 0; j < k; j++) {
      const diagonal = gram[j * k + j]!;
      if (!(diagonal > 0)) return false;
      scale[j] = 1 / Math.sqrt(diagonal);
    }
    for (let i = 0; i < k; i++) {
      for (let j = 0; j < k; j++) gram[i * k + j] = gram[i * k + j]! * scale[i]! * scale[j]!;
    }
    this.pivot = choleskyInto(gram, k, this.factor);
    return this.pivot > NORMAL_LIMIT;
  }

  private factorOrthogonal(phi: Float64Array, target: Float64Array, c: Float64Array): void {
    const { k, ld, rows, triangle, small, scale, permutation, work } = this;
    const n = k + 1;
    triangle.factor([phi, target], [k, 1], [ld, ld], rows);
    for (let j = 0; j < n; j++) {
      permutation[j] = j;
      let norm = 0;
      for (let i = 0; i < n; i++) {
        const value = triangle.r[i * n + j]!;
        small[j * n + i] = value;
        norm += value * value;
      }
      if (j === k) break;
      scale[j] = norm > 0 ? 1 / Math.sqrt(norm) : 1;
      for (let i = 0; i < n; i++) small[j * n + i] = small[j * n + i]! * scale[j]!;
    }
    this.rank = pivotedQr(small, n, n, 0, 0, k, permutation, RANK_TOLERANCE);
    for (let j = 0; j < this.rank; j++) work[j] = small[k * n + j]!;
    this.backSolve();
    for (let j = 0; j < this.rank; j++) {
      const at = permutation[j]!;
      c[at] = work[j]! * scale[at]!;
    }
  }
}
