import type { FitPoints } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";

/** Points that take part, and where each stands in the spectrum. */
export interface SelectedPoints extends FitPoints {
  readonly place: Int32Array;
}

/** Usable points inside [low, high] eV and outside the masks. */
export function selectPoints(
  spectrum: Spectrum,
  masks: Protocol["mask_eV"],
  low: number,
  high: number,
): SelectedPoints {
  const place: number[] = [];
  for (let i = 0; i < spectrum.energy_eV.length; i++) {
    const energy = spectrum.energy_eV[i]!;
    if (spectrum.used[i] === 0 || energy < low || energy > high) continue;
    if (!(spectrum.sigma[i]! > 0) || !Number.isFinite(spectrum.signal[i]!)) continue;
    if (masks.some(([from, to]) => energy >= from && energy <= to)) continue;
    place.push(i);
  }
  return {
    place: Int32Array.from(place),
    energy: Float64Array.from(place, (i) => spectrum.energy_eV[i]!),
    signal: Float64Array.from(place, (i) => spectrum.signal[i]!),
    sigma: Float64Array.from(place, (i) => spectrum.sigma[i]!),
  };
}
