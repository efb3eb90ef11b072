import { envelopeRatio } from "./envelope.ts";

/** What the power law of the widths is taken of. */
export type WidthBase = "n" | "n-delta" | "p-envelope";
export type WidthFloorKind = "lorentzian" | "gaussian";

/**
 * What      Width law G_n = floor + G_1 b^-k (Lorentzian floor, widths add) or sqrt(floor^2 + (G_1 b^-k)^2) (Gaussian
 *           floor, adds in quadrature). Base b: n; n - delta; or the p envelope b = [n^5/(n^2 - 1)]^(1/3), so that
 *           k = 3 is exactly G_1 (n^2 - 1)/n^5 and b -> n at high n.
 * Shapes    out (WIDTH.size): value and partial derivatives at the indices of WIDTH.
 * Units     floor, coefficient G_1 and value in one energy unit (eV), full widths at half maximum.
 * Domain    b > 0 (p envelope: n > 1). delta is the total defect delta_n of this n; it is read for base n-delta only.
 *           Floor and term both 0 in quadrature: derivatives as in the limit floor -> 0 first.
 * Accuracy  rounding only.
 * Source    Kazimierczuk et al., Nature 514, 343 (2014) (n^-3); Stolz et al., New J. Phys. 20, 023019 (2018)
 *           ((n^2 - 1)/n^5), both cited from memory; the general exponent is ours.
 */
export interface WidthParameters {
  readonly floor: number;
  readonly coefficient: number;
  readonly exponent: number;
  readonly base: WidthBase;
  readonly floorKind: WidthFloorKind;
}

/** Places in the output of `widthLaw`. */
export const WIDTH = {
  width: 0,
  byFloor: 1,
  byCoefficient: 2,
  byExponent: 3,
  byDefect: 4,
  byN: 5,
  /** The term G_1 b^-k alone: the homogeneous width. */
  term: 6,
  size: 7,
} as const;

export function widthLaw(n: number, defect: number, parameters: WidthParameters, out: Float64Array): void {
  const { floor, coefficient, exponent, base, floorKind } = parameters;
  const b = widthBase(n, defect, base);
  const power = Math.pow(b, -exponent);
  const term = coefficient * power;
  const termByExponent = -term * Math.log(b);
  const termByBase = (-exponent * term) / b;
  // d ln b/dn of the p envelope is [5/n - 2 n/(n^2 - 1)]/3.
  const baseByN = base === "p-envelope" ? (b * (5 / n - (2 * n) / (n * n - 1))) / 3 : 1;
  let floorWeight = 1;
  let termWeight = 1;
  let width = floor + term;
  if (floorKind === "gaussian") {
    width = Math.hypot(floor, term);
    floorWeight = width > 0 ? floor / width : 0;
    termWeight = width > 0 ? term / width : 1;
  }
  out[WIDTH.width] = width;
  out[WIDTH.byFloor] = floorWeight;
  out[WIDTH.byCoefficient] = termWeight * power;
  out[WIDTH.byExponent] = termWeight * termByExponent;
  out[WIDTH.byDefect] = base === "n-delta" ? -termWeight * termByBase : 0;
  out[WIDTH.byN] = termWeight * termByBase * baseByN;
  out[WIDTH.term] = term;
}

/** The base b of the width law. */
export function widthBase(n: number, defect: number, base: WidthBase): number {
  if (base === "n") return n;
  if (base === "n-delta") return n - defect;
  return n / Math.cbrt(envelopeRatio(n));
}
