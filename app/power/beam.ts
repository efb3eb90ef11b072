import type { PowerProtocol } from "../protocol/index.ts";
import type { BleachingLaw } from "./bleaching-law.ts";

export interface Beam {
  readonly excitation: "separate-pump" | "scanned-probe" | "broadband";
  readonly profile: "flat" | "gaussian";
  /** Law of the areas, and of the peaks. */
  readonly areaLaw: BleachingLaw;
  readonly peakLaw: BleachingLaw;
  /** (w_probe/w_pump)^2 of two Gaussian beams. */
  readonly ratio: number;
  /** S that enters the volume, over the S of the area and over that of the peak. */
  readonly areaToVolume: number;
  readonly peakToVolume: number;
  /** Area that the power is spread over, um^2, per square of the stated diameter; null without one. */
  readonly area_um2: number | null;
}

/** Radius of the 1/e^2 point over the full width at half maximum: 1/sqrt(2 ln 2). */
const RADIUS_PER_FWHM = 1 / Math.sqrt(2 * Math.LN2);

/**
 * What      The law and the spot area by how the series was taken. A weak probe reads what the pump left: area and peak
 *           fall alike. A swept laser bleaches the line it reads: peak 1/(1 + s), area 1/sqrt(1 + s), so that the s of
 *           the peak is twice the initial fall of the area, and s is what the density of excitons goes into.
 *           Spot area pi D^2/4 (flat), pi w^2 (one Gaussian beam), pi (w_pump^2 + w_probe^2)/2 (two).
 * Units     um, um^2.
 * Source    effective area: power over the mean intensity that the probe sees at low power.
 */
export function describeBeam(power: PowerProtocol, diameter_um = power.spot_diameter_um): Beam {
  const excitation = power.excitation ?? "separate-pump";
  const profile = power.spot_profile ?? "flat";
  const scanned = excitation === "scanned-probe";
  const probe = scanned ? null : power.probe_diameter_um;
  // Both diameters are by one definition, so their ratio is that of the radii.
  const ratio = probe !== null && power.spot_diameter_um !== null ? (probe / power.spot_diameter_um) ** 2 : 1;
  const pumped: BleachingLaw =
    profile === "flat" ? "separate-pump" : ratio === 1 ? "gaussian-self" : "gaussian-two-beam";
  return {
    excitation,
    profile,
    areaLaw: scanned ? (profile === "flat" ? "scanned-probe" : "gaussian-scanned") : pumped,
    peakLaw: pumped,
    ratio,
    areaToVolume: scanned ? 2 : 1,
    peakToVolume: 1,
    area_um2: diameter_um === null ? null : spotArea(profile, power.spot_definition, diameter_um, ratio),
  };
}

export function spotArea(
  profile: "flat" | "gaussian",
  definition: PowerProtocol["spot_definition"],
  diameter_um: number,
  ratio = 1,
): number {
  if (profile === "flat") return (Math.PI * diameter_um * diameter_um) / 4;
  const radius = definition === "fwhm" ? RADIUS_PER_FWHM * diameter_um : diameter_um / 2;
  return (Math.PI * radius * radius * (1 + ratio)) / 2;
}
