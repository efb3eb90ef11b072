import { choleskyInto, forwardSubstitute } from "./cholesky.ts";
import type { Steering } from "./dampedStep.ts";
import { crossProduct, gramMatrix, transposedTimes } from "./gram.ts";
import { RANK_TOLERANCE } from "./linearStage.ts";
import type { LinearStage } from "./linearStage.ts";
import { pivotedQr } from "./pivotedQr.ts";
import { RowBlockTriangle } from "./rowBlockTriangle.ts";

/** Squared sine below which a projected derivative, or a pivot of J'J, is too small to trust to normal equations. */
const NORMAL_LIMIT = 1e-10;

/** Error of the factor of Phi'Phi in units of its smallest pivot, with a margin. */
const FACTOR_ERROR = 64 * 2 ** -52;

/** rows x columns^2 below which the orthogonal path costs nothing worth saving. */
const SMALL_WORK = 100_000;

/**
 * What      The matrix that steers the step: J'J = D'D - D'Phi (Phi'Phi)^-1 Phi'D (a Schur complement of blocked normal
 *           equations), or, where columns are close to dependent, the triangle R of J = P D from a QR by row blocks.
 * Shapes    Phi (m x k), D (m x p), column-major, weighted; r (m); results (p x p), (p).
 * Units     weighted.
 * Domain    finite numbers. With a stride above one the matrix comes from every stride-th row, multiplied up.
 * Accuracy  The gradient D'r always takes every row; what the matrix loses costs iterations, not digits.
 * Source    Kaufman, BIT 15, 49 (1975); Bjorck, Numerical Methods for Least Squares Problems (1996), 9.4.
 */
export class SteeringBuilder {
  private readonly m: number;
  private readonly p: number;
  private readonly k: number;
  private stride: number;
  private mode: "auto" | "normal" | "orthogonal";
  private readonly steering: {
    p: number;
    orthogonal: boolean;
    matrix: Float64Array;
    right: Float64Array;
    gradient: Float64Array;
    lengths: Float64Array;
  };
  /** |J_j| and |D_j| */
  readonly projected: Float64Array;
  readonly plain: Float64Array;
  private readonly cross: Float64Array;
  private readonly scaled: Float64Array;
  private readonly factor: Float64Array;
  private readonly thinPhi: Float64Array;
  private readonly thinDerivative: Float64Array;
  private readonly thinGram: Float64Array;
  private readonly thinFactor: Float64Array;
  private readonly thinScale: Float64Array;
  private triangle: RowBlockTriangle | null = null;
  private small: Float64Array | null = null;
  private readonly permutation: Int32Array;

  constructor(m: number, p: number, k: number, mode: "auto" | "normal" | "orthogonal", stride: number) {
    this.m = m;
    this.p = p;
    this.k = k;
    // A thinned matrix must still have many more rows than columns.
    this.stride = Math.max(1, Math.min(Math.floor(stride), Math.floor(m / (4 * (p + k + 1)))));
    this.mode = mode === "auto" && m * (p + k) ** 2 < SMALL_WORK ? "orthogonal" : mode;
    this.steering = {
      p,
      orthogonal: false,
      matrix: new Float64Array(p * p),
      right: new Float64Array(p),
      gradient: new Float64Array(p),
      lengths: new Float64Array(p),
    };
    this.projected = this.steering.lengths;
    this.plain = new Float64Array(p);
    this.cross = new Float64Array(p * k);
    this.scaled = new Float64Array(p * p);
    this.factor = new Float64Array(p * p);
    const thin = this.stride > 1 ? Math.ceil(m / this.stride) : 0;
    this.thinPhi = new Float64Array(thin * k);
    this.thinDerivative = new Float64Array(thin * p);
    this.thinGram = new Float64Array(thin > 0 ? k * k : 0);
    this.thinFactor = new Float64Array(thin > 0 ? k * k : 0);
    this.thinScale = new Float64Array(k);
    this.permutation = new Int32Array(p + k + 1);
  }

  get thinned(): boolean {
    return this.stride > 1;
  }

  useEveryRow(): void {
    this.stride = 1;
  }

  /** `stage` must hold the factor of this very Phi. */
  build(stage: LinearStage, phi: Float64Array, derivative: Float64Array, residual: Float64Array): Steering {
    const { m, p, steering } = this;
    transposedTimes(derivative, p, m, m, residual, steering.gradient);
    if (p === 0) return steering;
    if (this.stride > 1 && this.mode !== "orthogonal") {
      if (this.buildThinned(phi, derivative)) return steering;
      this.useEveryRow();
    }
    if (this.mode !== "orthogonal") {
      const sound =
        stage.normal && this.buildNormal(derivative, phi, m, stage.factor, stage.scale, 1, stage.pivot);
      if (sound) return steering;
      // Once too close to dependent, mostly so again: do not pay for both.
      this.mode = "orthogonal";
    }
    this.buildOrthogonal(phi, derivative, residual);
    return steering;
  }

  private buildThinned(phi: Float64Array, derivative: Float64Array): boolean {
    const { m, p, k, stride, thinPhi, thinDerivative, thinGram, thinScale } = this;
    const rows = Math.ceil(m / stride);
    for (let j = 0; j < k; j++) {
      for (let r = 0, from = j * m; r < rows; r++, from += stride) thinPhi[j * rows + r] = phi[from]!;
    }
    for (let j = 0; j < p; j++) {
      for (let r = 0, from = j * m; r < rows; r++, from += stride) {
        thinDerivative[j * rows + r] = derivative[from]!;
      }
    }
    gramMatrix(thinPhi, k, rows, rows, thinGram);
    for (let j = 0; j < k; j++) {
      const diagonal = thinGram[j * k + j]!;
      if (!(diagonal > 0)) return false;
      thinScale[j] = 1 / Math.sqrt(diagonal);
    }
    for (let i = 0; i < k; i++) {
      for (let j = 0; j < k; j++) thinGram[i * k + j] = thinGram[i * k + j]! * thinScale[i]! * thinScale[j]!;
    }
    const pivot = k > 0 ? choleskyInto(thinGram, k, this.thinFactor) : 1;
    if (!(pivot > NORMAL_LIMIT)) return false;
    return this.buildNormal(thinDerivative, thinPhi, rows, this.thinFactor, thinScale, m / rows, pivot);
  }

  private buildNormal(
    derivative: Float64Array,
    phi: Float64Array,
    rows: number,
    factor: Float64Array,
    scale: Float64Array,
    multiply: number,
    pivot: number,
  ): boolean {
    const { p, k, cross, steering, projected, plain, scaled } = this;
    const a = steering.matrix;
    // What the factor of Phi may leave wrong in the difference.
    const least = Math.max(NORMAL_LIMIT, (FACTOR_ERROR * k) / pivot);
    gramMatrix(derivative, p, rows, rows, a);
    if (k > 0) crossProduct(derivative, p, phi, k, rows, rows, cross);
    for (let i = 0; i < p; i++) {
      for (let j = 0; j < k; j++) cross[i * k + j] = cross[i * k + j]! * scale[j]!;
      forwardSubstitute(factor, k, cross, i * k);
    }
    for (let i = 0; i < p; i++) {
      plain[i] = Math.sqrt(a[i * p + i]! * multiply);
      for (let j = 0; j <= i; j++) {
        let sum = a[i * p + j]!;
        for (let l = 0; l < k; l++) sum -= cross[i * k + l]! * cross[j * k + l]!;
        if (i === j && !(sum > least * a[i * p + i]!)) return false;
        a[i * p + j] = sum * multiply;
        a[j * p + i] = sum * multiply;
      }
    }
    for (let i = 0; i < p; i++) projected[i] = Math.sqrt(a[i * p + i]!);
    for (let i = 0; i < p; i++) {
      for (let j = 0; j < p; j++) scaled[i * p + j] = a[i * p + j]! / (projected[i]! * projected[j]!);
    }
    steering.orthogonal = false;
    return this.mode === "normal" || choleskyInto(scaled, p, this.factor) > NORMAL_LIMIT;
  }

  private buildOrthogonal(phi: Float64Array, derivative: Float64Array, residual: Float64Array): void {
    const { m, p, k, steering, permutation, projected, plain } = this;
    const n = k + p + 1;
    this.triangle ??= new RowBlockTriangle(n);
    this.small ??= new Float64Array(n * n);
    const { triangle, small } = this;
    triangle.factor([phi, derivative, residual], [k, p, 1], [m, m, m], m);
    for (let j = 0; j < n; j++) {
      permutation[j] = j;
      let norm = 0;
      for (let i = 0; i < n; i++) {
        const value = triangle.r[i * n + j]!;
        small[j * n + i] = value;
        norm += value * value;
      }
      if (j < k && norm > 0) {
        const unit = 1 / Math.sqrt(norm);
        for (let i = 0; i < n; i++) small[j * n + i] = small[j * n + i]! * unit;
      } else if (j >= k && j < k + p) {
        plain[j - k] = Math.sqrt(norm);
      }
    }
    const rank = pivotedQr(small, n, n, 0, 0, k, permutation, RANK_TOLERANCE);
    pivotedQr(small, n, n, rank, k, k + p, permutation, 0, false);
    for (let j = 0; j < p; j++) {
      let square = 0;
      for (let i = 0; i < p; i++) {
        const value = i <= j ? small[(k + j) * n + rank + i]! : 0;
        steering.matrix[i * p + j] = value;
        square += value * value;
      }
      projected[j] = Math.sqrt(square);
      steering.right[j] = small[(k + p) * n + rank + j]!;
    }
    steering.orthogonal = true;
  }
}
