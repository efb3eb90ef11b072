/**
 * What      Upper regularised incomplete gamma function Q(a, x) = Gamma(a, x)/Gamma(a).
 * Shapes    scalars.
 * Units     none.
 * Domain    a > 0, x >= 0; Q(a, 0) = 1, Q(a, Infinity) = 0; NaN outside.
 * Accuracy  relative 1e-13 of the smaller of P and Q for a up to 1e4; tests/app/solve/statistics.test.ts.
 * Source    Series for P below x = a + 1, Lentz's continued fraction for Q above (Abramowitz and Stegun 6.5.29 and
 *           6.5.31). The factor x^a e^-x/Gamma(a+1) is formed from Stirling's error and the deviance, without
 *           cancellation: Loader, Fast and accurate computation of binomial probabilities (2000).
 */
export function upperGamma(a: number, x: number): number {
  if (!(a > 0) || !(x >= 0)) return NaN;
  if (x === 0) return 1;
  if (x === Infinity) return 0;
  const density = poissonDensity(a, x);
  return x < a + 1 ? 1 - density * series(a, x) : density * a * fraction(a, x);
}

/** P = 1 - Q, accurate where it is small. */
export function lowerGamma(a: number, x: number): number {
  if (!(a > 0) || !(x >= 0)) return NaN;
  if (x === 0) return 0;
  if (x === Infinity) return 1;
  const density = poissonDensity(a, x);
  return x < a + 1 ? density * series(a, x) : 1 - density * a * fraction(a, x);
}

/** sum over k of x^k / ((a+1) ... (a+k)) */
function series(a: number, x: number): number {
  let term = 1;
  let sum = 1;
  for (let k = 1; k < 100_000; k++) {
    term *= x / (a + k);
    sum += term;
    if (term < 1e-17 * sum) break;
  }
  return sum;
}

/** 1/(x+1-a- 1(1-a)/(x+3-a- ...)) */
function fraction(a: number, x: number): number {
  const tiny = 1e-300;
  let b = x + 1 - a;
  let c = 1 / tiny;
  let d = 1 / (b || tiny);
  let h = d;
  for (let i = 1; i < 100_000; i++) {
    const an = -i * (i - a);
    b += 2;
    d = an * d + b;
    if (Math.abs(d) < tiny) d = tiny;
    c = b + an / c;
    if (Math.abs(c) < tiny) c = tiny;
    d = 1 / d;
    const change = d * c;
    h *= change;
    if (Math.abs(change - 1) < 1e-16) break;
  }
  return h;
}

/** x^a e^-x / Gamma(a+1) */
function poissonDensity(a: number, x: number): number {
  return Math.exp(-stirlingError(a) - deviance(a, x)) / Math.sqrt(2 * Math.PI * a);
}

/** log Gamma(a+1) - [ (a + 1/2) log a - a + log(2 pi)/2 ] */
function stirlingError(a: number): number {
  if (a < 15) {
    // Up to where the asymptotic series holds, by log Gamma(a+1) = log Gamma(a+2) - log(a+1).
    return stirlingError(a + 1) + (a + 0.5) * Math.log1p(1 / a) - 1;
  }
  const s = 1 / (a * a);
  return (1 / 12 - s * (1 / 360 - s * (1 / 1260 - s * (1 / 1680 - s * (1 / 1188 - (s * 691) / 360360))))) / a;
}

/** a log(a/x) + x - a, without cancellation near a = x. */
function deviance(a: number, x: number): number {
  const v = (a - x) / (a + x);
  if (Math.abs(v) > 0.1) return a * Math.log(a / x) + x - a;
  let sum = (a - x) * v;
  let term = 2 * a * v;
  for (let j = 1; j < 200; j++) {
    term *= v * v;
    const next = sum + term / (2 * j + 1);
    if (next === sum) break;
    sum = next;
  }
  return sum;
}
