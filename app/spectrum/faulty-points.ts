/** Points that no light made, seen from the data alone, before anything is fitted. */
export interface FaultyPoints {
  /** Isolated readings far off, places ascending. */
  readonly spikes: readonly number[];
  /** Stretches of one repeated value that jump at their ends: [first, last] place. */
  readonly dead: readonly (readonly [number, number])[];
  /** The value at which readings stop, and the places there and within three standard deviations of it. */
  readonly clipped: { readonly value: number; readonly places: readonly number[] } | null;
}

/** Off by so many standard deviations, where no absorption points: a line cannot do that. */
const SPIKE = 8;
/** And where absorption points: far enough for the neighbours to tell it from a line as wide as the step. */
const DIP = 15;
/** Points on either side that show the trend, beyond one neighbour. */
const TREND = 4;
const ROUNDS = 4;
/** More than this part of all points is no handful: such readings are noise of another kind, and stay. */
const MOST_SPIKES = 0.01;
/** Chance that equal neighbours anywhere are a coincidence. */
const CHANCE = 1e-6;
const SHORTEST_RUN = 4;
/** Digits have to resolve the noise, or equal neighbours say nothing. */
const COARSEST = 0.5;
const JUMP = 8;
const MARGIN = 3;

/**
 * What      Spikes: one reading (up to three against the absorption) off the line through four points on either side, beyond
 *           its neighbours, by 8 standard deviations away from absorption or 15 towards it; those points keep to their line,
 *           and the neighbours show less than a line as wide as the sampling step would leave in them (0.16 of it each for a
 *           Lorentz line). Dead and clipped readings: runs of one value longer than chance allows for the digits and noise.
 * Shapes    x, value, sigma, smooth (m): x ascending, sigma one standard deviation of a single reading.
 * Domain    `absorbs` is the sign of what absorption does to the value: -1 for transmitted light, +1 for absorption.
 *           No single reading is judged by a model, and nothing within the noise is: leaving out low readings would bias.
 */
export function faultyPoints(
  x: Float64Array,
  value: Float64Array,
  sigma: Float64Array,
  smooth: Float64Array,
  absorbs: 1 | -1,
): FaultyPoints {
  const runs = repeatedRuns(value, sigma);
  const limit = clippingLimit(value, runs);
  const dead = runs.filter(([first, last]) => value[first] !== limit && jumps(value, sigma, first, last));
  const out = new Uint8Array(value.length);
  for (const [first, last] of dead) out.fill(1, first, last + 1);
  const clipped = limit === null ? null : clippedPoints(value, sigma, smooth, limit, out);
  for (const place of clipped?.places ?? []) out[place] = 1;
  return { spikes: findSpikes(x, value, sigma, absorbs, out), dead, clipped };
}

function findSpikes(
  x: Float64Array,
  value: Float64Array,
  sigma: Float64Array,
  absorbs: 1 | -1,
  faulty: Uint8Array,
): number[] {
  const m = value.length;
  const out = faulty.slice();
  const found: number[] = [];
  for (let round = 0; round < ROUNDS; round++) {
    const before = found.length;
    for (let size = 1; size <= 3; size++)
      for (let i = 0; i + size <= m; i++) {
        // What is far off at all, against the nearest points, is rare; the rest is looked at there.
        if (out[i] === 1 || !standsOff(value, sigma, i, size)) continue;
        if (!isSpike(x, value, sigma, absorbs, out, i, size)) continue;
        for (let k = i; k < i + size; k++) {
          out[k] = 1;
          found.push(k);
        }
      }
    if (found.length === before) break;
  }
  return found.length > Math.max(3, MOST_SPIKES * m) ? [] : found.sort((a, b) => a - b);
}

function standsOff(value: Float64Array, sigma: Float64Array, i: number, size: number): boolean {
  const before = i > 0 ? value[i - 1]! : value[i + size]!;
  const after = i + size < value.length ? value[i + size]! : value[i - 1]!;
  const limit = 0.5 * SPIKE * sigma[i]!;
  const up = value[i]! - Math.max(before, after);
  const down = Math.min(before, after) - value[i]!;
  return up > limit || down > limit;
}

function isSpike(
  x: Float64Array,
  value: Float64Array,
  sigma: Float64Array,
  absorbs: 1 | -1,
  out: Uint8Array,
  i: number,
  size: number,
): boolean {
  const m = value.length;
  const places: number[] = [];
  const middle = (x[i]! + x[i + size - 1]!) / 2;
  const side = (from: number, step: 1 | -1): number | null => {
    let near: number | null = null;
    let count = 0;
    for (let k = from; k >= 0 && k < m && count <= TREND; k += step) {
      if (out[k] === 1) continue;
      if (count === 0) near = k;
      else places.push(k);
      count++;
    }
    return near;
  };
  const left = side(i - 1, -1);
  const right = side(i + size, 1);
  if (places.length < TREND) return false;
  const reach = Math.max(...places.map((k) => Math.abs(x[k]! - middle)));
  const s = sigma[i]!;
  const lineThrough = (at: readonly number[]): ((energy: number) => number) =>
    straightLine(at, (k) => (x[k]! - middle) / reach, value);
  let trend = lineThrough(places);
  const off = (k: number): number => value[k]! - trend(x[k]!);
  // One of them may be a spike itself.
  const odd = places.reduce((a, b) => (Math.abs(off(b)) > Math.abs(off(a)) ? b : a));
  const rest = places.filter((k) => k !== odd);
  if (Math.abs(off(odd)) > SPIKE * s && rest.length >= TREND) {
    places.splice(places.indexOf(odd), 1);
    trend = lineThrough(rest);
  }
  const least = Math.min(...Array.from({ length: size }, (_, k) => Math.abs(off(i + k))));
  const sign = Math.sign(off(i));
  for (let k = i; k < i + size; k++) if (Math.sign(off(k)) !== sign) return false;
  const towards = sign === absorbs;
  if (towards && size > 1) return false;
  if (!(least > (towards || size > 1 ? DIP : SPIKE) * s)) return false;
  if (places.some((k) => Math.abs(off(k)) > 0.15 * least + 3 * s)) return false;
  const near = [left, right].filter((k) => k !== null).map((k) => sign * off(k));
  if (!towards) return near.every((one) => Math.abs(one) < 0.3 * least + 3 * s);
  const together = near.reduce((sum, one) => sum + one, 0);
  return near.length === 2 && together < 0.06 * least + s && near.every((one) => one > -3 * s - 0.05 * least);

  function straightLine(
    at: readonly number[],
    u: (k: number) => number,
    y: Float64Array,
  ): (energy: number) => number {
    let [s0, s1, s2, t0, t1] = [0, 0, 0, 0, 0];
    for (const k of at) {
      const place = u(k);
      s0 += 1;
      s1 += place;
      s2 += place * place;
      t0 += y[k]!;
      t1 += place * y[k]!;
    }
    const det = s0 * s2 - s1 * s1;
    const a = (s2 * t0 - s1 * t1) / det;
    const b = (s0 * t1 - s1 * t0) / det;
    return (energy) => a + (b * (energy - middle)) / reach;
  }
}

/** [first, last] place of runs of one value that chance does not make. */
function repeatedRuns(value: Float64Array, sigma: Float64Array): [number, number][] {
  const m = value.length;
  const step = smallestStep(value);
  if (step === null) return [];
  const runs: [number, number][] = [];
  for (let first = 0; first < m;) {
    let last = first;
    while (last + 1 < m && value[last + 1] === value[first]) last++;
    const length = last - first + 1;
    if (length >= SHORTEST_RUN && step < COARSEST * sigma[first]!) {
      // k normal numbers round to one value with the probability step^(k-1) times the integral of their density to the k.
      const peak = step / (Math.sqrt(2 * Math.PI) * sigma[first]!);
      if ((m * peak ** (length - 1)) / Math.sqrt(length) < CHANCE) runs.push([first, last]);
    }
    first = last + 1;
  }
  return runs;
}

/** Smallest difference of two readings; null where all are the same. */
function smallestStep(value: Float64Array): number | null {
  const sorted = value.slice().sort();
  let least = Infinity;
  for (let i = 1; i < sorted.length; i++) {
    const gap = sorted[i]! - sorted[i - 1]!;
    if (gap > 1e-12 * Math.abs(sorted[i]!) && gap < least) least = gap;
  }
  return Number.isFinite(least) ? least : null;
}

function jumps(value: Float64Array, sigma: Float64Array, first: number, last: number): boolean {
  const before = first > 0 ? Math.abs(value[first - 1]! - value[first]!) / sigma[first]! : Infinity;
  const after = last + 1 < value.length ? Math.abs(value[last + 1]! - value[last]!) / sigma[last]! : Infinity;
  return Math.min(before, after) > JUMP;
}

/**
 * The highest or lowest reading of all where it repeats: a line is cut there. One stretch that jumps there from the middle of
 * all readings is dead.
 */
function clippingLimit(value: Float64Array, runs: readonly (readonly [number, number])[]): number | null {
  const sorted = value.slice().sort();
  const last = sorted.length - 1;
  const at = (limit: number): (readonly [number, number])[] =>
    runs.filter(([first]) => value[first] === limit);
  for (const limit of [sorted[last]!, sorted[0]!]) {
    const there = at(limit);
    if (there.length === 0) continue;
    const [first, end] = there[0]!;
    const half = 0.5 * Math.abs(sorted[last >> 1]! - limit);
    const neighbours = [value[first - 1], value[end + 1]].filter((one) => one !== undefined);
    if (there.length === 1 && neighbours.every((one) => Math.abs(one - limit) > half)) continue;
    return limit;
  }
  return null;
}

function clippedPoints(
  value: Float64Array,
  sigma: Float64Array,
  smooth: Float64Array,
  limit: number,
  dead: Uint8Array,
): FaultyPoints["clipped"] {
  const middle = value.slice().sort()[value.length >> 1]!;
  const sign = limit > middle ? 1 : -1;
  const places: number[] = [];
  // By the smoothed curve with a margin: the single reading would be left out by its noise.
  for (let i = 0; i < value.length; i++)
    if (dead[i] === 0 && sign * (smooth[i]! - limit) > -MARGIN * sigma[i]!) places.push(i);
  return { value: limit, places };
}
