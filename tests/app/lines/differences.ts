/** First derivative by central differences of eighth order; `step` is of the size on which f bends, divided by 100. */
export function derivative(f: (x: number) => number, x: number, step: number): number {
  const odd = (k: number): number => f(x + k * step) - f(x - k * step);
  return ((4 / 5) * odd(1) - (1 / 5) * odd(2) + (4 / 105) * odd(3) - (1 / 280) * odd(4)) / step;
}

/** Difference measured against a scale: |a - b| / max(|b|, floor). */
export function relative(a: number, b: number, floor = 0): number {
  return Math.abs(a - b) / Math.max(Math.abs(b), floor);
}
