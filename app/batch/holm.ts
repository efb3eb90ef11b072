/**
 * What      Probabilities of m tests corrected so that the chance of any false finding stays below the level:
 *           p'_(j) = max over i <= j of min(1, (m - i + 1) p_(i)), p_(1) <= p_(2) <= ...
 * Shapes    p, return (m), in the order given.
 * Domain    NaN (a test that could not be made) stays NaN and does not count.
 * Source    Holm, Scand. J. Stat. 6, 65 (1979); adjusted form: Wright, Biometrics 48, 1005 (1992).
 */
export function holm(p: readonly number[]): number[] {
  const order = p.map((_, i) => i).filter((i) => !Number.isNaN(p[i]!));
  order.sort((i, j) => p[i]! - p[j]! || i - j);
  const out = p.map(() => NaN);
  let highest = 0;
  order.forEach((i, rank) => {
    highest = Math.max(highest, Math.min(1, (order.length - rank) * p[i]!));
    out[i] = highest;
  });
  return out;
}
