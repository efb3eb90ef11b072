/** (n^2 - 1)/n^2: what the strength of the p series has beyond n^-3. */
export function envelopeRatio(n: number): number {
  return ((n - 1) * (n + 1)) / (n * n);
}
