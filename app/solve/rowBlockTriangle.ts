import { ELIMINATE_ROWS as BLOCK, vectorKernels, type VectorKernels } from "./vectorKernels.ts";

/** Rows times columns^2 from which on the compiled loop is worth the way into its memory. */
const VECTOR_WORK = 20_000;

/**
 * What      Triangular factor of a tall matrix by rows: R with R'R = A'A, built by Householder reflections that fold
 *           one block of rows after another into the triangle. Q is never formed; a right-hand side travels as one
 *           more column, whose entries of R are then Q'b and the norm of what is left.
 * Shapes    A (rows x n) as groups of column-major columns; R (n x n, row-major, upper).
 * Units     R carries the unit of each column.
 * Domain    finite numbers; fewer rows than columns leave zero rows in R.
 * Accuracy  backward stable as Householder QR; independent of column scale. tests/app/solve/factor.test.ts.
 * Source    Lawson and Hanson, Solving Least Squares Problems (1974), chapter 27 (sequential accumulation);
 *           reflections as Golub and Van Loan, algorithm 5.1.1. The triangle's zeros are used, so the work is that of
 *           one QR, and every block (64 rows of 80 columns are 40 kB) stays in the cache.
 */
export class RowBlockTriangle {
  readonly n: number;
  readonly r: Float64Array;
  private readonly block: Float64Array;

  constructor(n: number) {
    this.n = n;
    this.r = new Float64Array(n * n);
    this.block = new Float64Array(BLOCK * n);
  }

  /** R of the given groups of columns, side by side. Group g has counts[g] columns with leading dimension lds[g]. */
  factor(
    groups: readonly Float64Array[],
    counts: readonly number[],
    lds: readonly number[],
    rows: number,
  ): void {
    const { n, r, block } = this;
    const kernels = rows * n * n < VECTOR_WORK ? null : vectorKernels();
    if (kernels !== null) {
      this.factorCompiled(kernels, groups, counts, lds, rows);
      return;
    }
    r.fill(0);
    for (let start = 0; start < rows; start += BLOCK) {
      const height = Math.min(BLOCK, rows - start);
      copyBlock(groups, counts, lds, start, height, height, block, 0);
      this.eliminate(height);
    }
  }

  private factorCompiled(
    kernels: VectorKernels,
    groups: readonly Float64Array[],
    counts: readonly number[],
    lds: readonly number[],
    rows: number,
  ): void {
    const { n, r } = this;
    const memory = kernels.room(n * n + n * BLOCK);
    memory.fill(0, 0, n * n);
    for (let start = 0; start < rows; start += BLOCK) {
      const height = Math.min(BLOCK, rows - start);
      const whole = Math.ceil(height / 2) * 2;
      copyBlock(groups, counts, lds, start, height, whole, memory, n * n);
      kernels.eliminate(0, 8 * n * n, n, 8 * whole);
    }
    r.set(memory.subarray(0, n * n));
  }

  private eliminate(height: number): void {
    const { n, r, block } = this;
    for (let j = 0; j < n; j++) {
      const v = j * BLOCK;
      let tail = 0;
      for (let i = 0; i < height; i++) tail += block[v + i]! * block[v + i]!;
      if (tail === 0) continue;
      const head = r[j * n + j]!;
      const norm = Math.sqrt(head * head + tail);
      const beta = head > 0 ? -norm : norm;
      const tau = (beta - head) / beta;
      const inverse = 1 / (head - beta);
      for (let i = 0; i < height; i++) block[v + i] = block[v + i]! * inverse;
      r[j * n + j] = beta;
      let c = j + 1;
      const row = j * n;
      for (; c + 3 < n; c += 4) {
        const b0 = c * BLOCK;
        const b1 = b0 + BLOCK;
        const b2 = b1 + BLOCK;
        const b3 = b2 + BLOCK;
        let s0 = r[row + c]!;
        let s1 = r[row + c + 1]!;
        let s2 = r[row + c + 2]!;
        let s3 = r[row + c + 3]!;
        for (let i = 0; i < height; i++) {
          const vi = block[v + i]!;
          s0 += vi * block[b0 + i]!;
          s1 += vi * block[b1 + i]!;
          s2 += vi * block[b2 + i]!;
          s3 += vi * block[b3 + i]!;
        }
        s0 *= tau;
        s1 *= tau;
        s2 *= tau;
        s3 *= tau;
        r[row + c] = r[row + c]! - s0;
        r[row + c + 1] = r[row + c + 1]! - s1;
        r[row + c + 2] = r[row + c + 2]! - s2;
        r[row + c + 3] = r[row + c + 3]! - s3;
        for (let i = 0; i < height; i++) {
          const vi = block[v + i]!;
          block[b0 + i] = block[b0 + i]! - s0 * vi;
          block[b1 + i] = block[b1 + i]! - s1 * vi;
          block[b2 + i] = block[b2 + i]! - s2 * vi;
          block[b3 + i] = block[b3 + i]! - s3 * vi;
        }
      }
      for (; c < n; c++) {
        const b0 = c * BLOCK;
        let s0 = r[row + c]!;
        for (let i = 0; i < height; i++) s0 += block[v + i]! * block[b0 + i]!;
        s0 *= tau;
        r[row + c] = r[row + c]! - s0;
        for (let i = 0; i < height; i++) block[b0 + i] = block[b0 + i]! - s0 * block[v + i]!;
      }
    }
  }
}

/** Rows from `start` on of all columns, one column after another, BLOCK apart; made up with zeros to `whole` rows. */
function copyBlock(
  groups: readonly Float64Array[],
  counts: readonly number[],
  lds: readonly number[],
  start: number,
  height: number,
  whole: number,
  out: Float64Array,
  offset: number,
): void {
  let at = offset;
  for (let g = 0; g < groups.length; g++) {
    const source = groups[g]!;
    const ld = lds[g]!;
    for (let j = 0; j < counts[g]!; j++) {
      const from = j * ld + start;
      for (let r = 0; r < height; r++) out[at + r] = source[from + r]!;
      for (let r = height; r < whole; r++) out[at + r] = 0;
      at += BLOCK;
    }
  }
}
