import { WIDTH, widthLaw } from "../laws/index.ts";
import type { FitPoints } from "../fit/index.ts";
import { energyOf, type LadderState } from "./ladder-model.ts";

/** An unexplained line-like residual. */
export interface Satellite {
  readonly energy_eV: number;
  readonly significance: number;
}

/**
 * What stands within its own width, or that of the edge, of the gap belongs to the edge: what the model misses there has no
 * shape of its own.
 */
export function atTheEdge(energy: number, width: number, { levels, widths }: LadderState): boolean {
  const out = new Float64Array(WIDTH.size);
  widthLaw(HIGHEST_N, levels.defect0, widths, out);
  return Math.abs(energy - levels.gap) < Math.max(width, out[WIDTH.width]!);
}

/** The width law has come to its limit there. */
const HIGHEST_N = 60;

/** Residuals of this many standard errors, in a filter as wide as the lines there, want an explanation. */
export const LEAST_SATELLITE = 5;

/**
 * What      Residuals filtered with a Lorentzian as wide as the width law says at that energy: where a line of its own
 *           would be significant. Errors are scaled by the root of reduced chi square, so that a general misfit is not
 *           a crowd of satellites.
 * Shapes    residuals (m) in standard deviations of each point.
 */
export function findSatellites(
  points: FitPoints,
  residuals: Float64Array,
  state: LadderState,
  reducedChi2: number,
): Satellite[] {
  const { energy, sigma } = points;
  const m = energy.length;
  const scale = Math.sqrt(Math.max(1, reducedChi2));
  const { gap, rydberg, defect0 } = state.levels;
  const out = new Float64Array(WIDTH.size);
  const found: Satellite[] = [];
  const low = energyOf(state.ns[0]!, state.levels);
  let from = 0;
  for (let at = Math.max(energy[0]!, low); at < Math.min(gap, energy[m - 1]!);) {
    const n = Math.sqrt(rydberg / (gap - at)) + defect0;
    widthLaw(Math.min(n, HIGHEST_N), defect0, state.widths, out);
    const width = Math.max(out[WIDTH.width]!, 1e-9);
    while (from < m && energy[from]! < at - 2 * width) from++;
    let top = 0;
    let bottom = 0;
    let count = 0;
    for (let i = from; i < m && energy[i]! < at + 2 * width; i++) {
      const u = (2 * (energy[i]! - at)) / width;
      const shape = 1 / (1 + u * u) / sigma[i]!;
      top += shape * residuals[i]!;
      bottom += shape * shape;
      count++;
    }
    const significance = count >= 5 && bottom > 0 ? top / Math.sqrt(bottom) / scale : 0;
    if (Math.abs(significance) > LEAST_SATELLITE && !atTheEdge(at, width, state)) {
      const last = found[found.length - 1];
      if (last !== undefined && at - last.energy_eV < 2 * width) {
        if (Math.abs(significance) > Math.abs(last.significance))
          found[found.length - 1] = { energy_eV: at, significance };
      } else found.push({ energy_eV: at, significance });
    }
    at += width / 4;
  }
  return found;
}
