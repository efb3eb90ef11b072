import {
  airRefractivity,
  airRefractivityDerivative,
  refractionOfAir,
  vacuumFromAir_um,
  type AirRefraction,
  type AirState,
} from "./air-index.ts";
import { HC_EV_NM } from "./constants.ts";

export type LightUnit = "eV" | "meV" | "nm" | "Angstrom" | "um" | "cm-1" | "THz";
export type Medium = "air" | "vacuum";

/**
 * How one reading of a light axis becomes an energy. In vacuum E = k x for units that run with energy and
 * E = k/x for wavelengths. `air` says that the reading belongs to the wavelength in air: E = hc/(n lambda_air).
 * An energy, wave number or frequency read as `air` was computed from the air wavelength without the index.
 */
export interface LightScale {
  readonly unit: LightUnit;
  readonly medium: Medium;
  /** Wavelengths fall while energy rises: the order of the points is reversed. */
  readonly reversed: boolean;
  readonly air: AirRefraction;
}

/** Energy (eV) of one unit, or energy times wavelength (eV unit) for wavelengths. */
const FACTOR: Readonly<Record<LightUnit, number>> = {
  eV: 1,
  meV: 1e-3,
  nm: HC_EV_NM,
  Angstrom: HC_EV_NM * 10,
  um: HC_EV_NM * 1e-3,
  "cm-1": HC_EV_NM * 1e-7,
  THz: HC_EV_NM / 299792.458,
};
const WAVELENGTHS: ReadonlySet<LightUnit> = new Set<LightUnit>(["nm", "Angstrom", "um"]);
const HC_EV_UM = HC_EV_NM * 1e-3;

export function isWavelength(unit: LightUnit): boolean {
  return WAVELENGTHS.has(unit);
}

export function lightScale(unit: LightUnit, medium: Medium, air: AirState): LightScale {
  return { unit, medium, reversed: isWavelength(unit), air: refractionOfAir(air) };
}

/**
 * What      Photon energy of a reading: E = hc/lambda_vac, lambda_vac = n(lambda_vac) lambda_air.
 * Units     value in the scale's unit; energy eV.
 * Domain    value > 0; 0 and below give NaN, since no light has them.
 * Accuracy  2e-16 relative in vacuum; in air that of the index (air-index.ts).
 */
export function energyFromReading(value: number, scale: LightScale): number {
  if (!(value > 0)) return NaN;
  const factor = FACTOR[scale.unit];
  const energy = scale.reversed ? factor / value : factor * value;
  if (scale.medium === "vacuum") return energy;
  return HC_EV_UM / vacuumFromAir_um(HC_EV_UM / energy, scale.air);
}

/** The inverse: what an instrument with this scale reads at an energy (eV). */
export function readingFromEnergy(energy_eV: number, scale: LightScale): number {
  if (!(energy_eV > 0)) return NaN;
  const index = scale.medium === "air" ? 1 + airRefractivity(HC_EV_UM / energy_eV, scale.air) : 1;
  const factor = FACTOR[scale.unit];
  const apparent = energy_eV * index;
  return scale.reversed ? factor / apparent : apparent / factor;
}

/** dE/d(reading) in eV per unit (negative for wavelengths); sigma_E = |dE/dx| sigma_x. */
export function energySlope(value: number, scale: LightScale): number {
  const factor = FACTOR[scale.unit];
  const vacuum = scale.reversed ? -factor / (value * value) : factor;
  if (scale.medium === "vacuum") return vacuum;
  // With a = hc/E_apparent: lambda = a n(lambda), dlambda/da = n/(1 - a n'), E = hc/lambda.
  const apparent = scale.reversed ? factor / value : factor * value;
  const airWavelength = HC_EV_UM / apparent;
  const wavelength = vacuumFromAir_um(airWavelength, scale.air);
  const n = 1 + airRefractivity(wavelength, scale.air);
  const stretch = n / (1 - airWavelength * airRefractivityDerivative(wavelength, scale.air));
  const energy = HC_EV_UM / wavelength;
  return ((energy / wavelength) * stretch * airWavelength * vacuum) / apparent;
}

/** One standard uncertainty of the energy (eV) from that of the reading. */
export function energySigma(value: number, sigma: number, scale: LightScale): number {
  return Math.abs(energySlope(value, scale)) * sigma;
}

/** Energies (eV) of many readings, in the order of the readings. Shapes: values (m), out (m). */
export function energiesFromReadings(values: Float64Array, scale: LightScale): Float64Array {
  const out = new Float64Array(values.length);
  for (let i = 0; i < values.length; i++) out[i] = energyFromReading(values[i]!, scale);
  return out;
}

/**
 * Factor that turns a density per unit of the reading into a density per eV, |dx/dE|. For emission spectra only:
 * transmittance and absorption are ratios and need no factor.
 */
export function densityFactor(value: number, scale: LightScale): number {
  return 1 / Math.abs(energySlope(value, scale));
}
