import { envelopeRatio } from "./envelope.ts";

/** cubic: b^-3; p-envelope: (b^2 - 1)/b^5; sheet: (b - 1/2)^-3. */
export type StrengthEnvelope = "cubic" | "p-envelope" | "sheet";
export type StrengthBase = "n" | "n-delta";

/**
 * What      Strength law A_n = C s(b): areas of the lines against n, for base b = n or n - delta. For the sheet the
 *           defect is the total shift from n and so holds the 1/2 already: with base n-delta its law is (n-delta)^-3.
 * Shapes    out (STRENGTH.size): s and its derivatives at the indices of STRENGTH; multiply by C.
 * Units     dimensionless (A_n and C in eV times the unit of alpha).
 * Domain    b > 0, b > 1/2 for the sheet; the p envelope is 0 at b = 1.
 * Accuracy  rounding only.
 * Source    Elliott, Phys. Rev. 108, 1384 (1957); Shinada and Sugano, J. Phys. Soc. Jpn. 21, 1936 (1966).
 */
export const STRENGTH = { strength: 0, byDefect: 1, byN: 2, size: 3 } as const;

export function strengthLaw(
  n: number,
  defect: number,
  envelope: StrengthEnvelope,
  base: StrengthBase,
  out: Float64Array,
): void {
  const shift = base === "n-delta" ? defect : envelope === "sheet" ? 0.5 : 0;
  const b = n - shift;
  const cube = 1 / (b * b * b);
  let value = cube;
  let slope = (-3 * cube) / b;
  if (envelope === "p-envelope") {
    value = cube * envelopeRatio(b);
    // d/db (b^-3 - b^-5)
    slope = (-3 * cube + (5 * cube) / (b * b)) / b;
  }
  out[STRENGTH.strength] = value;
  out[STRENGTH.byDefect] = base === "n-delta" ? -slope : 0;
  out[STRENGTH.byN] = slope;
}

/** s alone. */
export function strength(n: number, defect: number, envelope: StrengthEnvelope, base: StrengthBase): number {
  const out = new Float64Array(STRENGTH.size);
  strengthLaw(n, defect, envelope, base, out);
  return out[STRENGTH.strength]!;
}
