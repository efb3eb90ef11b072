import type { LadderState } from "../analysis/index.ts";
import type { RunglineResult } from "../protocol/index.ts";

/** What the fit of the reference spectrum found, as the main job reports it. */
export type ReferenceResult = Pick<
  RunglineResult,
  "lines" | "series" | "width_law" | "tail" | "fit" | "protocol" | "status"
>;

/** Stands for the error of what is not determined: it must not steer the laws. */
const UNKNOWN_ERROR = 1e3;

/** The finished ladder of the reference as the start of the series; null where no series was seen. */
export function referenceState(result: ReferenceResult): LadderState | null {
  const { series, width_law: law } = result;
  if (series === null || result.fit === null) return null;
  const { gap_eV, rydberg_eV, defect0, defect2 } = series;
  if (gap_eV.value === null || rydberg_eV.value === null) return null;
  const lines = result.lines.filter(
    (line) => line.energy_eV.value !== null && line.width_eV.value !== null && line.width_eV.value > 0,
  );
  if (lines.filter((line) => line.in_level_fit).length < 3) return null;
  const pick = (of: (line: (typeof lines)[number]) => number | null, otherwise: number): Float64Array =>
    Float64Array.from(lines, (line) => of(line) ?? otherwise);
  const first = lines[0]!;
  return {
    ns: lines.map((line) => line.n),
    energy: pick((line) => line.energy_eV.value, NaN),
    energySigma: pick((line) => positive(line.energy_eV.sigma), UNKNOWN_ERROR),
    width: pick((line) => line.width_eV.value, NaN),
    widthSigma: pick((line) => positive(line.width_eV.sigma), UNKNOWN_ERROR),
    areaSigma: pick((line) => positive(line.area.sigma), UNKNOWN_ERROR),
    include: lines.map((line) => line.in_level_fit),
    levels: {
      gap: gap_eV.value,
      rydberg: rydberg_eV.value,
      defect0: defect0.value ?? (3 - result.protocol.material.dimension) / 2,
      defect2: defect2.value ?? 0,
    },
    widths: {
      floor: law?.floor_eV.value ?? 0,
      coefficient: law?.coefficient_eV.value ?? first.width_eV.value! * first.n ** 3,
      exponent: law?.exponent.value ?? 3,
      base: result.protocol.width.base,
      floorKind: result.protocol.width.floor_kind === "gaussian" ? "gaussian" : "lorentzian",
    },
    asymmetry: lines.find((line) => line.asymmetry.value !== null)?.asymmetry.value ?? 0,
    factor: result.tail?.factor.value ?? 1,
  };
}

/** A line on a law that comes from the spectrum fit itself has the energy error 0 or that of the law. */
function positive(sigma: number | null): number | null {
  return sigma !== null && sigma > 0 ? sigma : null;
}
