import { chiSquareSurvival, fSurvival, normalCdf, normalQuantile } from "../solve/index.ts";

/** Two-sided probability of |t| with any number of degrees of freedom; Infinity is the normal distribution. */
export function twoSided(t: number, degreesOfFreedom: number): number {
  if (Number.isNaN(t)) return NaN;
  if (degreesOfFreedom === Infinity) return 2 * normalCdf(-Math.abs(t));
  return fSurvival(t * t, 1, degreesOfFreedom);
}

/** t with P(|T| > t) = p. */
export function twoSidedQuantile(p: number, degreesOfFreedom: number): number {
  if (degreesOfFreedom === Infinity) return -normalQuantile(p / 2);
  return root((t) => p - twoSided(t, degreesOfFreedom));
}

/** x with P(chi square < x) = p. */
export function chiSquareQuantile(p: number, degreesOfFreedom: number): number {
  return root((x) => 1 - p - chiSquareSurvival(x, degreesOfFreedom));
}

/**
 * Zero above 0 of a function that rises from a value below it: doubling, then false position that halves the weight of
 * an end that stays (Dowell and Jarratt, BIT 11, 168 (1971)), with a bisection whenever the bracket has not halved.
 */
function root(rising: (x: number) => number): number {
  let low = 0;
  let atLow = rising(low);
  let high = 1;
  let atHigh = rising(high);
  while (atHigh < 0 && high < 1e300) {
    low = high;
    atLow = atHigh;
    high *= 2;
    atHigh = rising(high);
  }
  let side = 0;
  for (let turn = 0; turn < 200 && high - low > 4e-16 * high; turn++) {
    const width = high - low;
    let middle = high - (atHigh * width) / (atHigh - atLow);
    if (!(middle > low && middle < high) || turn % 3 === 2) middle = low + width / 2;
    if (middle === low || middle === high) break;
    const at = rising(middle);
    if (at === 0) return middle;
    if (at < 0) {
      low = middle;
      atLow = at;
      if (side === -1) atHigh /= 2;
      side = -1;
    } else {
      high = middle;
      atHigh = at;
      if (side === 1) atLow /= 2;
      side = 1;
    }
  }
  return (low + high) / 2;
}
