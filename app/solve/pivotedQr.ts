/**
 * What      Householder QR in place of a small matrix, with column pivoting inside the columns [first, end) and the
 *           reflections carried through every column to the right; stops where the pivot says that the rest of
 *           those columns is dependent. Returns the rank found.
 * Shapes    a (rows x total, column-major with leading dimension `rows`); the factorisation begins at row `top`.
 *           permutation (total): entries of [first, end) are exchanged with the columns.
 * Units     columns should have comparable norms: rank is judged by |R_jj| <= tolerance |R_first|.
 * Domain    finite numbers. With `pivot` false columns stay in order and every column counts, dependent or not.
 * Accuracy  backward stable. tests/app/solve/factor.test.ts.
 * Source    Businger and Golub, Numer. Math. 7, 269 (1965). Column norms are recomputed, not downdated: the
 *           matrices are small, and the downdate loses digits just where rank is decided.
 */
export function pivotedQr(
  a: Float64Array,
  rows: number,
  total: number,
  top: number,
  first: number,
  end: number,
  permutation: Int32Array,
  tolerance: number,
  pivot = true,
): number {
  let rank = 0;
  let largest = 0;
  for (let j = first; j < end; j++) {
    const head = top + rank;
    if (head >= rows) break;
    if (pivot) {
      let best = -1;
      let bestNorm = -1;
      for (let c = j; c < end; c++) {
        let norm = 0;
        for (let i = head; i < rows; i++) norm += a[c * rows + i]! * a[c * rows + i]!;
        if (norm > bestNorm) {
          bestNorm = norm;
          best = c;
        }
      }
      const size = Math.sqrt(bestNorm);
      if (j === first) largest = size;
      if (!(size > tolerance * largest)) break;
      if (best !== j) {
        for (let i = 0; i < rows; i++) {
          const swap = a[j * rows + i]!;
          a[j * rows + i] = a[best * rows + i]!;
          a[best * rows + i] = swap;
        }
        const swap = permutation[j]!;
        permutation[j] = permutation[best]!;
        permutation[best] = swap;
      }
    }
    reflect(a, rows, total, head, j);
    rank++;
  }
  return rank;
}

/** One reflection that clears column j below row `head`, applied to all columns to its right. */
export function reflect(a: Float64Array, rows: number, total: number, head: number, j: number): void {
  const v = j * rows;
  let tail = 0;
  for (let i = head + 1; i < rows; i++) tail += a[v + i]! * a[v + i]!;
  if (tail === 0) return;
  const alpha = a[v + head]!;
  const norm = Math.sqrt(alpha * alpha + tail);
  const beta = alpha > 0 ? -norm : norm;
  const tau = (beta - alpha) / beta;
  const inverse = 1 / (alpha - beta);
  for (let i = head + 1; i < rows; i++) a[v + i] = a[v + i]! * inverse;
  a[v + head] = beta;
  for (let c = j + 1; c < total; c++) {
    const b = c * rows;
    let sum = a[b + head]!;
    for (let i = head + 1; i < rows; i++) sum += a[v + i]! * a[b + i]!;
    sum *= tau;
    a[b + head] = a[b + head]! - sum;
    for (let i = head + 1; i < rows; i++) a[b + i] = a[b + i]! - sum * a[v + i]!;
  }
  for (let i = head + 1; i < rows; i++) a[v + i] = 0;
}
