/** Entries `at` of a vector. */
export function selectVector(values: ArrayLike<number>, at: readonly number[]): Float64Array {
  return Float64Array.from(at, (i) => values[i]!);
}

/** Rows and columns `at` of a square matrix: the marginal covariance of some of the lines. */
export function selectMatrix(matrix: Float64Array, size: number, at: readonly number[]): Float64Array {
  const out = new Float64Array(at.length * at.length);
  for (let i = 0; i < at.length; i++) {
    for (let j = 0; j < at.length; j++) out[i * at.length + j] = matrix[at[i]! * size + at[j]!]!;
  }
  return out;
}

/** Places of the lines with min <= n <= max. */
export function placesWithin(n: readonly number[], min: number, max: number): number[] {
  const places: number[] = [];
  n.forEach((one, i) => {
    if (one >= min && one <= max) places.push(i);
  });
  return places;
}
