/**
 * A number as a paper would give it. `value` is null where it is not determined; `sigma` is one standard
 * uncertainty in the same unit (null unknown, 0 exact); `low` and `high` bound the interval at the protocol's level.
 */
export interface Quantity {
  readonly value: number | null;
  readonly sigma: number | null;
  readonly low: number | null;
  readonly high: number | null;
}

export const NOT_DETERMINED: Quantity = { value: null, sigma: null, low: null, high: null };

/** Symmetric interval value +- factor sigma (factor 1 for the 68.3 % level of a normal distribution). */
export function symmetric(value: number, sigma: number | null, factor = 1): Quantity {
  if (!Number.isFinite(value)) return NOT_DETERMINED;
  if (sigma === null || !Number.isFinite(sigma)) return { value, sigma: null, low: null, high: null };
  return { value, sigma, low: value - factor * sigma, high: value + factor * sigma };
}
