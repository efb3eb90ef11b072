/**
 * What      Cholesky factor of a symmetric positive-definite matrix, A = L L', with the solves and the inverse
 *           that rest on it.
 * Shapes    matrices (n x n, row-major); the factor is lower triangular, entries above the diagonal are zero.
 * Units     any; the factor carries the square root of the matrix's unit.
 * Domain    `null` where a pivot is not positive or not finite: the matrix is not positive definite.
 * Accuracy  backward stable, |A - L L'| <= n eps |A|; tests/app/solve/factor.test.ts.
 * Source    Golub and Van Loan, Matrix Computations, 4th ed. (2013), algorithm 4.2.1.
 */
export function choleskyFactor(matrix: Float64Array, n: number): Float64Array | null {
  const factor = new Float64Array(n * n);
  return choleskyInto(matrix, n, factor) > 0 ? factor : null;
}

/**
 * The same into a given array (which may be `matrix` itself). Returns the smallest pivot L_jj^2 relative to its own
 * diagonal A_jj, which is the squared sine of the angle between column j and the columns before it; 0 on failure.
 */
export function choleskyInto(matrix: Float64Array, n: number, factor: Float64Array): number {
  let smallest = 1;
  for (let i = 0; i < n; i++) {
    const rowI = i * n;
    const diagonal = matrix[rowI + i]!;
    for (let j = 0; j <= i; j++) {
      const rowJ = j * n;
      let sum = matrix[rowI + j]!;
      for (let k = 0; k < j; k++) sum -= factor[rowI + k]! * factor[rowJ + k]!;
      if (i === j) {
        if (!(sum > 0) || sum === Infinity) return 0;
        smallest = Math.min(smallest, sum / diagonal);
        factor[rowI + i] = Math.sqrt(sum);
      } else {
        factor[rowI + j] = sum / factor[rowJ + j]!;
      }
    }
    for (let j = i + 1; j < n; j++) factor[rowI + j] = 0;
  }
  return smallest;
}

/** x := L^-1 x, in place. */
export function forwardSubstitute(factor: Float64Array, n: number, x: Float64Array, offset = 0): void {
  for (let i = 0; i < n; i++) {
    let sum = x[offset + i]!;
    const row = i * n;
    for (let k = 0; k < i; k++) sum -= factor[row + k]! * x[offset + k]!;
    x[offset + i] = sum / factor[row + i]!;
  }
}

/** x := L'^-1 x, in place. */
export function backSubstitute(factor: Float64Array, n: number, x: Float64Array, offset = 0): void {
  for (let i = n - 1; i >= 0; i--) {
    const value = x[offset + i]! / factor[i * n + i]!;
    x[offset + i] = value;
    const row = i * n;
    for (let k = 0; k < i; k++) x[offset + k] = x[offset + k]! - factor[row + k]! * value;
  }
}

/** x := A^-1 x, in place, from the factor of A. */
export function choleskySolve(factor: Float64Array, n: number, x: Float64Array): void {
  forwardSubstitute(factor, n, x);
  backSubstitute(factor, n, x);
}
