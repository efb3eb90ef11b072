import { makeRandom } from "../../app/base/index.ts";
import { cleanSignal, type SyntheticSeries } from "./make-spectrum.ts";

/**
 * A synthetic power series of a yellow-like crystal: areas A_n/(1 + S_n P), S_n = S_10 (n/10)^k, everything else the
 * same at every power unless `change` says otherwise.
 */
export interface SyntheticPowerSeries {
  readonly powers_uW: readonly number[];
  readonly saturation10_per_uW: number;
  readonly exponent: number;
  readonly points: number;
  readonly sigma: number;
  readonly seed: number;
  /** Lines above it bleach like it; 20 where not given. */
  readonly lastBleachingN?: number;
  readonly change?: (power_uW: number) => Partial<SyntheticSeries>;
}

export const CRYSTAL: SyntheticSeries = {
  gap_eV: 2.17205,
  rydberg_eV: 0.0905,
  defect0: 0.21,
  firstN: 2,
  law: "p-envelope",
  floor_eV: 30e-6,
  coefficient_eV: 0.016,
  exponent: 3,
  strength: 8,
  asymmetry: -0.15,
  offsets_eV: { 2: -0.0045, 3: -0.0012, 4: -0.0004 },
  continuumTop_eV: 2.2,
  background: (energy) => 60 + 40 * Math.sqrt(Math.max(0, energy - 2.0464)) + 300 * (energy - 2.15),
};

export const SERIES: SyntheticPowerSeries = {
  powers_uW: [0.1, 0.3, 1, 2, 5, 10, 20, 40, 70, 100],
  saturation10_per_uW: 3e-4,
  exponent: 10,
  points: 9000,
  sigma: 2,
  seed: 11,
};

/** Nothing is known of the lines above it, and a law of n^10 would empty the edge at any power. */
const LAST_BLEACHING_N = 20;

export function saturationOf(series: SyntheticPowerSeries, n: number): number {
  return (
    series.saturation10_per_uW *
    (Math.min(n, series.lastBleachingN ?? LAST_BLEACHING_N) / 10) ** series.exponent
  );
}

/** Energies denser towards the gap, as a careful experimenter takes them. */
export function seriesEnergies(points: number): Float64Array {
  const low = 2.14;
  const high = 2.1731;
  const below = Math.round(0.45 * points);
  return Float64Array.from({ length: points }, (_, i) => {
    const energy =
      i < below
        ? low + (2.168 - low) * (i / below)
        : 2.168 + (high - 2.168) * ((i - below) / (points - below));
    return Number(energy.toFixed(8));
  });
}

export interface SeriesCurves {
  readonly energy: Float64Array;
  /** One a power, alpha in 1/cm. */
  readonly signals: readonly Float64Array[];
}

export function makePowerSeries(series: SyntheticPowerSeries): SeriesCurves {
  const random = makeRandom(series.seed);
  const energy = seriesEnergies(series.points);
  const signals = series.powers_uW.map((power) => {
    const clean = cleanSignal(energy, {
      ...CRYSTAL,
      share: (n) => 1 / (1 + saturationOf(series, n) * power),
      ...series.change?.(power),
    });
    return clean.map((value) => value + series.sigma * random.normal());
  });
  return { energy, signals };
}

const encode = (lines: readonly string[]): Uint8Array => new TextEncoder().encode([...lines, ""].join("\n"));

/** All powers as columns of one file. */
export function seriesFile(
  series: SyntheticPowerSeries,
  curves: SeriesCurves,
  header = (power: number): string => `alpha (1/cm) ${power} uW`,
  digits = 3,
): Uint8Array {
  const rows = Array.from(curves.energy, (energy, i) =>
    [energy.toFixed(8), ...curves.signals.map((signal) => signal[i]!.toFixed(digits))].join(","),
  );
  return encode([["Photon energy (eV)", ...series.powers_uW.map(header)].join(","), ...rows]);
}

/** One file a power. */
export function singleFile(curves: SeriesCurves, a: number, facts: readonly string[] = []): Uint8Array {
  const rows = Array.from(
    curves.energy,
    (energy, i) => `${energy.toFixed(8)},${curves.signals[a]![i]!.toFixed(3)}`,
  );
  return encode([...facts, "Photon energy (eV),alpha (1/cm)", ...rows]);
}
