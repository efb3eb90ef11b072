import type { Spectrum } from "../spectrum/index.ts";

/** Optical depth of one unit of the signal; null where alpha was read and the thickness is not known. */
export function depthPerSignal(spectrum: Spectrum): number | null {
  if (spectrum.transmittance !== null) return spectrum.transmittance.thickness_cm;
  return spectrum.unit === "1" ? 1 : spectrum.thickness_cm;
}
