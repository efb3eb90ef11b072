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

/** Zero above 0 of a function that rises from a value below it: doubling, then bisection to the last bits. */
function root(rising: (x: number) => number): number {
  let high = 1;
  while (rising(high) < 0 && high < 1e300) high *= 2;
  let low = 0;
  for (let turn = 0; turn < 200; turn++) {
    const middle = (low + high) / 2;
    if (middle === low || middle === high) break;
    if (rising(middle) < 0) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}
