import { SMEARED, type SpectrumFit } from "../fit/index.ts";

/** A share of the law's strength that stands between the lines. */
export interface SmearedShare {
  /** `n = 13` or `the gap`. */
  readonly at: string;
  readonly share: number;
}

/** What the smeared columns of a fit hold, as shares of the strength law of its lines; empty where there are none. */
export function smearedShares(fit: SpectrumFit): SmearedShare[] {
  const shares = fit.problem.spec.tail?.strengthShare ?? new Float64Array(0);
  const whole = shares.reduce((sum, share, j) => sum + share * fit.lines.area[j]!, 0);
  return fit.background
    .filter((one) => one.term === SMEARED)
    .map(({ name, value }) => ({
      at: name === "continuum" ? "the gap" : name.replace("n", "n = "),
      share: value / whole,
    }));
}

/** Shares of a loss may stray this far below none, above all, and back from one n to the next. */
const STRAY = 0.4;

/**
 * Whether the shares are those of a series that fades: none is missing more than it had, none holds much more than the law,
 * and what is lost at one n is not found again above. Columns that describe some other misfit (a stiff background, a foreign
 * line) swing from one sign to the other.
 */
export function fadesUpward(shares: readonly SmearedShare[]): boolean {
  return shares.every(
    ({ share }, k) =>
      share > -STRAY && share < 1 + STRAY && (k === 0 || share > shares[k - 1]!.share - STRAY),
  );
}
