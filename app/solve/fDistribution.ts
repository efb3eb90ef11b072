/**
 * What      Probability that the ratio of two independent mean squares with d1 and d2 degrees of freedom exceeds f:
 *           Q = I_x(d2/2, d1/2), x = d2/(d2 + d1 f), I the regularised incomplete beta function.
 * Domain    f >= 0, d1, d2 > 0; NaN outside.
 * Accuracy  1e-12 relative; tests/app/solve/f-distribution.test.ts.
 * Source    DLMF 8.17.22 (continued fraction of the incomplete beta function), evaluated by Lentz's method
 *           (Thompson and Barnett, J. Comput. Phys. 64, 490 (1986)).
 */
export function fSurvival(f: number, d1: number, d2: number): number {
  if (!(f >= 0) || !(d1 > 0) || !(d2 > 0)) return NaN;
  const x = d2 / (d2 + d1 * f);
  return incompleteBeta(d2 / 2, d1 / 2, x);
}

function incompleteBeta(a: number, b: number, x: number): number {
  if (x <= 0) return 0;
  if (x >= 1) return 1;
  // The fraction converges quickly below the mean of the distribution.
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(b, a, 1 - x);
  const front =
    Math.exp(a * Math.log(x) + b * Math.log1p(-x) + logGamma(a + b) - logGamma(a) - logGamma(b)) / a;
  const tiny = 1e-300;
  let c = 1;
  let d = 1 - ((a + b) * x) / (a + 1);
  d = 1 / (Math.abs(d) < tiny ? tiny : d);
  let h = d;
  for (let m = 1; m < 500; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m));
    d = 1 + even * d;
    d = 1 / (Math.abs(d) < tiny ? tiny : d);
    c = 1 + even / c;
    if (Math.abs(c) < tiny) c = tiny;
    h *= d * c;
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 + odd * d;
    d = 1 / (Math.abs(d) < tiny ? tiny : d);
    c = 1 + odd / c;
    if (Math.abs(c) < tiny) c = tiny;
    const change = d * c;
    h *= change;
    if (Math.abs(change - 1) < 1e-15) break;
  }
  return front * h;
}

/** ln Gamma for x > 0: Stirling's series after shifting x above 12 (DLMF 5.11.1). */
function logGamma(x: number): number {
  let shift = 0;
  let z = x;
  while (z < 12) {
    shift -= Math.log(z);
    z++;
  }
  const r = 1 / (z * z);
  const series =
    (1 / 12 - r * (1 / 360 - r * (1 / 1260 - r * (1 / 1680 - r * (1 / 1188 - (r * 691) / 360360))))) / z;
  return shift + (z - 0.5) * Math.log(z) - z + 0.5 * Math.log(2 * Math.PI) + series;
}
