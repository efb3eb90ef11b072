/**
 * What      w(z) = exp(-z^2) erfc(-i z), z = x + i y: the complex error (Faddeeva) function.
 *           Upper half plane: w = (i/pi) Int exp(-t^2)/(z - t) dt by a sum over symmetric pairs of poles,
 *             Re w = y Sum c_k (r^2 + t_k^2)/D_k,  Im w = x Sum c_k (r^2 - t_k^2)/D_k,
 *             r^2 = x^2 + y^2,  D_k = |z^2 - t_k^2|^2,
 *           - r^2 >= 60: t_k, c_k of the Gauss-Hermite rules with 2, 4, 6, 8 or 12 nodes;
 *           - r^2 <  60: midpoint or trapezoidal rule of step h = sqrt(pi/12), whichever keeps its nodes at least
 *             h/4 away from x, with the residue 2 exp(-z^2)/(1 +- exp(-2 pi i z/h)) added while y < pi/h.
 *           Lower half plane: w(z) = 2 exp(-z^2) - w(-z).
 * Shapes    out (2): re, im.
 * Units     dimensionless.
 * Domain    all finite x, y; where the result leaves the range of doubles (y far below 0) it is +-Infinity or
 *           NaN; NaN in gives NaN out.
 * Accuracy  |w - w_ref|/|w_ref| below 1e-14 and each component below 1e-12 for y >= 0, on the published table and
 *           on 870 scattered points (tests/reference/faddeeva.test.ts). For y < 0 near a zero of w the relative
 *           error grows as |2 exp(-z^2)|/|w|.
 * Source    Rule with residue: Chiarella and Reichel, Math. Comp. 22, 137 (1968); Matta and Reichel, Math. Comp. 25,
 *           339 (1971); Hunter and Regan, Math. Comp. 26, 539 (1972); step and choice of rule after Al Azah and
 *           Chandler-Wilde, SIAM J. Numer. Anal. 59, 2346 (2021). Far field: the Gauss-Hermite sum equals the
 *           convergent of Laplace's continued fraction, Gautschi, SIAM J. Numer. Anal. 7, 187 (1970). We depart in
 *           writing both as one real sum, so that Re w keeps its relative accuracy close to the real axis.
 */
export function faddeeva(x: number, y: number, out: Float64Array): void {
  if (y >= 0) {
    faddeevaUpper(x, y, out);
    return;
  }
  faddeevaUpper(-x, -y, out);
  const re = out[0]!;
  const im = out[1]!;
  expMinusSquare(x, y, out);
  out[0] = 2 * out[0]! - re;
  out[1] = 2 * out[1]! - im;
}

/** h = sqrt(pi/(N + 1)), N = 11: truncation and discretisation errors are then both about exp(-12 pi). */
const STEP = Math.sqrt(Math.PI / 12);
const SUM_TERMS = 12;

/**
 * Squared nodes and weights (2/pi times the Gauss-Hermite weight) of the positive nodes, rule after rule: 2 nodes
 * at index 0, 4 nodes at 1-2, 6 at 3-5, 8 at 6-9, 12 at 10-15. Computed with 60 digits from the zeros of the
 * Hermite polynomials.
 */
const FAR_NODE = new Float64Array([
  0.5, 0.27525512860841095, 2.724744871391589, 0.19016350919348812, 1.7844927485432516, 5.52534374226326,
  0.14530352150331707, 1.3390972881263614, 3.926963501358287, 8.588635689012035, 0.09874701406848119,
  0.8983028345696177, 2.5525898026681713, 5.196152530054466, 9.12424803753118, 15.129959781108086,
]);
const FAR_WEIGHT = new Float64Array([
  0.5641895835477563, 0.5124242247547685, 0.051765358792987826, 0.46131352796256536, 0.09999216171032298,
  0.00288389387486793, 0.42089926063633404, 0.13229106935773044, 0.01087218165467699, 0.00012707189901484312,
  0.36295936432815695, 0.16583455526387564, 0.03285466405513344, 0.002486248864993049, 5.458178694039784e-5,
  1.6924865681223586e-7,
]);

/** The rule of 4 nodes by name, for loops that write it out (line-pair.ts). */
export const FOUR_NODES = {
  nodeA: FAR_NODE[1]!,
  nodeB: FAR_NODE[2]!,
  weightA: FAR_WEIGHT[1]!,
  weightB: FAR_WEIGHT[2]!,
} as const;

/** Nearest r^2 at which each rule reaches double accuracy: relative error about K!/(2^K r^(2K)) for K nodes. */
const FAR_2 = 1e9;
export const FAR_4 = 2e4;
const FAR_6 = 900;
const FAR_8 = 230;
export const FAR_FIELD = 60;
export const FAR_LARGEST = 1e60;

const MID_NODE = new Float64Array(SUM_TERMS);
const MID_WEIGHT = new Float64Array(SUM_TERMS);
const TRAPEZOID_NODE = new Float64Array(SUM_TERMS);
const TRAPEZOID_WEIGHT = new Float64Array(SUM_TERMS);
for (let k = 0; k < SUM_TERMS; k++) {
  const mid = (k + 0.5) * STEP;
  MID_NODE[k] = mid * mid;
  MID_WEIGHT[k] = ((2 * STEP) / Math.PI) * Math.exp(-mid * mid);
  const node = k * STEP;
  TRAPEZOID_NODE[k] = node * node;
  TRAPEZOID_WEIGHT[k] = ((k === 0 ? 1 : 2) * STEP * Math.exp(-node * node)) / Math.PI;
}

/** Above this height the rules need no residue: exp(-(pi/h)^2) = exp(-12 pi) = 4e-17. */
const RESIDUE_HEIGHT = Math.PI / STEP;

/** w for y >= 0; see faddeeva. */
export function faddeevaUpper(x: number, y: number, out: Float64Array): void {
  const r2 = x * x + y * y;
  if (r2 >= FAR_FIELD) farField(x, y, r2, out);
  else nearField(x, y, r2, out);
}

/** w where r2 = x^2 + y^2 >= FAR_FIELD, y >= 0. */
export function farField(x: number, y: number, r2: number, out: Float64Array): void {
  if (r2 > FAR_LARGEST) {
    // D_k would overflow in the end; here w = i/(sqrt(pi) z) to the last digit.
    const scale = Math.max(Math.abs(x), y);
    const u = x / scale;
    const v = y / scale;
    const f = 1 / (Math.sqrt(Math.PI) * (u * u + v * v));
    out[0] = (f * v) / scale;
    out[1] = (f * u) / scale;
    return;
  }
  const start = r2 >= FAR_2 ? 0 : r2 >= FAR_4 ? 1 : r2 >= FAR_6 ? 3 : r2 >= FAR_8 ? 6 : 10;
  const end = r2 >= FAR_2 ? 1 : r2 >= FAR_4 ? 3 : r2 >= FAR_6 ? 6 : r2 >= FAR_8 ? 10 : 16;
  const a = x * x - y * y;
  const b = 4 * x * x * y * y;
  let sum = 0;
  let moment = 0;
  for (let k = start; k < end; k++) {
    const node = FAR_NODE[k]!;
    const d = a - node;
    const term = FAR_WEIGHT[k]! / (d * d + b);
    sum += term;
    moment += term * node;
  }
  out[0] = y * (r2 * sum + moment);
  out[1] = x * (r2 * sum - moment);
  // Close to the real axis the exponentially small part is all there is of Re w.
  if (y < 1e-10 && x * x < 746) out[0] += Math.exp(-squareHigh(x)) * (1 - squareLow(x));
}

/** w where r2 = x^2 + y^2 < FAR_FIELD, y >= 0. */
export function nearField(x: number, y: number, r2: number, out: Float64Array): void {
  const cell = Math.abs(x) / STEP;
  const fraction = cell - Math.floor(cell);
  const trapezoid = fraction >= 0.25 && fraction <= 0.75;
  const nodes = trapezoid ? TRAPEZOID_NODE : MID_NODE;
  const weights = trapezoid ? TRAPEZOID_WEIGHT : MID_WEIGHT;
  const a = x * x - y * y;
  const b = 4 * x * x * y * y;
  let sum = 0;
  let moment = 0;
  for (let k = 0; k < SUM_TERMS; k++) {
    const node = nodes[k]!;
    const d = a - node;
    const term = weights[k]! / (d * d + b);
    sum += term;
    moment += term * node;
  }
  let re = y * (r2 * sum + moment);
  let im = x * (r2 * sum - moment);
  if (y < RESIDUE_HEIGHT && (y < 0.05 || -a - 2 * RESIDUE_HEIGHT * y > -46)) {
    // 2 exp(-z^2)/(1 +- exp(-2 pi i z/h)); the phase is reduced to one period first.
    expMinusSquare(x, y, out);
    const phase = 2 * Math.PI * (x >= 0 ? fraction : -fraction);
    const growth = Math.exp(2 * RESIDUE_HEIGHT * y) * (trapezoid ? -1 : 1);
    const p = 1 + growth * Math.cos(phase);
    const q = -growth * Math.sin(phase);
    const f = 2 / (p * p + q * q);
    re += f * (out[0]! * p + out[1]! * q);
    im += f * (out[1]! * p - out[0]! * q);
  }
  out[0] = re;
  out[1] = im;
}

/**
 * w'(z) where r2 = x^2 + y^2 >= FAR_FIELD, y >= 0, by differentiating the sum of poles:
 * w' = -i Sum c_k (z^2 + t_k^2)/(z^2 - t_k^2)^2. The formula -2 z w + 2 i/sqrt(pi) would lose a factor 2 r^2 here.
 */
export function farFieldDerivative(x: number, y: number, r2: number, out: Float64Array): void {
  if (r2 > FAR_LARGEST) {
    farField(x, y, r2, out);
    const re = out[0]!;
    const im = out[1]!;
    // w = i/(sqrt(pi) z), so w' = -w/z = i sqrt(pi) w^2.
    out[0] = -2 * Math.sqrt(Math.PI) * re * im;
    out[1] = Math.sqrt(Math.PI) * (re - im) * (re + im);
    return;
  }
  const start = r2 >= FAR_2 ? 0 : r2 >= FAR_4 ? 1 : r2 >= FAR_6 ? 3 : r2 >= FAR_8 ? 6 : 10;
  const end = r2 >= FAR_2 ? 1 : r2 >= FAR_4 ? 3 : r2 >= FAR_6 ? 6 : r2 >= FAR_8 ? 10 : 16;
  const a = x * x - y * y;
  const b = 2 * x * y;
  let re = 0;
  let im = 0;
  for (let k = start; k < end; k++) {
    const node = FAR_NODE[k]!;
    const d = a - node;
    const e = d + 2 * node;
    const inverse = 1 / (d * d + b * b);
    const term = FAR_WEIGHT[k]! * inverse * inverse;
    const difference = d * d - b * b;
    re += term * b * (difference - 2 * d * e);
    im -= term * (e * difference + 2 * d * b * b);
  }
  out[0] = re;
  out[1] = im;
  if (y < 1e-10 && x * x < 746) out[0] -= 2 * x * Math.exp(-squareHigh(x)) * (1 - squareLow(x));
}

/** Derivative w'(z), y >= 0, from w already known: out (2) re, im. */
export function faddeevaDerivative(x: number, y: number, re: number, im: number, out: Float64Array): void {
  const r2 = x * x + y * y;
  if (r2 >= FAR_FIELD) {
    farFieldDerivative(x, y, r2, out);
    return;
  }
  out[0] = -2 * (x * re - y * im);
  out[1] = -2 * (x * im + y * re) + TWO_OVER_ROOT_PI;
}

export const TWO_OVER_ROOT_PI = 2 / Math.sqrt(Math.PI);

/** exp(-z^2): out (2) re, im. The rounding of the squares is put back, so that the result is good to a few ulp. */
function expMinusSquare(x: number, y: number, out: Float64Array): void {
  const size =
    Math.exp(squareHigh(y) - squareHigh(x)) * (1 + (Math.abs(x) < 1e100 ? squareLow(y) - squareLow(x) : 0));
  const phase = 2 * x * y;
  out[0] = size * Math.cos(phase);
  out[1] = -size * Math.sin(phase);
}

function squareHigh(x: number): number {
  return x * x;
}

/** x^2 - fl(x^2) exactly (Veltkamp splitting; Dekker, Numer. Math. 18, 224 (1971)). */
function squareLow(x: number): number {
  const product = 134217729 * x;
  const high = product - (product - x);
  const low = x - high;
  return high * high - x * x + 2 * high * low + low * low;
}

/** Dawson's integral F(x) = exp(-x^2) Int_0^x exp(t^2) dt = (sqrt(pi)/2) Im w(x). */
export function dawson(x: number): number {
  const out = new Float64Array(2);
  faddeevaUpper(x, 0, out);
  return out[1]! / TWO_OVER_ROOT_PI;
}
