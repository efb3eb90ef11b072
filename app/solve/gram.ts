import { PRODUCT_ROWS, vectorKernels, type VectorKernels } from "./vectorKernels.ts";

/** Rows times products from which on the compiled loop is worth the way into its memory. */
const VECTOR_WORK = 20_000;

/** Rows handled at once: a pair of column tiles of this height stays in the first-level cache. */
const ROW_BLOCK = 256;

/**
 * What      Products of columns, C = A'B, and the symmetric case G = A'A.
 * Shapes    A (rows x na) and B (rows x nb), column-major with leading dimension `ld`; out (na x nb, row-major),
 *           overwritten. In the symmetric case both triangles are written.
 * Units     product of the units of A and B.
 * Domain    any; NaN and infinities pass through.
 * Accuracy  that of a plain dot product, rows eps |a||b|.
 * Source    The textbook product; columns are taken four by two and rows in blocks, so that six loads serve eight
 *           products and the data stay in the cache.
 */
export function crossProduct(
  a: Float64Array,
  na: number,
  b: Float64Array,
  nb: number,
  ld: number,
  rows: number,
  out: Float64Array,
): void {
  const kernels = rows * na * nb < VECTOR_WORK ? null : vectorKernels();
  if (kernels !== null) {
    productsCompiled(kernels, a, na, b, nb, ld, rows, out);
    return;
  }
  out.fill(0, 0, na * nb);
  for (let start = 0; start < rows; start += ROW_BLOCK) {
    const end = Math.min(rows, start + ROW_BLOCK);
    for (let i = 0; i < na; i += 4) {
      const tall = Math.min(4, na - i);
      for (let j = 0; j < nb; j += 2) addTile(a, i, tall, b, j, Math.min(2, nb - j), ld, start, end, out, nb);
    }
  }
}

export function gramMatrix(a: Float64Array, n: number, ld: number, rows: number, out: Float64Array): void {
  const kernels = rows * n * n < VECTOR_WORK ? null : vectorKernels();
  if (kernels === null) gramPlain(a, n, ld, rows, out);
  else productsCompiled(kernels, a, n, null, n, ld, rows, out);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) out[j * n + i] = out[i * n + j]!;
  }
}

/** The lower triangle of A'A. */
function gramPlain(a: Float64Array, n: number, ld: number, rows: number, out: Float64Array): void {
  out.fill(0, 0, n * n);
  for (let start = 0; start < rows; start += ROW_BLOCK) {
    const end = Math.min(rows, start + ROW_BLOCK);
    for (let i = 0; i < n; i += 4) {
      const tall = Math.min(4, n - i);
      // Tiles up to the diagonal; a tile that straddles it fills a few entries of the upper triangle, later mirrored.
      for (let j = 0; j < i + tall; j += 2)
        addTile(a, i, tall, a, j, Math.min(2, n - j), ld, start, end, out, n);
    }
  }
}

/** A'B, or (b null) the lower triangle of A'A, by the compiled loop: columns made up with zeros to whole tiles. */
function productsCompiled(
  kernels: VectorKernels,
  a: Float64Array,
  na: number,
  b: Float64Array | null,
  nb: number,
  ld: number,
  rows: number,
  out: Float64Array,
): void {
  const tall = Math.ceil(na / 4) * 4;
  const wide = b === null ? tall : Math.ceil(nb / 2) * 2;
  const second = tall * PRODUCT_ROWS;
  const result = second + (b === null ? 0 : wide * PRODUCT_ROWS);
  const memory = kernels.room(result + tall * wide);
  memory.fill(0, 0, result + tall * wide);
  for (let start = 0; start < rows; start += PRODUCT_ROWS) {
    const height = Math.min(PRODUCT_ROWS, rows - start);
    const whole = Math.ceil(height / 2) * 2;
    copyRows(a, na, ld, start, height, memory, 0);
    if (b !== null) copyRows(b, nb, ld, start, height, memory, second);
    const other = b === null ? 0 : 8 * second;
    kernels.products(0, tall, other, wide, 8 * whole, 8 * result, 8 * wide, b === null ? 1 : 0);
  }
  for (let i = 0; i < na; i++) {
    for (let j = 0; j < nb; j++) out[i * nb + j] = memory[result + i * wide + j]!;
  }
}

/** A block of rows, columns PRODUCT_ROWS apart; where the block is short by an odd number one zero follows. */
function copyRows(
  source: Float64Array,
  count: number,
  ld: number,
  start: number,
  height: number,
  out: Float64Array,
  offset: number,
): void {
  const odd = height % 2 === 1;
  for (let j = 0; j < count; j++) {
    const from = j * ld + start;
    const to = offset + j * PRODUCT_ROWS;
    for (let r = 0; r < height; r++) out[to + r] = source[from + r]!;
    if (odd) out[to + height] = 0;
  }
}

function addTile(
  a: Float64Array,
  i: number,
  tall: number,
  b: Float64Array,
  j: number,
  wide: number,
  ld: number,
  start: number,
  end: number,
  out: Float64Array,
  outWidth: number,
): void {
  if (tall === 4 && wide === 2) {
    const a0 = i * ld;
    const a1 = a0 + ld;
    const a2 = a1 + ld;
    const a3 = a2 + ld;
    const b0 = j * ld;
    const b1 = b0 + ld;
    let s00 = 0;
    let s01 = 0;
    let s10 = 0;
    let s11 = 0;
    let s20 = 0;
    let s21 = 0;
    let s30 = 0;
    let s31 = 0;
    for (let r = start; r < end; r++) {
      const y0 = b[b0 + r]!;
      const y1 = b[b1 + r]!;
      const x0 = a[a0 + r]!;
      const x1 = a[a1 + r]!;
      const x2 = a[a2 + r]!;
      const x3 = a[a3 + r]!;
      s00 += x0 * y0;
      s01 += x0 * y1;
      s10 += x1 * y0;
      s11 += x1 * y1;
      s20 += x2 * y0;
      s21 += x2 * y1;
      s30 += x3 * y0;
      s31 += x3 * y1;
    }
    let at = i * outWidth + j;
    out[at] = out[at]! + s00;
    out[at + 1] = out[at + 1]! + s01;
    at += outWidth;
    out[at] = out[at]! + s10;
    out[at + 1] = out[at + 1]! + s11;
    at += outWidth;
    out[at] = out[at]! + s20;
    out[at + 1] = out[at + 1]! + s21;
    at += outWidth;
    out[at] = out[at]! + s30;
    out[at + 1] = out[at + 1]! + s31;
    return;
  }
  for (let p = 0; p < tall; p++) {
    const column = (i + p) * ld;
    for (let q = 0; q < wide; q++) {
      const other = (j + q) * ld;
      let sum = 0;
      for (let r = start; r < end; r++) sum += a[column + r]! * b[other + r]!;
      const at = (i + p) * outWidth + j + q;
      out[at] = out[at]! + sum;
    }
  }
}

/** out_j := A_j' v for every column of A (rows x n, column-major, leading dimension `ld`), columns four at a time. */
export function transposedTimes(
  a: Float64Array,
  n: number,
  ld: number,
  rows: number,
  v: Float64Array,
  out: Float64Array,
): void {
  let j = 0;
  for (; j + 3 < n; j += 4) {
    const c0 = j * ld;
    const c1 = c0 + ld;
    const c2 = c1 + ld;
    const c3 = c2 + ld;
    let s0 = 0;
    let s1 = 0;
    let s2 = 0;
    let s3 = 0;
    for (let r = 0; r < rows; r++) {
      const vr = v[r]!;
      s0 += a[c0 + r]! * vr;
      s1 += a[c1 + r]! * vr;
      s2 += a[c2 + r]! * vr;
      s3 += a[c3 + r]! * vr;
    }
    out[j] = s0;
    out[j + 1] = s1;
    out[j + 2] = s2;
    out[j + 3] = s3;
  }
  for (; j < n; j++) {
    const column = j * ld;
    let even = 0;
    let odd = 0;
    let r = 0;
    for (; r + 1 < rows; r += 2) {
      even += a[column + r]! * v[r]!;
      odd += a[column + r + 1]! * v[r + 1]!;
    }
    if (r < rows) even += a[column + r]! * v[r]!;
    out[j] = even + odd;
  }
}

/** out := v - A x (rows), columns taken four at a time. */
export function residualOf(
  a: Float64Array,
  n: number,
  ld: number,
  rows: number,
  x: Float64Array,
  v: Float64Array,
  out: Float64Array,
): void {
  if (out !== v) for (let r = 0; r < rows; r++) out[r] = v[r]!;
  let j = 0;
  for (; j + 3 < n; j += 4) {
    const c0 = j * ld;
    const c1 = c0 + ld;
    const c2 = c1 + ld;
    const c3 = c2 + ld;
    const x0 = x[j]!;
    const x1 = x[j + 1]!;
    const x2 = x[j + 2]!;
    const x3 = x[j + 3]!;
    for (let r = 0; r < rows; r++) {
      out[r] = out[r]! - (x0 * a[c0 + r]! + x1 * a[c1 + r]! + (x2 * a[c2 + r]! + x3 * a[c3 + r]!));
    }
  }
  for (; j < n; j++) {
    const column = j * ld;
    const xj = x[j]!;
    for (let r = 0; r < rows; r++) out[r] = out[r]! - xj * a[column + r]!;
  }
}

export function sumOfSquares(v: Float64Array, rows: number): number {
  let even = 0;
  let odd = 0;
  let r = 0;
  for (; r + 1 < rows; r += 2) {
    even += v[r]! * v[r]!;
    odd += v[r + 1]! * v[r + 1]!;
  }
  if (r < rows) even += v[r]! * v[r]!;
  return even + odd;
}
