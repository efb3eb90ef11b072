/** What the numbers of a column say by themselves. NaN cells are passed over. */
export interface ValueLook {
  readonly count: number;
  readonly min: number;
  readonly max: number;
  readonly median: number;
  /** Share of steps in the more common direction among the steps that are not zero, 0.5..1. */
  readonly monotonic: number;
  /** 0, 1, 2 ... or 1, 2, 3 ...: a row or pixel number. */
  readonly counting: boolean;
}

export function lookAtValues(values: Float64Array): ValueLook {
  const finite = values.filter((value) => Number.isFinite(value));
  const count = finite.length;
  const sorted = finite.slice().sort();
  let up = 0;
  let down = 0;
  let counting = count > 2 && (finite[0] === 0 || finite[0] === 1);
  for (let i = 1; i < count; i++) {
    const step = finite[i]! - finite[i - 1]!;
    if (step > 0) up++;
    else if (step < 0) down++;
    if (step !== 1) counting = false;
  }
  return {
    count,
    min: count > 0 ? sorted[0]! : NaN,
    max: count > 0 ? sorted[count - 1]! : NaN,
    median: count > 0 ? sorted[count >> 1]! : NaN,
    monotonic: up + down === 0 ? 0.5 : Math.max(up, down) / (up + down),
    counting,
  };
}

/**
 * Which way sharp features point, up (1), down (-1) or neither (0): the distances of the 1st and 99th percentile from the median of the readings,
 * after a running median over a tenth of the points is taken off. Lines are dips of transmission and peaks of
 * absorption; a difference below a third decides nothing.
 */
export function featureDirection(readings: Float64Array): -1 | 0 | 1 {
  const values = readings.filter((value) => Number.isFinite(value));
  const m = values.length;
  if (m < 20) return 0;
  const half = Math.max(5, Math.floor(m / 20));
  const rest = new Float64Array(m);
  const stride = Math.max(1, Math.floor(m / 200));
  for (let i = 0; i < m; i += stride) {
    const local = values.slice(Math.max(0, i - half), Math.min(m, i + half + 1)).sort();
    const base = local[local.length >> 1]!;
    for (let j = i; j < Math.min(m, i + stride); j++) rest[j] = values[j]! - base;
  }
  rest.sort();
  const middle = rest[m >> 1]!;
  const above = rest[Math.floor(0.99 * (m - 1))]! - middle;
  const below = middle - rest[Math.ceil(0.01 * (m - 1))]!;
  if (above > 1.5 * below) return 1;
  if (below > 1.5 * above) return -1;
  return 0;
}
