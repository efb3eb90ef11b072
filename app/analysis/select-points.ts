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
  const places = new Int32Array(spectrum.energy_eV.length);
  let count = 0;
  for (let i = 0; i < spectrum.energy_eV.length; i++) {
    const energy = spectrum.energy_eV[i]!;
    if (spectrum.used[i] === 0 || energy < low || energy > high) continue;
    if (!(spectrum.sigma[i]! > 0) || !Number.isFinite(spectrum.signal[i]!)) continue;
    if (masks.some(([from, to]) => energy >= from && energy <= to)) continue;
    places[count++] = i;
  }
  const place = places.slice(0, count);
  const pick = (values: Float64Array): Float64Array => {
    const out = new Float64Array(count);
    for (let i = 0; i < count; i++) out[i] = values[place[i]!]!;
    return out;
  };
  return {
    place,
    energy: pick(spectrum.energy_eV),
    signal: pick(spectrum.signal),
    sigma: pick(spectrum.sigma),
    ...(spectrum.noise.pointsAsOne === undefined ? {} : { pointsAsOne: spectrum.noise.pointsAsOne }),
  };
}
