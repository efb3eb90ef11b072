import { linearLeastSquares } from "../solve/index.ts";

/** A place where the curve jumps: between `place - 1` and `place`. */
export interface Step {
  readonly place: number;
  /** In standard deviations of a reading. */
  readonly height: number;
  readonly significance: number;
}

const LENGTHS = [12, 25, 50, 100];
/** By chance once in a million spectra, and curves that only bend sharply stay below. */
const LEAST = 7;
/** Chi square a degree of freedom that either side may have on its parabola. */
const SMOOTH = 1.4;
/** The last points on either side belong to it by this many standard errors. */
const BELONG = 3.5;
const LAST = 3;
const MOST = 4;
/** Another length sees the step with half the significance at least, and as high within three standard errors. */
const HALF = 0.5;
const AGREE = 3;

/**
 * What      Jumps of residuals from one reading to the next (the lamp, the gain or the sample moved): a parabola through L
 *           points on either side, for L = 12, 25, 50, 100, both of which fit, and whose values between the two points differ
 *           by 7 standard errors; another length has to say the same. What lines leave bends: it fits no parabola on one side,
 *           the points next to the place leave it, or lengths disagree.
 * Shapes    residuals (m) in standard deviations of a reading, of which `together` neighbours count as one.
 * Domain    points nearly evenly spaced over L of them.
 */
export function findSteps(residuals: Float64Array, together: number): Step[] {
  const m = residuals.length;
  const seen: (Step & { readonly length: number; readonly error: number })[] = [];
  for (const length of LENGTHS) {
    if (m < 4 * length) break;
    const rows = parabolaRows(length);
    const edge = rows.at(-0.5);
    const spread = Math.sqrt(2 * together * edge.reduce((sum, w) => sum + w * w, 0));
    const left = new Float64Array(length);
    const right = new Float64Array(length);
    for (let i = length; i + length <= m; i++) {
      let jump = 0;
      for (let k = 0; k < length; k++) jump += edge[k]! * (residuals[i + k]! - residuals[i - 1 - k]!);
      const significance = Math.abs(jump) / spread;
      if (!(significance > HALF * LEAST)) continue;
      for (let k = 0; k < length; k++) {
        left[k] = residuals[i - 1 - k]!;
        right[k] = residuals[i + k]!;
      }
      if (!belongs(left, rows, together) || !belongs(right, rows, together)) continue;
      seen.push({ place: i, height: jump, significance, length, error: spread });
    }
  }
  const found: Step[] = [];
  for (const one of seen.sort((a, b) => b.significance - a.significance)) {
    if (one.significance < LEAST || found.length === MOST) break;
    const agreed = seen.some(
      (other) =>
        other.length !== one.length &&
        Math.abs(other.place - one.place) <= 1 &&
        Math.abs(other.height - one.height) < AGREE * Math.hypot(one.error, other.error),
    );
    if (
      agreed &&
      !bends(residuals, one, together) &&
      !found.some(({ place }) => Math.abs(place - one.place) <= one.length)
    )
      found.push(one);
  }
  return found
    .sort((a, b) => a.place - b.place)
    .map(({ place, height, significance }) => ({ place, height, significance }));
}

/** A curve of one bend more without a jump does nearly as well. */
function bends(
  residuals: Float64Array,
  { place, length, significance }: Step & { readonly length: number },
  together: number,
): boolean {
  const m = 2 * length;
  const y = residuals.subarray(place - length, place + length);
  const ones = new Float64Array(m).fill(1);
  const left = (degree: number, split: boolean): number => {
    const parts = split ? 2 : 1;
    const columns = new Float64Array(m * parts * (degree + 1));
    for (let i = 0; i < m; i++)
      for (let k = 0; k <= degree; k++) {
        const part = split && i >= length ? 1 : 0;
        columns[(part * (degree + 1) + k) * m + i] = ((i - length + 0.5) / length) ** k;
      }
    const { residuals: off } = linearLeastSquares(columns, m, parts * (degree + 1), y, ones);
    return off.reduce((sum, one) => sum + one * one, 0);
  };
  return left(4, false) - left(2, true) < SHARE * together * significance * significance;
}

/** Of what the jump explains, a quartic must leave this part at least. */
const SHARE = 0.7;

interface ParabolaRows {
  /** Weights of the least-squares parabola through places 0, 1, ... at this place. */
  at(place: number): Float64Array;
}

function belongs(y: Float64Array, rows: ParabolaRows, together: number): boolean {
  const length = y.length;
  const [a, b, c] = [0, (length - 1) / 2, length - 1].map((place) => {
    let sum = 0;
    rows.at(place).forEach((w, k) => (sum += w * y[k]!));
    return sum;
  }) as [number, number, number];
  let chi2 = 0;
  let last = 0;
  for (let k = 0; k < length; k++) {
    // The parabola through its own values at both ends and in the middle.
    const t = (2 * k) / (length - 1) - 1;
    const off = y[k]! - (b + (t * (c - a)) / 2 + t * t * ((a + c) / 2 - b));
    chi2 += off * off;
    if (k < LAST) last += off;
  }
  const scatter = Math.sqrt(2 / length);
  return (
    chi2 / (length - 3) < SMOOTH + 2 * scatter * Math.sqrt(together) &&
    Math.abs(last) < BELONG * Math.sqrt(LAST * Math.min(LAST, together))
  );
}

function parabolaRows(length: number): ParabolaRows {
  let [s1, s2, s3, s4] = [0, 0, 0, 0];
  for (let k = 0; k < length; k++) {
    s1 += k;
    s2 += k * k;
    s3 += k ** 3;
    s4 += k ** 4;
  }
  const s0 = length;
  const known = new Map<number, Float64Array>();
  return {
    at(place) {
      const before = known.get(place);
      if (before !== undefined) return before;
      // Coefficients g of the row g0 + g1 k + g2 k^2 with moments 1, place, place^2, by Cramer's rule.
      const det = (a: readonly number[]): number =>
        a[0]! * (a[4]! * a[8]! - a[5]! * a[7]!) -
        a[1]! * (a[3]! * a[8]! - a[5]! * a[6]!) +
        a[2]! * (a[3]! * a[7]! - a[4]! * a[6]!);
      const [p0, p1, p2] = [1, place, place * place];
      const all = det([s0, s1, s2, s1, s2, s3, s2, s3, s4]);
      const g0 = det([p0, s1, s2, p1, s2, s3, p2, s3, s4]) / all;
      const g1 = det([s0, p0, s2, s1, p1, s3, s2, p2, s4]) / all;
      const g2 = det([s0, s1, p0, s1, s2, p1, s2, s3, p2]) / all;
      const row = Float64Array.from({ length }, (_, k) => g0 + g1 * k + g2 * k * k);
      known.set(place, row);
      return row;
    },
  };
}
