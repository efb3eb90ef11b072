import { quotedLevels, type ComparedParameter, type RunglineResult } from "../protocol/index.ts";

/** One number of one result with its two kinds of error. */
export interface Reading {
  readonly value: number;
  readonly statistical: number | null;
  readonly systematic: number | null;
}

interface Quantity {
  readonly value: number | null;
  readonly sigma: number | null;
}

/** Number, or the reason why there is none. */
export type ReadingOrReason = Reading | string;

const NOT_DETERMINED = "not determined";

/** A counted number is known to half a step: standard uncertainty of a uniform error (JCGM 100:2008, 4.3.7). */
const COUNTING_SIGMA = 1 / Math.sqrt(12);

/** Where each compared number stands in a result. */
export function readParameter(result: RunglineResult, name: ComparedParameter): ReadingOrReason {
  const { series, systematic, width_law, strength_law, tail, derived } = result;
  switch (name) {
    case "gap_eV":
    case "rydberg_eV":
    case "defect0": {
      if (series === null) return NOT_DETERMINED;
      // Where the law was rejected its errors, scaled by the residuals, are the ones to defend.
      return reading(quotedLevels(series)[name], systematic?.[name] ?? null);
    }
    case "width_floor_eV":
      return reading(width_law?.floor_eV);
    case "width_coefficient_eV":
      return reading(width_law?.coefficient_eV);
    case "width_exponent":
      return reading(width_law?.exponent);
    case "highest_n":
    case "highest_resolved_n": {
      const n = derived?.[name] ?? null;
      return n === null ? NOT_DETERMINED : { value: n, statistical: COUNTING_SIGMA, systematic: null };
    }
    case "strength_coefficient":
      return reading(strength_law?.coefficient);
    case "tail_factor":
      return reading(tail?.factor);
    case "background_slope": {
      // The polynomial runs over the fitted window scaled to -1 .. 1; its first coefficient over half the window is
      // the slope at the middle.
      const slope = result.background.find(
        (one) => one.term === "polynomial" && one.name === "legendre1",
      )?.quantity;
      const window = result.fit?.window_eV;
      if (window === undefined) return NOT_DETERMINED;
      const half = (window[1] - window[0]) / 2;
      return reading(
        slope && {
          value: slope.value === null ? null : slope.value / half,
          sigma: slope.sigma === null ? null : slope.sigma / half,
        },
      );
    }
    case "urbach_energy_eV":
      return reading(
        result.background.find((one) => one.term === "urbach" && one.unit === "eV")?.quantity ??
          (result.protocol.background.some((one) => one.term === "urbach") ? HELD : undefined),
      );
    case "signal_to_noise": {
      const noise = result.reading.noise.median_sigma;
      let highest: Quantity | null = null;
      for (const { peak } of result.lines)
        if (peak.value !== null && peak.value > (highest?.value ?? 0)) highest = peak;
      const size = highest?.value ?? null;
      if (highest === null || size === null || noise === null || !(noise > 0)) return NOT_DETERMINED;
      return reading({
        value: size / noise,
        sigma: highest.sigma === null ? null : highest.sigma / noise,
      });
    }
  }
}

const HELD: Quantity = { value: 0, sigma: 0 };

function reading(quantity: Quantity | undefined, systematic: number | null = null): ReadingOrReason {
  if (quantity === undefined || quantity.value === null) return NOT_DETERMINED;
  if (quantity.sigma === 0) return "held, not fitted";
  if (quantity.sigma === null || !(quantity.sigma > 0)) return "at a bound, without an error";
  return { value: quantity.value, statistical: quantity.sigma, systematic };
}

/** The unit of a parameter; areas and background carry the unit of the signal. */
export function parameterUnit(name: ComparedParameter, signalUnit: string): string {
  const signal = signalUnit === "1" || signalUnit === "" ? "" : signalUnit;
  switch (name) {
    case "gap_eV":
    case "rydberg_eV":
    case "width_floor_eV":
    case "width_coefficient_eV":
    case "urbach_energy_eV":
      return "eV";
    case "strength_coefficient":
      return signal === "" ? "eV" : signal === "1/cm" ? "eV/cm" : `eV ${signal}`;
    case "background_slope":
      return signal === "" ? "1/eV" : `${signal}/eV`;
    default:
      return "";
  }
}

/** Parameters whose number depends on the unit of the signal: comparable only where that is the same. */
export function dependsOnSignal(name: ComparedParameter): boolean {
  return name === "strength_coefficient" || name === "background_slope";
}
