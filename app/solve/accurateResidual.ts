/** Veltkamp's constant for splitting a double into two halves of 26 bits. */
const SPLITTER = 2 ** 27 + 1;

/**
 * What      Residual r = t - Phi c and its image g = Phi'r with sums carried in twice the working precision, for the
 *           refinement of a least-squares solution.
 * Shapes    Phi (rows x k, column-major, leading dimension ld), t, r (rows), c, g (k).
 * Units     weighted.
 * Domain    numbers below about 1e290, where splitting does not overflow.
 * Accuracy  r rounded once from a sum with error (k eps)^2 |Phi||c|; g likewise.
 * Source    Ogita, Rump and Oishi, SIAM J. Sci. Comput. 26, 1955 (2005), algorithm Dot2.
 */
export function accurateResidual(
  phi: Float64Array,
  k: number,
  ld: number,
  rows: number,
  target: Float64Array,
  c: Float64Array,
  residual: Float64Array,
  image: Float64Array,
): void {
  const low = new Float64Array(rows);
  for (let i = 0; i < rows; i++) {
    let sum = target[i]!;
    let error = 0;
    for (let j = 0; j < k; j++) {
      const a = phi[j * ld + i]!;
      const b = -c[j]!;
      const product = a * b;
      const slip = productError(a, b, product);
      const next = sum + product;
      const part = next - sum;
      error += sum - (next - part) + (product - part) + slip;
      sum = next;
    }
    residual[i] = sum + error;
    low[i] = sum - residual[i]! + error;
  }
  for (let j = 0; j < k; j++) {
    let sum = 0;
    let error = 0;
    for (let i = 0; i < rows; i++) {
      const a = phi[j * ld + i]!;
      const b = residual[i]!;
      const product = a * b;
      const slip = productError(a, b, product) + a * low[i]!;
      const next = sum + product;
      const part = next - sum;
      error += sum - (next - part) + (product - part) + slip;
      sum = next;
    }
    image[j] = sum + error;
  }
}

/** a b - fl(a b), exactly. */
function productError(a: number, b: number, product: number): number {
  let t = SPLITTER * a;
  const aHigh = t - (t - a);
  const aLow = a - aHigh;
  t = SPLITTER * b;
  const bHigh = t - (t - b);
  const bLow = b - bHigh;
  return aLow * bLow - (product - aHigh * bHigh - aLow * bHigh - aHigh * bLow);
}
