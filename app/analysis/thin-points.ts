import type { FitPoints } from "../fit/index.ts";
import { WIDTH, widthLaw } from "../laws/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { energyOf, type LadderState } from "./ladder-model.ts";

/**
 * What      Neighbouring points averaged where the spectrum cannot change between them: a bin is at most 1/`parts` of
 *           the distance (width and offset in quadrature) to the nearest line. For preparing fits only; the final fit
 *           takes every point.
 * Shapes    lines (k) with centre and FWHM in eV; `widest`: largest bin (eV), for a background with a structure of its own.
 * Accuracy  a bin of a tenth of the width flattens the top of a line by 0.3 %.
 */
export function thinPoints(
  points: FitPoints,
  lines: readonly { readonly energy: number; readonly width: number }[],
  parts = 10,
  widest = Infinity,
): FitPoints {
  const { energy, signal, sigma } = points;
  const m = energy.length;
  const reach = (at: number): number => {
    let least = Infinity;
    for (const line of lines) least = Math.min(least, Math.hypot(line.width, at - line.energy));
    return Math.min(widest, least / parts);
  };
  const out: { energy: number[]; signal: number[]; sigma: number[] } = { energy: [], signal: [], sigma: [] };
  for (let i = 0; i < m;) {
    const end = energy[i]! + reach(energy[i]!);
    let weight = 0;
    let e = 0;
    let y = 0;
    do {
      const w = 1 / (sigma[i]! * sigma[i]!);
      weight += w;
      e += w * energy[i]!;
      y += w * signal[i]!;
      i++;
    } while (i < m && energy[i]! < end);
    out.energy.push(e / weight);
    out.signal.push(y / weight);
    out.sigma.push(1 / Math.sqrt(weight));
  }
  return {
    ...(points.pointsAsOne === undefined ? {} : { pointsAsOne: points.pointsAsOne }),
    energy: Float64Array.from(out.energy),
    signal: Float64Array.from(out.signal),
    sigma: Float64Array.from(out.sigma),
  };
}

/** Free lines, the tied ones above and the edge of the gap: wherever the spectrum may change quickly. */
export function linesForThinning(
  start: LadderState,
  protocol: Protocol,
): { energy: number; width: number }[] {
  const out = new Float64Array(WIDTH.size);
  const lines = start.ns.map((_, j) => ({ energy: start.energy[j]!, width: start.width[j]! }));
  const narrowest = Math.min(...start.width);
  for (let n = start.ns[start.ns.length - 1]! + 1; n <= protocol.lines.max_n + 20; n++) {
    widthLaw(n, start.levels.defect0, start.widths, out);
    lines.push({ energy: energyOf(n, start.levels), width: Math.max(out[WIDTH.width]!, narrowest / 4) });
  }
  lines.push({ energy: start.levels.gap, width: narrowest / 4 });
  return lines;
}
