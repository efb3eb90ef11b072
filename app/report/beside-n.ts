/** Samples lie this much apart, as a share of n, where there is room. */
const APART = 0.006;
/** But never so far that a point could be taken for the next n. */
const FARTHEST = 0.3;

/** Where sample i of `count` stands at n, so that intervals at one n can be told apart. */
export function besideN(n: number, i: number, count: number): number {
  const middle = (count - 1) / 2;
  if (middle <= 0) return n;
  const whole = Math.min(APART * n * middle, FARTHEST);
  return n + (whole * (i - middle)) / middle;
}
