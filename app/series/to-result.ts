import { NOT_DETERMINED, symmetric, type Estimates, type Quantity } from "../base/index.ts";
import type { RunglineResult } from "../protocol/index.ts";
import { LEVEL_NAMES, type LevelFit } from "./level-fit.ts";
import type { LevelProfile } from "./level-profile.ts";
import type { RangeChoice } from "./level-range.ts";
import type { Readings } from "./readings.ts";
import type { StrengthFit } from "./strength-fit.ts";
import type { WidthFit } from "./width-fit.ts";

type SeriesPart = NonNullable<RunglineResult["series"]>;
type WidthPart = NonNullable<RunglineResult["width_law"]>;
type StrengthPart = NonNullable<RunglineResult["strength_law"]>;

/**
 * Value, standard error and interval of parameter i. A held value (variance 0) has the sigma 0: exact by choice. A
 * profile gives the interval where it has both ends.
 */
function quantityOf(
  estimates: Estimates,
  i: number,
  factor: number,
  scale = 1,
  interval?: { readonly low: number | null; readonly high: number | null } | null,
): Quantity {
  const sigma = scale * Math.sqrt(estimates.covariance[i * estimates.values.length + i]!);
  const plain = symmetric(estimates.values[i]!, sigma, factor);
  if (interval === undefined || interval === null || interval.low === null || interval.high === null)
    return plain;
  return { ...plain, low: interval.low, high: interval.high };
}

/** The `series` part of a result. Correlations are those of the free parameters. */
export function seriesToResult(
  choice: RangeChoice,
  readings: Readings,
  factor = 1,
  profile?: Partial<{ readonly [K in keyof LevelProfile]: LevelProfile[K] | null | undefined }>,
): SeriesPart {
  const { fit } = choice;
  const { estimates } = fit;
  const plain = (i: number): Quantity => quantityOf(estimates, i, factor);
  const { errorScale } = fit;
  return {
    gap_eV: quantityOf(estimates, 0, factor, 1, profile?.gap_eV),
    rydberg_eV: quantityOf(estimates, 1, factor, 1, profile?.rydberg_eV),
    defect0: quantityOf(estimates, 2, factor, 1, profile?.defect0),
    defect2: fit.defect === "ritz" ? plain(3) : NOT_DETERMINED,
    fit_n: [choice.fit_n[0], choice.fit_n[1]],
    chi2: fit.chi2,
    dof: fit.degreesOfFreedom,
    p: fit.degreesOfFreedom > 0 ? fit.p : null,
    scaled:
      errorScale === null
        ? null
        : {
            gap_eV: quantityOf(estimates, 0, factor, errorScale),
            rydberg_eV: quantityOf(estimates, 1, factor, errorScale),
            defect0: quantityOf(estimates, 2, factor, errorScale),
          },
    correlation: correlationOf(fit),
    ranges: choice.ranges.map((step) => ({ ...step })),
    readings: readings.readings.map((one) => ({ ...one })),
  };
}

function correlationOf(fit: LevelFit): SeriesPart["correlation"] {
  const { covariance } = fit.estimates;
  const size = LEVEL_NAMES.length;
  const free = LEVEL_NAMES.map((_, i) => i).filter((i) => covariance[i * size + i]! > 0);
  return {
    names: free.map((i) => LEVEL_NAMES[i]!),
    matrix: free.map((i) =>
      free.map((j) =>
        i === j
          ? 1
          : covariance[i * size + j]! / Math.sqrt(covariance[i * size + i]! * covariance[j * size + j]!),
      ),
    ),
  };
}

/** The `width_law` part of a result. */
export function widthsToResult(fit: WidthFit, base: string, factor = 1): WidthPart {
  const { estimates, exponentTest } = fit;
  const free = estimates.covariance[8]! > 0;
  const interval = free && exponentTest !== null ? exponentTest : undefined;
  const floor = quantityOf(estimates, 0, factor);
  return {
    // At the bound there is no error to first order.
    floor_eV: fit.floorAtZero ? { value: 0, sigma: null, low: null, high: null } : floor,
    coefficient_eV: quantityOf(estimates, 1, factor),
    exponent: quantityOf(estimates, 2, factor, 1, interval),
    base,
    fit_n: [fit.n[0]!, fit.n[fit.n.length - 1]!],
    chi2: fit.chi2,
    dof: fit.degreesOfFreedom,
    p: fit.degreesOfFreedom > 0 ? fit.p : null,
    ...(free || exponentTest === null ? {} : { free_exponent: freeExponent(exponentTest, factor) }),
  };
}

function freeExponent(
  { value, sigma, low, high }: NonNullable<WidthFit["exponentTest"]>,
  factor: number,
): Quantity {
  const plain = symmetric(value, sigma, factor);
  return low === null || high === null ? plain : { ...plain, low, high };
}

/** The `strength_law` part of a result. */
export function strengthsToResult(fit: StrengthFit, law: string, base: string, factor = 1): StrengthPart {
  return {
    coefficient: quantityOf(fit.estimates, 0, factor),
    law,
    base,
    fit_n: [fit.n[0]!, fit.n[fit.n.length - 1]!],
    chi2: fit.chi2,
    dof: fit.degreesOfFreedom,
    p: fit.degreesOfFreedom > 0 ? fit.p : null,
    half_at_n: fit.half_at_n,
  };
}
