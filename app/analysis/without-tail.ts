import type { Watch } from "../base/index.ts";
import { fitSpectrum, withAxisJitter } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { leastSignificance, significances, withSharedNoise } from "./climb-ladder.ts";
import {
  buildModel,
  energyOf,
  spacing,
  stateAfter,
  withLines,
  type LadderState,
  type ModelChoices,
} from "./ladder-model.ts";
import { judgeLevels, withLevelRange } from "./level-range.ts";
import { selectPoints, type SelectedPoints } from "./select-points.ts";

export interface WithoutTail {
  readonly points: SelectedPoints;
  readonly state: LadderState;
  readonly reducedChi2: number;
}

const MOST_LINES_ABOVE = 4;
/** Adding a line and its stretch of the spectrum may not spoil the fit by more than this. */
const WORSE_AT_MOST = 1.3;

/**
 * What      The second reading of a spectrum whose lines do not follow a strength law, so that no tail can be tied to
 *           them: the window ends half way above the last line and nothing is assumed of what lies there. Lines are
 *           added upward while they are significant, in their place, and the fit stays as good.
 */
export function fitWithoutTail(
  spectrum: Spectrum,
  protocol: Protocol,
  start: LadderState,
  low: number,
  choices: ModelChoices,
  watch: Watch,
): WithoutTail | null {
  let best: WithoutTail | null = null;
  const top = start.ns[start.ns.length - 1]!;
  const most = protocol.lines.n === "auto" ? Math.min(MOST_LINES_ABOVE, protocol.lines.max_n - top) : 0;
  for (let above = 0; above <= most; above++) {
    const from = addOnTop(best?.state ?? start, [
      ...start.ns,
      ...Array.from({ length: above }, (_, i) => top + 1 + i),
    ]);
    const last = from.ns[from.ns.length - 1]!;
    const half = 0.5 * spacing(last, from.levels);
    const points = selectPoints(spectrum, protocol.mask_eV, low, energyOf(last, from.levels) + half);
    const model = buildModel(points, from, protocol, spectrum.unit, { ...choices, tail: false });
    const raw = fitSpectrum(points, model.spec, model.start, {
      watch,
      gradientTolerance: 1e-5,
      costTolerance: 1e-7,
      maxIterations: 60,
    });
    const fit = withAxisJitter(withSharedNoise(raw, points), protocol.axis.jitter_eV);
    const reducedChi2 = fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom);
    const after = stateAfter(fit, model.state);
    const seen = significances(fit);
    const place = Math.abs(after.energy[from.ns.length - 1]! - energyOf(last, from.levels));
    const good =
      fit.solution.converged &&
      (above === 0 ||
        (seen[seen.length - 1]! > leastSignificance(points.energy.length) &&
          place < 0.6 * half &&
          reducedChi2 <= WORSE_AT_MOST * best!.reducedChi2));
    if (!good) break;
    best = { points, state: withLevelRange(after, judgeLevels(fit, protocol)), reducedChi2 };
  }
  return best;
}

/** New lines start as wide as the last one: where no strength law holds, a width law need not either. */
function addOnTop(state: LadderState, ns: readonly number[]): LadderState {
  const next = withLines(state, ns);
  const widest = state.width[state.ns.length - 1]!;
  return {
    ...next,
    width: next.width.map((width, j) =>
      state.ns.includes(ns[j]!) ? width : Math.min(widest, 0.5 * spacing(ns[j]!, state.levels)),
    ),
  };
}
