import { stopIfCancelled, type Watch } from "../base/index.ts";
import {
  fitSpectrum,
  levelLink,
  withAxisJitter,
  withScaledErrors,
  type FitControl,
  type FitPoints,
  type SpectrumFit,
} from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { Assignment } from "./assign-n.ts";
import type { Peak } from "./find-peaks.ts";
import { judgeLevels, withLevelRange } from "./level-range.ts";
import {
  buildModel,
  energyOf,
  stateAfter,
  withLines,
  type LadderState,
  type ModelChoices,
} from "./ladder-model.ts";

/** Fits that only prepare the next one need not be finished to the last digit. */
const ROUGH: FitControl = {
  maxIterations: 12,
  gradientTolerance: 1e-4,
  costTolerance: 1e-5,
  answer: "condensed",
};
/** A line above counts when its area is above this many standard errors and the information criterion gains enough. */
export const LEAST_SIGNIFICANCE = 5;
export const LEAST_BIC_GAIN = 10;
/** Energy, width and area. */
const PARAMETERS_PER_LINE = 3;
const LINES_TRIED_AHEAD = 10;

/** Start of the ladder from the assignment: lines from the lowest up to the first place where two in a row are missing. */
export function startLadder(peaks: readonly Peak[], assignment: Assignment, protocol: Protocol): LadderState {
  const found = new Map(assignment.matched.map(({ n, peak }) => [n, peaks[peak]!]));
  const explicit = protocol.lines.n === "auto" ? null : [...new Set(protocol.lines.n)].sort((a, b) => a - b);
  const ns: number[] = [];
  if (explicit !== null) ns.push(...explicit);
  else {
    const first = assignment.matched[0]!.n;
    const last = assignment.matched[assignment.matched.length - 1]!.n;
    for (let n = first; n <= last && n <= protocol.lines.max_n; n++) {
      if (!found.has(n) && !found.has(n + 1)) break;
      ns.push(n);
    }
  }
  const levels = {
    gap: assignment.gap_eV,
    rydberg: assignment.rydberg_eV,
    defect0: assignment.defect,
    defect2: 0,
  };
  const scaled = [...found].map(([n, peak]) => peak.width_eV * n ** 3).sort((a, b) => a - b);
  const coefficient = scaled[Math.floor(scaled.length / 2)]!;
  const energy = Float64Array.from(ns, (n) => found.get(n)?.energy_eV ?? energyOf(n, levels));
  // Peaks are as wide as line and laser line together.
  const lorentz = protocol.lines.instrument_lorentz_fwhm_eV;
  const width = Float64Array.from(ns, (n) => {
    const seen = found.get(n)?.width_eV ?? coefficient / n ** 3;
    return Math.max(LEAST_OWN_WIDTH * seen, seen - lorentz);
  });
  const weights = [...found.values()].filter((peak) => peak.height > 0);
  const odd = weights.map((peak) => peak.odd / (2 * peak.height)).sort((a, b) => a - b);
  const law = firstLaw(ns, energy, width, found, levels, protocol.series.defect !== "none");
  return {
    ns,
    energy,
    width,
    energySigma: Float64Array.from(width, (value) => PEAK_ACCURACY * value),
    widthSigma: Float64Array.from(width, (value) => 0.3 * value),
    areaSigma: Float64Array.from(width, (value) => Math.sqrt(value)),
    include: law.include,
    levels: law.levels,
    widths: { floor: 0, coefficient, exponent: 3, base: "n", floorKind: "lorentzian" },
    asymmetry: Math.max(-0.5, Math.min(0.5, odd[Math.floor(odd.length / 2)] ?? 0)),
    factor: 1,
  };
}

/**
 * Low lines may lie off the law of the higher ones, and must not steer the first tail:
 * the lowest n from which the law holds to a part of the line widths, at least four lines.
 */
function firstLaw(
  ns: readonly number[],
  energy: Float64Array,
  width: Float64Array,
  found: ReadonlyMap<number, Peak>,
  levels: LadderState["levels"],
  defectFree: boolean,
): { levels: LadderState["levels"]; include: boolean[] } {
  const sigma = Float64Array.from(width, (value) => PEAK_ACCURACY * value);
  let fallback: { levels: LadderState["levels"]; include: boolean[] } = {
    levels,
    include: ns.map(() => true),
  };
  for (let skip = 0; ns.length - skip >= 4; skip++) {
    const include = ns.map((n, j) => j >= skip && found.has(n));
    const count = include.filter(Boolean).length;
    if (count < 4) break;
    const parameters = defectFree && count >= 5 ? 3 : 2;
    const { values } = levelLink({ ns, value: energy, sigma, include }, levels, parameters);
    if (!(values.rydberg > 0) || Math.abs(values.defect0 - levels.defect0) > 0.6) continue;
    let chi2 = 0;
    ns.forEach((n, j) => {
      if (include[j]) chi2 += ((energy[j]! - energyOf(n, values)) / sigma[j]!) ** 2;
    });
    fallback = { levels: values, include };
    if (chi2 <= 2 * Math.max(1, count - parameters)) break;
  }
  return fallback;
}

/** A line keeps this part of the width it is seen with, whatever the instrument. */
const LEAST_OWN_WIDTH = 0.2;
/** Energies of peaks are good to about this part of the width. */
const PEAK_ACCURACY = 0.15;

export interface Climbed {
  readonly fit: SpectrumFit;
  readonly state: LadderState;
}

/**
 * What      From the lines that stand out to all lines that can be told: a rough fit, then as many lines above as the
 *           linearised errors promise to be significant, then lines taken away from the top that are not.
 * Domain    the tail above the last free line is always in the model, so that adding a line never means adding
 *           absorption that the model did not have.
 */
export function climbLadder(
  points: FitPoints,
  initial: LadderState,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
): Climbed {
  const run = (state: LadderState, control: FitControl): Climbed => {
    stopIfCancelled(watch);
    const model = buildModel(points, state, protocol, unit, choices);
    const raw = fitSpectrum(points, model.spec, model.start, { ...control, watch });
    const fit = withAxisJitter(withSharedNoise(raw, points), protocol.axis.jitter_eV);
    stopIfCancelled(watch);
    return { fit, state: withLevelRange(stateAfter(fit, model.state), judgeLevels(fit, protocol)) };
  };
  let current = run(initial, ROUGH);
  if (protocol.lines.n === "auto") {
    current = dropUnseen(current, points, (state) => run(state, ROUGH));
    for (let round = 0; round < 3; round++) {
      const top = current.state.ns[current.state.ns.length - 1]!;
      const reachable = highestPromised(current, points, protocol, run);
      if (reachable > top) {
        const ns = [...current.state.ns, ...Array.from({ length: reachable - top }, (_, i) => top + 1 + i)];
        current = run(withLines(current.state, ns), ROUGH);
      }
      current = dropUnseen(current, points, (state) => run(state, ROUGH));
      if (current.state.ns[current.state.ns.length - 1]! <= top || reachable - top < LINES_TRIED_AHEAD) break;
    }
  }
  return protocol.lines.n === "auto" ? fillHoles(current, points, (state) => run(state, ROUGH)) : current;
}

/** Standard errors for noise that neighbours share, before residuals can tell: what is significant is decided by them. */
export function withSharedNoise(fit: SpectrumFit, { pointsAsOne }: FitPoints): SpectrumFit {
  return pointsAsOne === undefined ? fit : withScaledErrors(fit, pointsAsOne);
}

/** Lines inside that were lost on the way up come back where they belong to the spectrum after all. */
function fillHoles(climbed: Climbed, points: FitPoints, run: (state: LadderState) => Climbed): Climbed {
  const { ns } = climbed.state;
  const all = Array.from({ length: ns[ns.length - 1]! - ns[0]! + 1 }, (_, i) => ns[0]! + i);
  const holes = all.filter((n) => !ns.includes(n));
  if (holes.length === 0 || holes.length > ns.length) return climbed;
  const other = run(withLines(climbed.state, all));
  const seen = significances(other.fit);
  const needed = leastSignificance(points.energy.length);
  const gain = (climbed.fit.solution.chi2 - other.fit.solution.chi2) / (points.pointsAsOne ?? 1);
  const price = LEAST_BIC_GAIN + holes.length * PARAMETERS_PER_LINE * Math.log(points.energy.length);
  return gain > price && holes.every((n) => seen[all.indexOf(n)]! > needed) ? other : climbed;
}

/** Highest n whose area the linearised model, with all lines up to there free, tells from zero. */
function highestPromised(
  current: Climbed,
  points: FitPoints,
  protocol: Protocol,
  run: (state: LadderState, control: FitControl) => Climbed,
): number {
  const top = current.state.ns[current.state.ns.length - 1]!;
  const limit = Math.min(protocol.lines.max_n, top + LINES_TRIED_AHEAD);
  const last = points.energy[points.energy.length - 1]!;
  const ahead: number[] = [];
  for (let n = top + 1; n <= limit && energyOf(n, current.state.levels) < last; n++) ahead.push(n);
  // Too many lines freed at once spoil each other's errors, so the count is lowered until the highest one holds; with
  // fewer lines every error shrinks, hence the lower mark for where to look next.
  const needed = leastSignificance(points.energy.length);
  for (let count = ahead.length; count > 0;) {
    const ns = [...current.state.ns, ...ahead.slice(0, count)];
    const trial = run(withLines(current.state, ns), { maxIterations: 1, answer: "condensed" });
    const significant = significances(trial.fit).slice(current.state.ns.length);
    if (significant.every((value) => value > needed)) return ns[ns.length - 1]!;
    const hopeful = significant.findIndex((value) => !(value > HOPEFUL * needed));
    count = Math.min(count - 1, hopeful < 0 ? count - 1 : hopeful);
  }
  return top;
}

const HOPEFUL = 0.35;

/** An area that the user holds, or that stands at the user's bound, is there by the user's word. */
const HELD = 1e6;

/** Area over its standard error, by line; 0 where a line ended at a bound or has no error. */
export function significances(fit: SpectrumFit): number[] {
  const { lines } = fit;
  const k = lines.ns.length;
  return lines.ns.map((n, j) => {
    const parts = fit.constrained;
    const limited = parts?.limited.some((one) => one.n === n && one.parameter === "area");
    if (parts?.held.area.includes(n) === true || limited === true) return HELD;
    const i = 2 * k + j;
    const sigma = Math.sqrt(lines.covariance[i * 4 * k + i]!);
    return sigma > 0 && !fit.atBound.includes(n) ? lines.area[j]! / sigma : 0;
  });
}

/** What the two conditions ask of area over error: the fall of chi square when a line is taken away is its square. */
export function leastSignificance(points: number): number {
  return Math.max(LEAST_SIGNIFICANCE, Math.sqrt(LEAST_BIC_GAIN + PARAMETERS_PER_LINE * Math.log(points)));
}

/** Gain of the information criterion by having the line. */
export function bicGain(significance: number, points: number): number {
  return significance * significance - PARAMETERS_PER_LINE * Math.log(points);
}

/** Lines are taken from the top while the topmost is not significant; a line inside that is not seen goes too. */
function dropUnseen(climbed: Climbed, points: FitPoints, run: (state: LadderState) => Climbed): Climbed {
  const needed = leastSignificance(points.energy.length);
  let current = climbed;
  for (let guard = 0; guard < 40; guard++) {
    const { ns } = current.state;
    if (ns.length <= 2) return current;
    const seen = significances(current.fit);
    let keep = ns.length;
    while (keep > 2 && !(seen[keep - 1]! > needed)) keep--;
    const unseen = ns.filter((_, j) => j < keep && j > 0 && !(seen[j]! > 3));
    if (keep === ns.length && unseen.length === 0) return current;
    current = run(
      withLines(
        current.state,
        ns.filter((n, j) => j < keep && !unseen.includes(n)),
      ),
    );
  }
  return current;
}
