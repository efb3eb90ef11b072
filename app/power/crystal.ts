import { NOT_DETERMINED, symmetric, type Quantity } from "../base/index.ts";
import { levelSpacing } from "../laws/index.ts";
import type { PowerLineResult, UsefulnessResult } from "../protocol/index.ts";
import type { Flow } from "./flow.ts";
import { spreadOf } from "./nominal.ts";
import type { PowerInput } from "./types.ts";

export function describeCrystal(flow: Flow, results: readonly PowerLineResult[]): UsefulnessResult[] {
  const { input, volumes, factor } = flow;
  const interaction = input.protocol.power.interaction;
  return results.map((line, i) => {
    const spacing = nearestSpacing(input, line.n, factor);
    const width = line.width0_eV;
    const ratio =
      spacing.value !== null && width.value !== null && width.value > 0
        ? symmetric(
            spacing.value / width.value,
            (spacing.value / width.value) *
              Math.hypot((spacing.sigma ?? 0) / spacing.value, (width.sigma ?? 0) / width.value),
            factor,
          )
        : NOT_DETERMINED;
    const measured = line.blockade_volume_um3.value !== null;
    const expected = volumes[i]!.expected[interaction];
    return {
      n: line.n,
      spacing_eV: spacing,
      width_eV: width,
      addressability: ratio,
      addressable: ratio.value === null ? null : ratio.value > 1,
      lifetime_ps: line.lifetime_ps,
      orbit_radius_um: line.orbit_radius_um,
      blockade_radius_um: measured ? line.blockade_radius_um : expected.radius,
      blockade_from: measured ? "measured" : expected.radius.value !== null ? "expected" : "not determined",
      single_spot_um: volumes[i]!.singleSpot,
    };
  });
}

/** Distance to the nearer neighbour by the level law, with its error from the law's covariance. */
function nearestSpacing(input: PowerInput, n: number, factor: number): Quantity {
  const { series } = input;
  if (series === null) return NOT_DETERMINED;
  const firstN = input.protocol.material.first_n ?? 1;
  const at = (rydberg: number, defect0: number, defect2: number): number => {
    const up = levelSpacing(n, rydberg, defect0, defect2);
    const down = n - 1 >= firstN ? levelSpacing(n - 1, rydberg, defect0, defect2) : Infinity;
    return Math.min(up, down);
  };
  const { rydberg_eV: ry, defect0, defect2, covariance } = series;
  const value = at(ry, defect0, defect2);
  const step = 1e-5;
  const gradient = Float64Array.of(
    0,
    (at(ry * (1 + step), defect0, defect2) - at(ry * (1 - step), defect0, defect2)) / (2 * ry * step),
    (at(ry, defect0 + step, defect2) - at(ry, defect0 - step, defect2)) / (2 * step),
    (at(ry, defect0, defect2 + step) - at(ry, defect0, defect2 - step)) / (2 * step),
  );
  return symmetric(value, spreadOf(gradient, covariance), factor);
}
