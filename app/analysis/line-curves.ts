import { linePair } from "../lines/index.ts";
import type { LineResult, RunglineResult } from "../protocol/index.ts";
import { slitOf, withHeaderSlit } from "./instrument.ts";

/**
 * One line of a result alone, at given energies (eV, ascending), in the unit of the signal: A (L + 2 q D) with the instrument
 * that the fit allowed for. Where the measured light was fitted the slit acts on the light and not on a line, and is left
 * out. Null where a number of the line is not determined.
 */
export function lineCurve(
  result: RunglineResult,
  line: LineResult,
  energies: Float64Array,
): Float64Array | null {
  const [energy, width, area] = [line.energy_eV.value, line.width_eV.value, line.area.value];
  if (energy === null || width === null || area === null) return null;
  const slit =
    result.fit?.domain === "transmittance"
      ? 0
      : slitOf(withHeaderSlit(result.protocol, result.reading.slit)).stdAt(energy);
  const even = new Float64Array(energies.length);
  const odd = new Float64Array(energies.length);
  const whole = width + result.protocol.lines.instrument_lorentz_fwhm_eV;
  linePair(energies, 0, energies.length, energy, whole, slit, even, odd);
  const twice = 2 * (line.asymmetry.value ?? 0);
  return even.map((one, i) => area * (one + twice * odd[i]!));
}
