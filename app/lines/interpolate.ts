/**
 * What      A measured curve brought onto another grid: piecewise cubic Hermite interpolation with slopes limited so that
 *           no new extremum appears between the points.
 * Shapes    sourceEnergies, sourceValues (m, m >= 2, energies strictly ascending); energies (any order);
 *           out[i] for from <= i < to. Returns how many energies lie outside the source: they get the end value, and the
 *           caller must say so.
 * Accuracy  exact for straight lines; third order for smooth monotone curves.
 * Source    Fritsch and Butland, SIAM J. Sci. Stat. Comput. 5, 300 (1984), slope formula of section 2.
 */
export function interpolateColumn(
  sourceEnergies: Float64Array,
  sourceValues: Float64Array,
  energies: Float64Array,
  from: number,
  to: number,
  out: Float64Array,
): number {
  const m = sourceEnergies.length;
  const slopes = hermiteSlopes(sourceEnergies, sourceValues);
  let outside = 0;
  for (let i = from; i < to; i++) {
    const energy = energies[i]!;
    if (!(energy >= sourceEnergies[0]!)) {
      outside++;
      out[i] = sourceValues[0]!;
      continue;
    }
    if (energy > sourceEnergies[m - 1]!) {
      outside++;
      out[i] = sourceValues[m - 1]!;
      continue;
    }
    let low = 0;
    let high = m - 1;
    while (high - low > 1) {
      const half = (low + high) >> 1;
      if (sourceEnergies[half]! <= energy) low = half;
      else high = half;
    }
    const step = sourceEnergies[high]! - sourceEnergies[low]!;
    const t = (energy - sourceEnergies[low]!) / step;
    const s = 1 - t;
    out[i] =
      s * s * ((1 + 2 * t) * sourceValues[low]! + t * step * slopes[low]!) +
      t * t * ((1 + 2 * s) * sourceValues[high]! - s * step * slopes[high]!);
  }
  return outside;
}

function hermiteSlopes(x: Float64Array, y: Float64Array): Float64Array {
  const m = x.length;
  const slopes = new Float64Array(m);
  const secant = (i: number): number => (y[i + 1]! - y[i]!) / (x[i + 1]! - x[i]!);
  slopes[0] = secant(0);
  slopes[m - 1] = secant(m - 2);
  for (let i = 1; i < m - 1; i++) {
    const left = secant(i - 1);
    const right = secant(i);
    if (left * right <= 0) continue;
    const leftStep = x[i]! - x[i - 1]!;
    const rightStep = x[i + 1]! - x[i]!;
    const weight = (leftStep + 2 * rightStep) / (3 * (leftStep + rightStep));
    slopes[i] = (left * right) / (weight * right + (1 - weight) * left);
  }
  return slopes;
}
