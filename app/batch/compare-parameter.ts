import { type Quantity } from "../base/index.ts";
import type {
  ComparedDifference,
  ComparedParameter,
  ComparedPart,
  ComparedSample,
  ComparisonChoices,
} from "../protocol/index.ts";
import { chiSquareSurvival } from "../solve/index.ts";
import { detectableDifference, effectiveDegrees } from "./detectable.ts";
import { holm } from "./holm.ts";
import { twoSided, twoSidedQuantile } from "./quantiles.ts";
import { derSimonianLaird, pauleMandel, pooledMean, tauInterval } from "./random-effects.ts";
import { commonMean, groupMeans, straightLine, type Observations } from "./weighted-fit.ts";

interface Batch {
  readonly name: string;
  readonly places: readonly number[];
  readonly mean: number;
  /** Of the mean, with the scatter within batches. */
  readonly variance: number;
  /** The part of it that comes from the estimated scatter. */
  readonly scatterVariance: number;
}

/**
 * What      One parameter over samples i in batches b: y_bi = mean + B_b + W_bi + error_bi with known standard errors.
 *           tau_within from all batches with several samples (Paule-Mandel, one mean a batch), batch means with weights
 *           1/(sigma_i^2 + tau_within^2), tau_between from those means. Differences of batches are tested with Student's
 *           t and the degrees of freedom that the estimated scatter leaves; with one sample a batch the scatter within
 *           is unknown and the stated errors stand alone.
 * Units     those of the parameter.
 * Source    random-effects.ts, detectable.ts, holm.ts; Birge, Phys. Rev. 40, 207 (1932).
 */
export function compareParameter(
  name: ComparedParameter,
  unit: string,
  samples: readonly ComparedSample[],
  choices: ComparisonChoices,
  againstUnit: string,
): ComparedPart {
  const taking = samples.flatMap((sample): OneNumber[] => {
    const one = sample.parameters[name];
    return one?.left_out === null && one.value !== null && one.sigma !== null
      ? [{ batch: sample.batch, value: one.value, sigma: one.sigma, against: sample.against }]
      : [];
  });
  return { name, unit, ...compareNumbers(taking, choices, againstUnit) };
}

/** A number of one sample with its standard error. */
export interface OneNumber {
  readonly batch: string;
  readonly value: number;
  readonly sigma: number;
  readonly against: number | null;
}

/** The same for numbers of any origin. */
export function compareNumbers(
  taking: readonly OneNumber[],
  choices: ComparisonChoices,
  againstUnit: string,
): Omit<ComparedPart, "name" | "unit"> {
  const n = taking.length;
  const y = Float64Array.from(taking, ({ value }) => value);
  const variances = Float64Array.from(taking, ({ sigma }) => sigma ** 2);
  const names = [...new Set(taking.map((sample) => sample.batch))];
  const groups = taking.map((sample) => names.indexOf(sample.batch));
  const factor = twoSidedQuantile(1 - choices.level, Infinity);

  const byBatch = groupMeans(y, variances, groups, names.length);
  const withinDof = n - names.length;
  const within2 = withinDof > 0 ? pauleMandel(byBatch) : 0;
  const batches = names.map((batch, b): Batch => {
    const places = groups.flatMap((group, i) => (group === b ? [i] : []));
    const own = Float64Array.from(places, (i) => y[i]!);
    const errors = Float64Array.from(places, (i) => variances[i]!);
    const { mean, sigma } = pooledMean(own, errors, within2);
    const variance = sigma ** 2;
    // Share of each weight that the scatter has: sum w^2 tau^2/(sum w)^2.
    let weights = 0;
    let squares = 0;
    for (const v of errors) {
      weights += 1 / (v + within2);
      squares += within2 / (v + within2) ** 2;
    }
    return { name: batch, places, mean, variance, scatterVariance: squares / weights ** 2 };
  });
  const means = Float64Array.from(batches, (batch) => batch.mean);
  const meanVariances = Float64Array.from(batches, (batch) => batch.variance);
  const overBatches = commonMean(means, meanVariances);
  const between2 = batches.length > 1 ? pauleMandel(overBatches) : NaN;
  const pooled = batches.length > 0 ? pooledMean(means, meanVariances, finite(between2) ?? 0) : null;

  const quantity = (value: number, sigma: number): Quantity => ({
    value,
    sigma,
    low: value - factor * sigma,
    high: value + factor * sigma,
  });
  const scatter = (observations: Observations, tau2: number, dof: number): ComparedPart["within"] => {
    if (!(dof > 0) || Number.isNaN(tau2)) return { tau: null, low: null, high: null, dof: Math.max(0, dof) };
    const [low, high] = tauInterval(observations, choices.level);
    return { tau: Math.sqrt(tau2), low: Math.sqrt(low), high: Math.sqrt(high), dof };
  };
  const compare = (first: Batch, second: Batch): Tested => {
    const variance = first.variance + second.variance;
    const estimated = first.scatterVariance + second.scatterVariance;
    return test(
      second.mean - first.mean,
      Math.sqrt(variance),
      effectiveDegrees(variance, [{ variance: estimated, degreesOfFreedom: withinDof }]),
    );
  };
  const list = (pairs: readonly (readonly [Batch, Batch])[]): ComparedDifference[] => {
    const tests = pairs.map(([first, second]) => compare(first, second));
    const corrected = holm(tests.map((one) => one.p));
    return tests.map((one, i) => ({
      first: pairs[i]![0].name,
      second: pairs[i]![1].name,
      difference: quantity(one.value, one.sigma),
      dof: finite(one.dof),
      p: one.p,
      p_corrected: corrected[i]!,
      seen: corrected[i]! < choices.alpha,
      detectable: detectableDifference(one.sigma, one.dof, choices.alpha, tests.length, choices.power),
    }));
  };
  const pairs = batches.flatMap((first, i) =>
    batches.slice(i + 1).map((second): readonly [Batch, Batch] => [first, second]),
  );
  const reference = batches.find((batch) => batch.name === choices.reference);
  return {
    samples: n,
    homogeneity: homogeneityOf(commonMean(y, variances)),
    within: scatter(byBatch, within2, withinDof),
    between: {
      ...scatter(overBatches, between2, batches.length - 1),
      der_simonian_laird_tau: root(derSimonianLaird(means, meanVariances)),
    },
    mean: {
      value: pooled?.mean ?? null,
      sigma: pooled?.sigma ?? null,
      sigma_from_scatter: pooled === null ? null : finite(pooled.sigmaFromScatter),
    },
    batches: batches.map((batch) => ({
      batch: batch.name,
      samples: batch.places.length,
      mean: quantity(batch.mean, Math.sqrt(batch.variance)),
      homogeneity: homogeneityOf(
        commonMean(
          Float64Array.from(batch.places, (i) => y[i]!),
          Float64Array.from(batch.places, (i) => variances[i]!),
        ),
      ),
    })),
    pairs: list(pairs),
    shifts:
      reference === undefined
        ? []
        : list(batches.filter((batch) => batch !== reference).map((batch) => [reference, batch] as const)),
    trend: trendOf(taking, y, variances, choices, againstUnit, quantity),
  };
}

interface Tested {
  readonly value: number;
  readonly sigma: number;
  readonly dof: number;
  readonly p: number;
}

function test(value: number, sigma: number, dof: number): Tested {
  return { value, sigma, dof, p: sigma > 0 ? twoSided(value / sigma, dof) : value === 0 ? 1 : 0 };
}

export function homogeneityOf(observations: Observations): ComparedPart["homogeneity"] {
  const dof = observations.y.length - observations.parameters;
  if (!(dof > 0) || observations.variances.some((v) => !(v > 0)))
    return { q: null, dof: Math.max(0, dof), p: null, birge: null, i2: null };
  const { q } = observations.fit(0);
  return {
    q,
    dof,
    p: chiSquareSurvival(q, dof),
    birge: Math.sqrt(q / dof),
    // Higgins and Thompson, Stat. Med. 21, 1539 (2002).
    i2: q > 0 ? Math.max(0, (q - dof) / q) : 0,
  };
}

/**
 * A straight line through the samples with weights 1/(sigma_i^2 + tau^2), tau the scatter about the line; tested with
 * the degrees of freedom that the scatter leaves.
 */
function trendOf(
  taking: readonly OneNumber[],
  y: Float64Array,
  variances: Float64Array,
  choices: ComparisonChoices,
  unit: string,
  quantity: (value: number, sigma: number) => Quantity,
): ComparedPart["trend"] {
  if (choices.against === null) return null;
  const places = taking.flatMap((sample, i) => (sample.against === null ? [] : [i]));
  const x = Float64Array.from(places, (i) => taking[i]!.against!);
  if (new Set(x).size < 3) return null;
  const own = Float64Array.from(places, (i) => y[i]!);
  const errors = Float64Array.from(places, (i) => variances[i]!);
  const centre = x.reduce((sum, value) => sum + value, 0) / x.length;
  const line = straightLine(own, errors, x, centre);
  const tau2 = pauleMandel(line);
  const fit = line.fit(tau2);
  const sigma = Math.sqrt(fit.covariance[3]!);
  // What the slope's variance would be without the scatter; the rest of it is estimated.
  const bare = errors.every((v) => v > 0) ? line.fit(0).covariance[3]! : 0;
  const dof = effectiveDegrees(fit.covariance[3]!, [
    { variance: Math.max(0, fit.covariance[3]! - bare), degreesOfFreedom: x.length - 2 },
  ]);
  const tested = test(fit.beta[1]!, sigma, dof);
  return {
    against: choices.against,
    unit,
    samples: x.length,
    slope: quantity(tested.value, sigma),
    at_centre: quantity(fit.beta[0]!, Math.sqrt(fit.covariance[0]!)),
    centre,
    tau: Math.sqrt(tau2),
    homogeneity: homogeneityOf(line),
    dof: finite(dof),
    p: tested.p,
    seen: tested.p < choices.alpha,
    detectable: detectableDifference(sigma, dof, choices.alpha, 1, choices.power),
  };
}

function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function root(value: number): number | null {
  return Number.isFinite(value) ? Math.sqrt(value) : null;
}
