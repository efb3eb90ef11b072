import type { FitPoints } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { depthFromTransmittance, transmittanceFromDepth } from "../units/index.ts";
import type { Spectrum } from "../spectrum/index.ts";

const CM_PER_UM = 1e-4;

/**
 * What      Relative error that the thickness and the reflectance of a surface put on all areas alike, in quadrature:
 *           alpha = depth/d gives sigma_d/d; with all reflections the depth that follows from a measured T moves with R by
 *           more at the foot of a line than at its top, and the difference over the height of the line is the part.
 *           A single pass only shifts the depth, which the background takes.
 * Domain    null where neither error is given or none of them was used in reading.
 */
export function areaSystematic(spectrum: Spectrum, protocol: Protocol, points: FitPoints): number | null {
  const { thickness_sigma_um, surface } = protocol.signal;
  let square = 0;
  let known = false;
  const converted = spectrum.unit === "1/cm" && spectrum.quantityRead !== "alpha";
  if (thickness_sigma_um > 0 && converted && spectrum.thickness_cm !== null) {
    square += ((thickness_sigma_um * CM_PER_UM) / spectrum.thickness_cm) ** 2;
    known = true;
  }
  const { transmittance } = spectrum;
  if (surface.reflectance_sigma > 0 && transmittance !== null && transmittance.surface === "all") {
    let least = Infinity;
    let most = -Infinity;
    for (const signal of points.signal) {
      least = Math.min(least, signal);
      most = Math.max(most, signal);
    }
    const { reflectance: R, surface: model, thickness_cm } = transmittance;
    const low = Math.max(0, R - surface.reflectance_sigma);
    const high = Math.min(0.999, R + surface.reflectance_sigma);
    const change = (depth: number): number => {
      const T = transmittanceFromDepth(depth, R, model);
      return (depthFromTransmittance(T, high, model) - depthFromTransmittance(T, low, model)) / 2;
    };
    const [foot, top] = [least * thickness_cm, most * thickness_cm];
    if (top > foot) {
      square += ((change(top) - change(foot)) / (top - foot)) ** 2;
      known = true;
    }
  }
  return known ? Math.sqrt(square) : null;
}
