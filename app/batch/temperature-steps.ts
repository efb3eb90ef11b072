/** Temperatures of one kind of measurement differ by less than this, K. */
export const TEMPERATURES_ALIKE_K = 1;

/** So many different temperatures are a series by themselves. */
export const FEWEST_TEMPERATURES = 4;

/**
 * The lowest temperatures of groups that lie within TEMPERATURES_ALIKE_K, ascending. A temperature belongs to the last
 * step that is not above it.
 */
export function temperatureSteps(temperatures: readonly (number | null)[]): readonly number[] {
  const sorted = temperatures.filter((one) => one !== null).sort((a, b) => a - b);
  const steps: number[] = [];
  for (const one of sorted)
    if (steps.length === 0 || one - steps.at(-1)! > TEMPERATURES_ALIKE_K) steps.push(one);
  return steps;
}

/** The step that a temperature belongs to; null for none. */
export function stepOf(temperature: number | null, steps: readonly number[]): number | null {
  return temperature === null ? null : (steps.findLast((step) => step <= temperature) ?? null);
}
