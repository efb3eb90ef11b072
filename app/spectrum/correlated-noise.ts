import { noiseContrasts, robustScale } from "./white-noise.ts";

/** How noise of one scale from point to point continues over many points. */
export interface NoiseCorrelation {
  /** Standard deviation of a single reading over the sigma that was handed in. */
  readonly scale: number;
  /** Points that count as one, for whatever is much wider than the correlation reaches. */
  readonly length: number;
}

const WHITE: NoiseCorrelation = { scale: 1, length: 1 };

/** Averages over up to so many points are compared. */
const LONGEST = 64;
/** Stretches of the spectrum that are judged apart: lines sit in some of them, the noise in all. */
const STRETCHES = 24;
/** The calm ones: rank, from below, of the stretch that speaks for the noise. */
const CALM = 1 / 3;
const FEWEST_CONTRASTS = 12;
/** Shifts of the blocks, so that all of their places are used. */
const SHIFTS = 4;
/** White noise stays below: pairs and fours, in variance over that of single readings. */
const PAIRS_ABOVE = 1.05;
const FOURS_ABOVE = 1.7;
/** A variance that grows by less from one length to the next has come to its end. */
const STEADY = 1.25;

/**
 * What      Whether neighbouring readings are independent, from the data alone. Averages over L = 1, 2, 4, ... points lose a
 *           variance 1/L of white noise; S(L) = L var(average of L), from the robust scale of sixth differences of such
 *           averages, is then the same for all L. Smoothed, interpolated or oversampled readings have a small S(1) that
 *           grows until L is longer than their correlation: the end of it is what a line as wide as many points sees. The
 *           variance of a single reading follows from sixth differences of points L apart.
 * Shapes    x, y, sigma (m): x strictly increasing; sigma the scale of independent noise, estimated or given.
 * Domain    each stretch of the spectrum is judged apart, and the third from below of their ratios counts, since lines make
 *           long differences too: dense sharp lines, seen with few points each, are then no correlated noise. White where
 *           there are too few points to tell (about 700).
 * Accuracy  about a fifth of the scatter, a factor of two in the length; what errors rest on in the end is the autocorrelation of the residuals.
 * Source    variances of averages over growing lengths: Allan, Proc. IEEE 54, 221 (1966); Flyvbjerg and Petersen, J. Chem.
 *           Phys. 91, 461 (1989).
 */
export function noiseCorrelation(x: Float64Array, y: Float64Array, sigma: Float64Array): NoiseCorrelation {
  const m = x.length;
  const first = scales(x, [contrastsOfAverages(x, y, sigma, 1)]);
  const grows = (k: number): boolean => growth[k]!.variance > STEADY * growth[k - 1]!.variance;
  const growth: { length: number; variance: number }[] = [];
  for (let length = 2; length <= LONGEST; length *= 2) {
    const next = scales(
      x,
      Array.from({ length: Math.min(SHIFTS, length) }, (_, k) =>
        contrastsOfAverages(x, y, sigma, length, Math.floor((k * length) / Math.min(SHIFTS, length))),
      ),
    );
    const ratio = calm(first, next);
    if (ratio === null) break;
    growth.push({ length, variance: ratio * ratio });
  }
  if (growth.length < 2 || growth[0]!.variance < PAIRS_ABOVE || growth[1]!.variance < FOURS_ABOVE)
    return WHITE;
  let end = 1;
  // Running means have lengths at which they let nothing through: one step without growth is not yet the end.
  while (end < growth.length - 1 && (grows(end) || grows(end + 1))) end++;
  const { length } = growth[end]!;
  // In units of the sigma handed in, over all points: that is what it stands for.
  const white = robustScale(noiseContrasts(x, y, sigma).z);
  const scaleApart = (step: number): number | null =>
    calm(
      first,
      scales(
        x,
        Array.from({ length: SHIFTS }, (_, k) =>
          contrastsOfOnesApart(x, y, sigma, step, Math.floor((k * step) / SHIFTS)),
        ),
      ),
    );
  // Averages settle a little before the correlation has ended.
  const apart = scaleApart(2 * length) ?? scaleApart(length);
  if (apart === null || !(white > 0) || m === 0) return WHITE;
  const scale = Math.max(1, apart) * white;
  const total = Math.max(growth[end]!.variance, growth[end - 1]!.variance) * white * white;
  return { scale, length: Math.max(1, total / (scale * scale)) };
}

interface Placed {
  readonly at: Float64Array;
  readonly z: Float64Array;
}

/** Contrasts of averages over `length` neighbours, times the root of `length`. */
function contrastsOfAverages(
  x: Float64Array,
  y: Float64Array,
  sigma: Float64Array,
  length: number,
  shift = 0,
): Placed {
  const count = Math.max(0, Math.floor((x.length - shift) / length));
  const at = new Float64Array(count);
  const value = new Float64Array(count);
  const scale = new Float64Array(count);
  for (let b = 0; b < count; b++)
    for (let i = shift + b * length; i < shift + (b + 1) * length; i++) {
      at[b] = at[b]! + x[i]! / length;
      value[b] = value[b]! + y[i]! / length;
      scale[b] = scale[b]! + sigma[i]! / length;
    }
  const root = Math.sqrt(length);
  const { order, z } = noiseContrasts(at, value, scale);
  return { at: at.subarray(order >> 1), z: z.map((one) => one * root) };
}

/** Contrasts of single readings `step` points apart. */
function contrastsOfOnesApart(
  x: Float64Array,
  y: Float64Array,
  sigma: Float64Array,
  step: number,
  shift: number,
): Placed {
  const count = Math.max(0, Math.floor((x.length - 1 - shift) / step) + 1);
  const pick = (from: Float64Array): Float64Array =>
    Float64Array.from({ length: count }, (_, k) => from[shift + k * step]!);
  const at = pick(x);
  const { order, z } = noiseContrasts(at, pick(y), pick(sigma));
  return { at: at.subarray(order >> 1), z };
}

/** Robust scale in each stretch; NaN where it holds too few contrasts. */
function scales(x: Float64Array, sets: readonly Placed[]): Float64Array {
  const low = x[0] ?? 0;
  const span = (x[x.length - 1] ?? 0) - low;
  const members: number[][] = Array.from({ length: STRETCHES }, () => []);
  for (const { at, z } of sets)
    for (let i = 0; i < z.length; i++) {
      const stretch = Math.min(STRETCHES - 1, Math.floor(((at[i]! - low) / span) * STRETCHES));
      members[stretch]!.push(z[i]!);
    }
  return Float64Array.from(members, (one) => (one.length < FEWEST_CONTRASTS ? NaN : robustScale(one)));
}

/** The calm rank of the ratios; null where too few stretches have one. */
function calm(below: Float64Array, above: Float64Array): number | null {
  const ratios = above
    .map((value, i) => value / below[i]!)
    .filter(Number.isFinite)
    .sort();
  return ratios.length < STRETCHES / 2 ? null : ratios[Math.floor(CALM * ratios.length)]!;
}
