import { largestEigenvalue } from "./largestEigenvalue.ts";

/** R^-1 (n x n, packed by column) of an upper triangle whose column j stands at r[j * ld]. */
export function invertTriangle(r: Float64Array, ld: number, n: number): Float64Array {
  const inverse = new Float64Array(n * n);
  for (let j = 0; j < n; j++) {
    inverse[j * n + j] = 1 / r[j * ld + j]!;
    for (let i = j - 1; i >= 0; i--) {
      let sum = 0;
      for (let l = i + 1; l <= j; l++) sum += r[l * ld + i]! * inverse[j * n + l]!;
      inverse[j * n + i] = -sum / r[i * ld + i]!;
    }
  }
  return inverse;
}

/**
 * Largest over smallest singular value of such a triangle, from it and its inverse: the roots of the largest eigenvalues of R'R
 * and of R^-1 R^-T, each of which is well determined.
 */
export function conditionOfTriangle(r: Float64Array, ld: number, inverse: Float64Array, n: number): number {
  const product = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let l = 0; l <= j; l++) sum += r[i * ld + l]! * r[j * ld + l]!;
      product[i * n + j] = sum;
    }
  }
  const largest = largestEigenvalue(product, n);
  product.fill(0);
  for (let l = 0; l < n; l++) {
    for (let i = 0; i <= l; i++) {
      const factor = inverse[l * n + i]!;
      for (let j = 0; j <= i; j++) product[i * n + j] = product[i * n + j]! + factor * inverse[l * n + j]!;
    }
  }
  return Math.sqrt(largest * largestEigenvalue(product, n));
}
