import { assumption, doubt, type Note } from "../base/index.ts";
import { noiseCorrelation } from "./correlated-noise.ts";
import { estimateNoise } from "./estimate-noise.ts";
import type { Points } from "./gather-points.ts";
import { count } from "./gather-points.ts";
import { smoothCurve } from "./smooth-curve.ts";
import type { ReadingChoices, Spectrum } from "./spectrum.ts";

export interface PointNoise {
  readonly source: Spectrum["noise"]["source"];
  /** One standard deviation per point in the unit of the value; above zero everywhere. */
  readonly sigma: Float64Array;
  /** The value without its noise, for weights. */
  readonly smooth: Float64Array;
  /** Neighbours that count as one; 1 where they are independent. */
  readonly pointsAsOne: number;
  readonly notes: readonly Note[];
}

const ABOUT = "fit";
/** So many given neighbours stand for a missing standard deviation. */
const NEIGHBOURS = 11;

type Independent = Omit<PointNoise, "pointsAsOne">;

/**
 * The noise of every point, and whether neighbours share it. Where they do, an estimate from point to point is too small and
 * is brought to the scatter of single readings; a sigma that is given stays.
 */
export function pointNoise(
  points: Points,
  fixed: number | null,
  counts: boolean,
  detector: ReadingChoices["noise"] | null = null,
): PointNoise {
  const { energy_eV, value } = points;
  const noise = independentNoise(points, fixed, counts, detector);
  const { scale, length } = noiseCorrelation(energy_eV, value, noise.sigma);
  if (!(length > LEAST_LENGTH)) return { ...noise, pointsAsOne: 1 };
  const estimated = noise.source === "estimated";
  const sigma = estimated ? noise.sigma.map((one) => scale * one) : noise.sigma;
  const root = Math.sqrt(length);
  const note = doubt(
    "noise-correlated",
    ABOUT,
    `neighbouring points are not independent (smoothed, interpolated or oversampled): about ${length.toPrecision(2)} of them count as one where lines are sought${estimated ? `, and a single reading scatters ${scale.toPrecision(2)} times as much as neighbours differ (${shortest(sigma)} in the median)` : ""}`,
    "fit the readings as they were measured, before smoothing or interpolation; set noise.sigma where the scatter of a reading is known",
  );
  return {
    ...noise,
    sigma,
    smooth: smoothCurve(
      value,
      sigma.map((one) => root * one),
    ),
    pointsAsOne: length,
    notes: [...noise.notes, note],
  };
}

/** Fewer neighbours than this that count as one are within what the estimate can tell. */
const LEAST_LENGTH = 1.25;

/** `fixed`: the protocol's sigma in the unit of the value, null where it says nothing; `counts`: it is one of counts. */
function independentNoise(
  points: Points,
  fixed: number | null,
  counts: boolean,
  detector: ReadingChoices["noise"] | null,
): Independent {
  const { energy_eV, value, relative, sigma } = points;
  if (fixed === null && sigma === null && detector !== null && detector.gain_e_per_count !== null) {
    const known = countsNoise(points, detector.gain_e_per_count, detector);
    if (known !== null) return known;
  }
  if (fixed !== null) {
    const all = value.map((T, i) => {
      // A reading of counts has the noise of S and of F in it: sigma_T = sigma sqrt(1 + T^2)/(F - D).
      const factor = counts ? Math.sqrt(1 + T * T) / points.divisor[i]! : 1;
      return fixed * relative[i]! * factor;
    });
    return { source: "protocol", sigma: all, smooth: smoothCurve(value, all), notes: [] };
  }
  const notes: Note[] = [];
  if (sigma !== null) {
    const missing = sigma.reduce((sum, one) => sum + (one > 0 ? 0 : 1), 0);
    if (missing > 0)
      notes.push(
        doubt(
          "sigma-missing",
          ABOUT,
          missing === sigma.length
            ? "the column of standard deviations holds none above zero: the noise is estimated from the data instead"
            : `${count(missing, "point")} of ${sigma.length} have a standard deviation of zero or none, which means unknown and not exact: each takes the median of its ${NEIGHBOURS} nearest given ones`,
          "complete the column, or set noise.sigma",
        ),
      );
    if (missing < sigma.length) {
      const filled = fillMissing(sigma);
      return { source: "column", sigma: filled, smooth: smoothCurve(value, filled), notes };
    }
  }
  const estimate = estimateNoise(energy_eV, value, relative);
  if (estimate.sigma.some((one) => !(one > 0))) {
    const range = Math.max(spread(value), Number.MIN_VALUE);
    notes.push(
      doubt(
        "noise-not-seen",
        ABOUT,
        "the data show no noise from point to point (smoothed or computed): errors cannot be estimated from them, and a billionth of the signal's range stands in",
        "set noise.sigma, or fit the unsmoothed readings",
      ),
    );
    const sigmas = relative.map((factor) => 1e-9 * range * factor);
    return { source: "estimated", sigma: sigmas, smooth: value.slice(), notes };
  }
  const varies = estimate.varies ? "it changes with the height of the signal" : "the same for all points";
  notes.push(
    assumption(
      "noise-estimated",
      ABOUT,
      `no standard deviation is given; the noise from point to point is estimated from the data: ${shortest(estimate.sigma)} (median, in the unit of the reading), ${varies}`,
      "name a column with signal.sigma_column, or set noise.sigma",
    ),
  );
  return { source: "estimated", sigma: estimate.sigma, smooth: estimate.smooth, notes };
}

/** The smoothed light and its noise settle at once. */
const ROUNDS = 3;

/**
 * What      Shot and read noise of T = (S - D)/(F - D): with v(x) = (x/gain + r^2)/N the variance of a reading x of counts,
 *           var T = [v(S) + T^2 v(F) + (1 - T)^2 v(D)]/(F - D)^2, the last only with a dark reading. S is that of the
 *           smoothed T: from the single reading it would follow its noise and bias the weights.
 * Units     gain in electrons a count, read noise r in counts; N readings are averaged in each value (not summed).
 * Source    propagation of the counts' variances, with the dark part written out: dT/dD = (T - 1)/(F - D).
 */
function countsNoise(points: Points, gain: number, detector: ReadingChoices["noise"]): Independent | null {
  const { value, divisor, dark, relative } = points;
  const variance = (counts: number): number =>
    (Math.max(0, counts) / gain + detector.read_counts ** 2) / detector.accumulations;
  const sigmaOf = (T: number, i: number): number => {
    const zero = dark?.[i] ?? 0;
    const signal = variance(T * divisor[i]! + zero);
    const reference = variance(divisor[i]! + zero);
    const background = dark === null ? 0 : (1 - T) ** 2 * variance(zero);
    const sum = signal + T * T * reference + background;
    return (Math.sqrt(sum) / divisor[i]!) * relative[i]!;
  };
  let smooth = value;
  let sigma = value.map(sigmaOf);
  if (!sigma.some((one) => one > 0)) return null;
  for (let round = 0; round < ROUNDS; round++) {
    // A reading of nothing has no shot noise: it gets that of its neighbours.
    smooth = smoothCurve(value, fillMissing(sigma));
    sigma = smooth.map(sigmaOf);
  }
  const notes =
    detector.accumulations > 1
      ? [
          assumption(
            "counts-averaged",
            ABOUT,
            `each reading of counts is taken for the mean of ${detector.accumulations} exposures, so its variance is divided by that`,
            "where the file holds sums, set noise.accumulations=1 and noise.read_counts to the read noise times the root of the number of exposures",
          ),
        ]
      : [];
  return { source: "protocol", sigma: fillMissing(sigma), smooth, notes };
}

/** Gaps filled with the median of the nearest given values, in order of place. */
function fillMissing(sigma: Float64Array): Float64Array {
  const given: number[] = [];
  for (let i = 0; i < sigma.length; i++) if (sigma[i]! > 0) given.push(i);
  const out = sigma.slice();
  let first = 0;
  for (let i = 0; i < sigma.length; i++) {
    if (sigma[i]! > 0) continue;
    // `first` is the start of the nearest run of given places; it only moves up.
    while (first + NEIGHBOURS < given.length && i - given[first]! > given[first + NEIGHBOURS]! - i) first++;
    const near = given
      .slice(first, first + NEIGHBOURS)
      .map((place) => sigma[place]!)
      .sort((a, b) => a - b);
    out[i] = near[near.length >> 1]!;
  }
  return out;
}

function spread(values: Float64Array): number {
  let low = Infinity;
  let high = -Infinity;
  for (const value of values) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  return high - low;
}

export function median(values: Float64Array): number {
  const sorted = values.filter((value) => Number.isFinite(value)).sort();
  return sorted.length === 0 ? NaN : sorted[sorted.length >> 1]!;
}

function shortest(sigma: Float64Array): string {
  return String(Number(median(sigma).toPrecision(3)));
}
