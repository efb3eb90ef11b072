/**
 * What      Singular values of a small square matrix by one-sided Jacobi rotations, largest first.
 * Shapes    a (n x n, column-major), destroyed; returns (n).
 * Units     that of the matrix.
 * Domain    finite numbers.
 * Accuracy  relative accuracy near eps for each value of a column-scaled triangular matrix; rotations end at cosines below
 *           `tolerance`, of which the values keep about that part at most.
 * Source    Hestenes, J. SIAM 6, 51 (1958); threshold and accuracy after Demmel and Veselic, SIAM J. Matrix Anal.
 *           Appl. 13, 1204 (1992).
 */
export function singularValues(a: Float64Array, n: number, tolerance = 1e-15): Float64Array {
  for (let sweep = 0; sweep < 30; sweep++) {
    let rotated = false;
    for (let p = 0; p < n - 1; p++) {
      for (let q = p + 1; q < n; q++) {
        const ip = p * n;
        const iq = q * n;
        let alpha = 0;
        let beta = 0;
        let gamma = 0;
        for (let i = 0; i < n; i++) {
          const x = a[ip + i]!;
          const y = a[iq + i]!;
          alpha += x * x;
          beta += y * y;
          gamma += x * y;
        }
        if (gamma === 0 || Math.abs(gamma) <= tolerance * Math.sqrt(alpha * beta)) continue;
        rotated = true;
        const zeta = (beta - alpha) / (2 * gamma);
        const t = Math.sign(zeta || 1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
        const c = 1 / Math.sqrt(1 + t * t);
        const s = c * t;
        for (let i = 0; i < n; i++) {
          const x = a[ip + i]!;
          a[ip + i] = c * x - s * a[iq + i]!;
          a[iq + i] = s * x + c * a[iq + i]!;
        }
      }
    }
    if (!rotated) break;
  }
  const values = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    let sum = 0;
    for (let i = 0; i < n; i++) sum += a[j * n + i]! * a[j * n + i]!;
    values[j] = Math.sqrt(sum);
  }
  return values.sort().reverse();
}
