import { sumOfSquares } from "./gram.ts";

/** Directions that are compared: those that the data determine worst, where condensed rows would err most. */
const COUNT = 3;
const TURNS = 4;
/** A variance of the condensed rows may differ from that of every row by this part. */
const AGREEMENT = 1e-8;

/** Some directions of the parameters, one after another: n numbers each. */
export interface Directions {
  readonly count: number;
  readonly n: number;
  readonly vectors: Float64Array;
}

/**
 * What      The directions of the parameters with the largest variances, in units of standard errors (the eigenvectors of the
 *           correlation matrix with the largest values), by a few turns of the power method, each direction orthogonal to
 *           those before. Two Jacobians that differ do so most in |J v|^2 along these.
 * Shapes    covariance (n x n, row-major); a parameter without variance takes no part.
 * Units     vectors in those of the parameters.
 * Domain    numbers that are not finite give vectors that agree with nothing.
 * Source    Golub and Van Loan, Matrix Computations, 4th ed. (2013), 8.2 (power method, orthogonal iteration).
 */
export function weakDirections(covariance: Float64Array, n: number): Directions {
  const sigma = Float64Array.from({ length: n }, (_, i) => Math.sqrt(covariance[i * n + i]!));
  const correlation = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++)
      if (sigma[i]! > 0 && sigma[j]! > 0)
        correlation[i * n + j] = covariance[i * n + j]! / (sigma[i]! * sigma[j]!);
  const count = Math.min(COUNT, n);
  const unit = new Float64Array(count * n);
  const vectors = new Float64Array(count * n);
  for (let d = 0; d < count; d++) {
    const v = unit.subarray(d * n, (d + 1) * n);
    const next = vectors.subarray(d * n, (d + 1) * n);
    for (let i = 0; i < n; i++) v[i] = Math.cos((d + 1) * (i + 0.5));
    for (let turn = 0; turn < TURNS; turn++) {
      multiply(correlation, n, v, next);
      for (let e = 0; e < d; e++) {
        let part = 0;
        for (let i = 0; i < n; i++) part += unit[e * n + i]! * next[i]!;
        for (let i = 0; i < n; i++) next[i] = next[i]! - part * unit[e * n + i]!;
      }
      let square = 0;
      for (let i = 0; i < n; i++) square += next[i]! * next[i]!;
      for (let i = 0; i < n; i++) v[i] = next[i]! / Math.sqrt(square);
    }
    // In units of the covariance: C v = lambda v means the direction C v of the parameters, of length |J C v|.
    multiply(correlation, n, v, next);
    for (let i = 0; i < n; i++) next[i] = next[i]! * sigma[i]!;
  }
  return { count, n, vectors };
}

/** Whether |J v|^2 of all directions are the same in two Jacobians, to the part of a variance that counts. */
export function agree(squares: Float64Array, others: Float64Array): boolean {
  return squares.every((square, d) => Math.abs(square - others[d]!) <= AGREEMENT * others[d]!);
}

function multiply(a: Float64Array, n: number, v: Float64Array, out: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += a[i * n + j]! * v[j]!;
    out[i] = sum;
  }
}

/** A block of rows of some columns: columns of `a` are `ld` apart, the rows `from` and on are meant. */
export interface ColumnBlock {
  readonly a: Float64Array;
  readonly ld: number;
  readonly from: number;
  readonly rows: number;
  readonly columns: number;
}

/** images_d += sum over columns j of v_d[place + j] A_j; images (rows x count, column-major). */
export function addImages(
  { a, ld, from, rows, columns }: ColumnBlock,
  place: number,
  { n, count, vectors }: Directions,
  images: Float64Array,
): void {
  let j = 0;
  if (count === 3) {
    for (; j + 3 < columns; j += 4) {
      const c0 = j * ld + from;
      const c1 = c0 + ld;
      const c2 = c1 + ld;
      const c3 = c2 + ld;
      const at = place + j;
      const u0 = vectors[at]!;
      const u1 = vectors[at + 1]!;
      const u2 = vectors[at + 2]!;
      const u3 = vectors[at + 3]!;
      const v0 = vectors[n + at]!;
      const v1 = vectors[n + at + 1]!;
      const v2 = vectors[n + at + 2]!;
      const v3 = vectors[n + at + 3]!;
      const w0 = vectors[2 * n + at]!;
      const w1 = vectors[2 * n + at + 1]!;
      const w2 = vectors[2 * n + at + 2]!;
      const w3 = vectors[2 * n + at + 3]!;
      for (let r = 0; r < rows; r++) {
        const x0 = a[c0 + r]!;
        const x1 = a[c1 + r]!;
        const x2 = a[c2 + r]!;
        const x3 = a[c3 + r]!;
        images[r] = images[r]! + (u0 * x0 + u1 * x1 + (u2 * x2 + u3 * x3));
        images[rows + r] = images[rows + r]! + (v0 * x0 + v1 * x1 + (v2 * x2 + v3 * x3));
        images[2 * rows + r] = images[2 * rows + r]! + (w0 * x0 + w1 * x1 + (w2 * x2 + w3 * x3));
      }
    }
  }
  for (; j < columns; j++) {
    for (let d = 0; d < count; d++) {
      const v = vectors[d * n + place + j]!;
      for (let r = 0; r < rows; r++) images[d * rows + r] = images[d * rows + r]! + v * a[j * ld + from + r]!;
    }
  }
}

const BLOCK = 256;

/** |J v|^2 of columns in groups (rows x counts[g]), for each direction; by blocks of rows, so that the matrix is read once. */
export function imageSquares(
  groups: readonly Float64Array[],
  counts: readonly number[],
  rows: number,
  directions: Directions,
): Float64Array {
  const { count } = directions;
  const squares = new Float64Array(count);
  const images = new Float64Array(BLOCK * count);
  for (let from = 0; from < rows; from += BLOCK) {
    const height = Math.min(BLOCK, rows - from);
    images.fill(0);
    let place = 0;
    groups.forEach((a, g) => {
      addImages({ a, ld: rows, from, rows: height, columns: counts[g]! }, place, directions, images);
      place += counts[g]!;
    });
    addSquares(images, height, squares);
  }
  return squares;
}

/** squares_d += |images_d|^2 */
export function addSquares(images: Float64Array, rows: number, squares: Float64Array): void {
  for (let d = 0; d < squares.length; d++)
    squares[d] = squares[d]! + sumOfSquares(images.subarray(d * rows, (d + 1) * rows), rows);
}
