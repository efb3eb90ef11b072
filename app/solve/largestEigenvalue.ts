/**
 * What      The largest eigenvalue of a symmetric matrix: Householder reduction to tridiagonal form, then bisection by
 *           counting the negative pivots of T - x.
 * Shapes    a (n x n, row-major), of which the lower triangle is read; destroyed.
 * Units     that of the matrix.
 * Domain    finite numbers, n >= 1.
 * Accuracy  a few n eps of the largest absolute eigenvalue. tests/app/solve/factor.test.ts.
 * Source    Golub and Van Loan, Matrix Computations, 4th ed. (2013), algorithm 8.3.1 and section 8.4.1.
 */
export function largestEigenvalue(a: Float64Array, n: number): number {
  const beside = new Float64Array(n);
  const v = new Float64Array(n);
  const p = new Float64Array(n);
  for (let k = 0; k + 2 < n; k++) {
    let square = 0;
    for (let i = k + 1; i < n; i++) square += a[i * n + k]! ** 2;
    const head = a[(k + 1) * n + k]!;
    const length = Math.sqrt(square);
    const turned = head > 0 ? -length : length;
    beside[k + 1] = turned;
    if (length === 0) continue;
    for (let i = k + 1; i < n; i++) v[i] = a[i * n + k]!;
    v[k + 1] = head - turned;
    const factor = 1 / (square - head * turned);
    // p := factor A v by the lower triangle alone.
    p.fill(0, k + 1, n);
    for (let i = k + 1; i < n; i++) {
      const row = i * n;
      const vi = v[i]!;
      let sum = 0;
      for (let j = k + 1; j < i; j++) {
        const value = a[row + j]!;
        sum += value * v[j]!;
        p[j] = p[j]! + value * vi;
      }
      p[i] = p[i]! + sum + a[row + i]! * vi;
    }
    let product = 0;
    for (let i = k + 1; i < n; i++) {
      p[i] = p[i]! * factor;
      product += p[i]! * v[i]!;
    }
    const part = 0.5 * factor * product;
    for (let i = k + 1; i < n; i++) p[i] = p[i]! - part * v[i]!;
    for (let i = k + 1; i < n; i++) {
      const row = i * n;
      const vi = v[i]!;
      const pi = p[i]!;
      for (let j = k + 1; j <= i; j++) a[row + j] = a[row + j]! - vi * p[j]! - pi * v[j]!;
    }
  }
  if (n > 1) beside[n - 1] = a[(n - 1) * n + n - 2]!;
  let low = -Infinity;
  let high = -Infinity;
  for (let i = 0; i < n; i++) {
    const diagonal = a[i * n + i]!;
    low = Math.max(low, diagonal);
    high = Math.max(high, diagonal + Math.abs(beside[i]!) + (i + 1 < n ? Math.abs(beside[i + 1]!) : 0));
  }
  for (;;) {
    const middle = (low + high) / 2;
    if (!(middle > low && middle < high)) return high;
    let above = false;
    let pivot = 1;
    for (let i = 0; i < n && !above; i++) {
      pivot = a[i * n + i]! - middle - (i === 0 ? 0 : beside[i]! ** 2 / pivot);
      above = pivot >= 0;
    }
    if (above) low = middle;
    else high = middle;
  }
}
