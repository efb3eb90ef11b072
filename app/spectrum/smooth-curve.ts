/**
 * What      A smoothed copy of a noisy curve for weights, never for fitting: at each point a local quadratic over the
 *           widest of a few windows whose estimate still agrees with all narrower ones within 2.5 of their standard
 *           errors (intersection of confidence intervals), so that narrow lines keep their depth and flat parts are
 *           averaged widely.
 * Shapes    y, sigma (m), out (m).
 * Units     those of y.
 * Domain    points nearly evenly spaced over a window; ends are fitted one-sidedly. m < 5 returns y.
 * Source    local polynomials: Savitzky and Golay, Anal. Chem. 36, 1627 (1964); choice of window: Goldenshluger and
 *           Nemirovski, Math. Methods Stat. 6, 135 (1997).
 */
/** The bare reading comes first: where a line is narrower than the narrowest window nothing is smoothed. */
const HALF_WIDTHS = [0, 2, 3, 5, 8, 12, 18, 27];
const AGREE = 2.5;

export function smoothCurve(y: Float64Array, sigma: Float64Array): Float64Array {
  const m = y.length;
  const out = y.slice();
  const low = new Float64Array(m).fill(-Infinity);
  const high = new Float64Array(m).fill(Infinity);
  const open = new Uint8Array(m).fill(1);
  for (const half of HALF_WIDTHS) {
    if (m < 2 * half + 1) break;
    const rows = quadraticRows(half);
    const size = 2 * half + 1;
    for (let i = 0; i < m; i++) {
      if (open[i] === 0) continue;
      const start = Math.min(Math.max(0, i - half), m - size);
      const row = rows[i - start]!;
      let sum = 0;
      let variance = 0;
      for (let j = 0; j < size; j++) {
        sum += row[j]! * y[start + j]!;
        variance += (row[j]! * sigma[start + j]!) ** 2;
      }
      const reach = AGREE * Math.sqrt(variance);
      low[i] = Math.max(low[i]!, sum - reach);
      high[i] = Math.min(high[i]!, sum + reach);
      if (low[i]! > high[i]!) open[i] = 0;
      else out[i] = sum;
    }
  }
  return out;
}

/** Weights of a least-squares quadratic over 2 half + 1 even places, evaluated at each place (one row a place). */
function quadraticRows(half: number): readonly Float64Array[] {
  const size = 2 * half + 1;
  if (half === 0) return [Float64Array.of(1)];
  let s2 = 0;
  let s4 = 0;
  for (let u = -half; u <= half; u++) {
    s2 += u * u;
    s4 += u ** 4;
  }
  const determinant = size * s4 - s2 * s2;
  return Array.from({ length: size }, (_, place) => {
    const t = place - half;
    return Float64Array.from({ length: size }, (_unused, j) => {
      const u = j - half;
      // Orthogonal pieces: the linear term stands alone, constant and square share a 2 x 2 system.
      const constant = (s4 - s2 * u * u) / determinant;
      const square = (size * u * u - s2) / determinant;
      return constant + (t * u) / s2 + square * t * t;
    });
  });
}
