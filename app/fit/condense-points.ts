import { LEAST_POINTS, NODES, type Panel } from "../solve/index.ts";
import type { Feature } from "./transmittance-grid.ts";

/** A column leaves exp(-REACH) = 6e-9 of itself outside the nodes' reach, and its products exp(-2 REACH), below rounding. */
const REACH = 19;
/** After the lines have moved: 1e-13 of the products is still good enough to go on with. */
const LEAST_REACH = 15;

/**
 * What      Panels of the points on each of which every line is, to double accuracy, a polynomial: the nearest pole
 *           E0 + i g lies outside the ellipse rho of the panel with NODES ln rho = REACH. Halved until that holds; panels
 *           with few points keep them.
 * Shapes    energy (m, ascending); features: lines and edges, width is twice the distance of the pole from the real axis.
 * Units     eV.
 * Domain    m >= 1; features with width 0 ask for every point around them.
 * Accuracy  tests/app/fit/condense-spectrum.test.ts.
 * Source    Bernstein's ellipse: Trefethen, Approximation Theory and Approximation Practice (2013), chapter 8.
 */
export function panelsFor(energy: Float64Array, features: readonly Feature[]): Panel[] {
  const out: Panel[] = [];
  const limit = Math.exp(REACH / NODES);
  const split = (first: number, end: number): void => {
    if (end - first < LEAST_POINTS) {
      out.push({ first, end, condensed: false });
      return;
    }
    const low = energy[first]!;
    const high = energy[end - 1]!;
    if (smallestEllipse(low, high, features) >= limit) {
      out.push({ first, end, condensed: true });
      return;
    }
    const middle = (low + high) / 2;
    let a = first;
    let b = end;
    while (b - a > 1) {
      const c = (a + b) >> 1;
      if (energy[c]! <= middle) a = c;
      else b = c;
    }
    split(first, b);
    split(b, end);
  };
  if (energy.length > 0) split(0, energy.length);
  return out;
}

/** Whether panels chosen for other features still serve these. */
export function panelsServe(
  energy: Float64Array,
  panels: readonly Panel[],
  features: readonly Feature[],
): boolean {
  const limit = Math.exp(LEAST_REACH / NODES);
  return panels.every(
    ({ first, end, condensed }) =>
      !condensed || smallestEllipse(energy[first]!, energy[end - 1]!, features) >= limit,
  );
}

/** rho of the largest ellipse about [low, high] that no feature's pole lies in. */
function smallestEllipse(low: number, high: number, features: readonly Feature[]): number {
  const middle = (low + high) / 2;
  const half = (high - low) / 2;
  let least = Infinity;
  for (const { energy, width } of features) {
    const x = energy - middle;
    const y = width / 2;
    // rho + 1/rho is the sum of the distances from the foci over half the panel.
    const left = x + half;
    const right = x - half;
    const sum = (Math.sqrt(left * left + y * y) + Math.sqrt(right * right + y * y)) / half / 2;
    if (sum < least) least = sum;
  }
  return least + Math.sqrt(least * least - 1);
}
