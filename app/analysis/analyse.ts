import { doubt, partOfWatch, stopIfCancelled, type Note, type Watch } from "../base/index.ts";
import { fitSpectrum, type SpectrumFit } from "../fit/index.ts";
import { strength } from "../laws/index.ts";
import { RESULT_SCHEMA, type Protocol, type RunglineResult } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { assignTwoPeaks, listAssignments, type Assignment, type AssignmentChoices } from "./assign-n.ts";
import {
  climbLadder,
  LEAST_BIC_GAIN,
  LEAST_SIGNIFICANCE,
  significances,
  startLadder,
  type Climbed,
} from "./climb-ladder.ts";
import { drawCurves, emptyCurves, type Curves } from "./curves.ts";
import { describeReading, describeResult } from "./describe-result.ts";
import { presetNotes } from "./find-doubts.ts";
import { findPeaks, type Peak } from "./find-peaks.ts";
import { fitEveryPoint, type FullFit } from "./fit-full.ts";
import { slitOf, withHeaderSlit } from "./instrument.ts";
import { buildModel, type LadderState, type ModelChoices } from "./ladder-model.ts";
import { judgeLevels } from "./level-range.ts";
import { asksForFringes, findFringes, givenPeriod, startWave, withoutWave } from "./fringes.ts";
import { depthPerSignal } from "./light.ts";
import { fitInDomain, type DomainFit } from "./measured-domain.ts";
import {
  drawingProgress,
  drawSpectra,
  planResampling,
  shareBeforeDraws,
  summariseDraws,
  type ResampledDraw,
  type ResamplingPlan,
} from "./resample.ts";
import { readByChance } from "./read-by-chance.ts";
import { splitSeries, weakSeriesNotes, withWeakSeries } from "./split-series.ts";
import { selectPoints, type SelectedPoints } from "./select-points.ts";
import { fadesUpward, smearedShares } from "./smeared-shares.ts";
import { sortNotes } from "./sort-notes.ts";
import { strayLightNotes } from "./stray-light.ts";
import { linesForThinning, thinPoints } from "./thin-points.ts";
import {
  CLEARLY_BETTER,
  isDoubtful,
  readingNotes,
  weighReading,
  type FittedReading,
} from "./weigh-readings.ts";
import { fitWithoutTail } from "./without-tail.ts";

/** The result without what only a shell knows (version, clock). */
export type AnalysisResult = Omit<RunglineResult, "run"> & {
  readonly seconds: { guess: number; solve: number; uncertainty: number };
};

export interface Analysis {
  readonly result: AnalysisResult;
  readonly curves: Curves;
  /** What is still to be drawn, where the caller wanted to do it: see `withResampling`. Null: nothing is left. */
  readonly resampling: ResamplingPlan | null;
}

export interface AnalyseOptions {
  /**
   * `now`: resampled spectra (`uncertainty.resample`) are drawn before the result is given. `later`: the caller draws them, in
   * any slices and on any thread (`drawSpectra`), and joins them with `withResampling`; the result is the same to the bit.
   */
  readonly resampling?: "now" | "later";
}

/**
 * The main job on one spectrum: find the lines, assign n, extend upward while significant, judge the background,
 * fit the laws, derive, and say every doubt. Pure: the same spectrum and protocol give the same bits.
 * Throws `Cancelled` when the watch says so.
 */
export function analyse(
  spectrum: Spectrum,
  asked: Protocol,
  whole: Watch,
  options: AnalyseOptions = {},
): Analysis {
  const protocol = withHeaderSlit(asked, spectrum.slit);
  const analysis = analyseAs(spectrum, protocol, whole, options);
  return { ...analysis, result: { ...analysis.result, protocol: asked } };
}

function analyseAs(spectrum: Spectrum, named: Protocol, whole: Watch, options: AnalyseOptions): Analysis {
  let protocol = named;
  const watch = partOfWatch(whole, 0, shareBeforeDraws(protocol.uncertainty));
  const began = watch.seconds();
  watch.report(0.05, "looking for lines");
  const everything = selectPoints(
    spectrum,
    protocol.mask_eV,
    protocol.window_eV?.[0] ?? -Infinity,
    protocol.window_eV?.[1] ?? Infinity,
  );
  const noise = noiseOfLines(everything);
  let peaks = findPeaks(everything.energy, everything.signal, noise);
  stopIfCancelled(watch);
  watch.report(0.15, "assigning n");
  const assignmentChoices: AssignmentChoices = {
    defectCentre: defectCentre(protocol),
    defectHeld: protocol.series.defect === "none",
    lowestN: protocol.material.first_n ?? (protocol.material.envelope === "P" ? 2 : 1),
    // The peaks speak for n whether or not the user wants all of them as lines of their own.
    highestN: Math.max(protocol.lines.max_n, HIGHEST_N_JUDGED),
  };
  let listed = listAssignments(peaks, assignmentChoices, MOST_READINGS);
  if (listed.length === 0 && asksForFringes(protocol)) {
    const flat = withoutWave(everything, givenPeriod(protocol));
    if (flat !== null) {
      peaks = findPeaks(everything.energy, flat, noise);
      listed = listAssignments(peaks, assignmentChoices, MOST_READINGS);
    }
  }
  const split = splitSeries(peaks, assignmentChoices, MOST_READINGS);
  if (split !== null) {
    listed = [...split.assignments];
    protocol = withWeakSeries(protocol, split.weak);
  }
  const pair =
    listed.length === 0 && protocol.material.first_n !== null
      ? assignTwoPeaks(peaks, assignmentChoices)
      : null;
  const assignments = pair === null ? listed : [pair];
  if (assignments.length === 0)
    return noSeries(spectrum, protocol, everything, peaks, watch.seconds() - began);
  const choices: ModelChoices = {
    background: protocol.background,
    tail: protocol.tail.model === "law",
    continuumOdd: true,
    asymmetry: protocol.lines.asymmetry,
  };
  const judged = judgeReadings(spectrum, protocol, peaks, assignments, choices, watch);
  const { chosen, assignment } = judged;
  const guessSeconds = watch.seconds() - began;
  if (pair !== null && !thirdLineStands(chosen.full))
    return noSeries(spectrum, protocol, everything, peaks, watch.seconds() - began);
  const chance = protocol.lines.n === "auto" ? readByChance(chosen.full, peaks) : null;
  if (chance !== null)
    return noSeries(spectrum, protocol, everything, peaks, watch.seconds() - began, chance);
  const inDomain = (one: ChosenFit): DomainFit =>
    fitInDomain(one.full, spectrum, one.points, protocol, one.choices, watch, (pass) =>
      watch.report(Math.min(0.8, 0.7 + 0.02 * pass), `fitting the light, pass ${pass + 1}`),
    );
  const plain = inDomain(chosen);
  const smeared = slitActs(spectrum, protocol)
    ? lookBetweenLines(chosen, plain.full, spectrum, protocol, watch, fitEvery(spectrum, protocol, watch))
    : null;
  const other = smeared === null ? null : inDomain(smeared);
  const { full, points: fitted } =
    other !== null && isExplained(plain.full, other.full, chosen.points) ? other : plain;
  watch.report(0.8, "uncertainties");
  const uncertaintyBegan = watch.seconds();
  const described = describeResult(spectrum, protocol, fitted, peaks, assignment, full, watch);
  const plan = planResampling(fitted, full, protocol, spectrum.unit, watch);
  const result: AnalysisResult = {
    ...described,
    notes: sortNotes([
      ...described.notes,
      ...judged.notes,
      ...(split === null ? [] : weakSeriesNotes(named, split.weak)),
      ...(described.notes.some(({ code }) => code === "step-seen")
        ? []
        : strayLightNotes(full, fitted, chosen, spectrum, protocol, watch)),
    ]),
    seconds: {
      guess: guessSeconds,
      solve: full.solveSeconds,
      uncertainty: watch.seconds() - uncertaintyBegan,
    },
  };
  const curves = drawCurves(spectrum, fitted, full);
  watch.report(1, "done");
  if (plan === null || options.resampling === "later") return { result, curves, resampling: plan };
  const draws = drawSpectra(plan, 0, protocol.uncertainty.resamples, whole, (done) =>
    whole.report(...drawingProgress(done, protocol.uncertainty)),
  );
  return {
    result: withResampling(result, plan, draws, watch.seconds() - uncertaintyBegan),
    curves,
    resampling: null,
  };
}

/** The result with its resampled intervals, from all draws of its plan in their order. */
export function withResampling(
  result: AnalysisResult,
  plan: ResamplingPlan,
  draws: readonly (ResampledDraw | null)[],
  uncertaintySeconds = result.seconds.uncertainty,
): AnalysisResult {
  const { resampled, notes } = summariseDraws(plan, draws);
  return {
    ...result,
    notes: sortNotes([...result.notes, ...notes]),
    resampled,
    seconds: { ...result.seconds, uncertainty: uncertaintySeconds },
  };
}

/** Which lines there are is decided with every energy free, and by the range of n that the lines support. */
function withFreeLevels(protocol: Protocol): Protocol {
  return { ...protocol, series: { ...protocol.series, mode: "free", fit_n: "auto" } };
}

interface JudgedReading {
  readonly chosen: ChosenFit;
  readonly assignment: Assignment;
  readonly notes: readonly Note[];
}

/** Readings of the peaks that the fit may have to choose from. */
const MOST_READINGS = 4;

/**
 * The best reading of the peaks, fitted; where that is doubtful the others too, roughly, and the best of them in full.
 * The one that describes spectrum and level law best is taken, and what decided is said.
 */
function judgeReadings(
  spectrum: Spectrum,
  protocol: Protocol,
  peaks: readonly Peak[],
  assignments: readonly Assignment[],
  choices: ModelChoices,
  watch: Watch,
): JudgedReading {
  const free = withFreeLevels(protocol);
  const climb = (assignment: Assignment): RoughReading => {
    stopIfCancelled(watch);
    const start = startLadder(peaks, assignment, protocol);
    const points = fitWindow(spectrum, protocol, start);
    const from = (state: LadderState): RoughReading => {
      const finest = state.fringes === undefined ? Infinity : state.fringes.period / BINS_A_FRINGE;
      const thinned = thinPoints(points, linesForThinning(state, protocol), undefined, finest);
      const climbed = climbLadder(thinned, state, free, spectrum.unit, choices, watch);
      return { assignment, start: state, points, climbed };
    };
    if (!asksForFringes(protocol)) return from(start);
    const given = givenPeriod(protocol);
    if (given !== null) return from({ ...start, fringes: startWave(points, given) });
    const without = from(start);
    const model = buildModel(points, without.climbed.state, free, spectrum.unit, choices);
    const { residuals } = fitSpectrum(points, model.spec, model.start, { ...SEARCH, watch }).solution;
    stopIfCancelled(watch);
    const seen = findFringes(points.energy, residuals);
    return seen === null ? without : from({ ...start, fringes: startWave(points, seen.period_eV) });
  };
  const finish = (rough: RoughReading): JudgedFit => {
    const fit = fitWithTailOrWithout(
      spectrum,
      protocol,
      rough.start,
      rough.points,
      rough.climbed,
      choices,
      watch,
    );
    const { full } = fit;
    return {
      fit,
      reading: {
        ...full,
        unassigned: rough.assignment.unmatched.length,
        shutOut: shutOut(peaks, fit.points),
      },
    };
  };
  watch.report(0.2, "climbing the ladder");
  const first = climb(assignments[0]!);
  const best = finish(first);
  const settled = best.fit.full.selfConsistent;
  const alone: JudgedReading = { chosen: best.fit, assignment: first.assignment, notes: [] };
  if (assignments.length === 1 || protocol.lines.n !== "auto") return alone;
  if (!isDoubtful(best.reading, defectCentre(protocol), settled)) return alone;
  watch.report(0.6, "trying other readings of n");
  const rough = [first, ...assignments.slice(1).map(climb)].map((one) => {
    const reading: FittedReading = {
      ...one.climbed,
      range: judgeLevels(one.climbed.fit, free),
      unassigned: one.assignment.unmatched.length,
      shutOut: shutOut(peaks, one.points),
    };
    return { one, reading };
  });
  const points = rough[0]!.reading.fit.solution.residuals.length;
  const least = Math.min(1e3, ...rough.map(({ reading }) => reducedOf(reading.fit)));
  const weights = rough.map(({ reading }) => weighReading(reading, points, Math.max(1, least)));
  const promising = weights
    .map((weight, i) => ({ weight, i }))
    .slice(1)
    .sort((a, b) => a.weight - b.weight)[0]!;
  if (promising.weight > weights[0]! + CLEARLY_BETTER) return alone;
  const other = finish(rough[promising.i]!.one);
  const all = best.fit.points.energy.length;
  const scale = Math.max(1, Math.min(reducedOf(best.fit.full.fit), reducedOf(other.fit.full.fit)));
  const excess = weighReading(other.reading, all, scale) - weighReading(best.reading, all, scale);
  if (excess < -CLEARLY_BETTER) {
    const others = [{ state: best.fit.full.state, excess: -excess }];
    return {
      chosen: other.fit,
      assignment: rough[promising.i]!.one.assignment,
      notes: readingNotes(other.fit.full.state, others, true),
    };
  }
  const others = [{ state: other.fit.full.state, excess }];
  const same = sameNumbers(best.fit.full.state, other.fit.full.state);
  return { ...alone, notes: same ? [] : readingNotes(best.fit.full.state, others, false) };
}

/** Bins of the preparing fits on a period of fringes. */
const BINS_A_FRINGE = 16;
/** The fit whose residuals are searched for fringes. */
const SEARCH = { maxIterations: 15, gradientTolerance: 1e-4, costTolerance: 1e-6 };

/** Peaks that a window leaves out at its lower end, as chi square: what is not fitted must not count as explained. */
function shutOut(peaks: readonly Peak[], points: SelectedPoints): number {
  const low = points.energy[0]!;
  return peaks
    .filter((peak) => peak.energy_eV < low)
    .reduce((sum, peak) => sum + peak.significance * peak.significance, 0);
}

interface RoughReading {
  readonly assignment: Assignment;
  readonly start: LadderState;
  readonly points: SelectedPoints;
  readonly climbed: Climbed;
}

interface JudgedFit {
  readonly fit: ChosenFit;
  readonly reading: FittedReading;
}

function reducedOf(fit: SpectrumFit): number {
  return fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom);
}

/** Two states with the same n at the same places. */
function sameNumbers(a: LadderState, b: LadderState): boolean {
  return b.ns.every((n, j) => {
    const i = a.ns.indexOf(n);
    return i < 0 || Math.abs(a.energy[i]! - b.energy[j]!) < 0.5 * Math.max(a.width[i]!, b.width[j]!);
  });
}

/** A series guessed from two peaks stands when a third line was found and all of it describes the spectrum. */
function thirdLineStands({ fit, selfConsistent }: FullFit): boolean {
  const seen = significances(fit);
  return (
    seen.length >= 3 &&
    seen.every((value) => value > LEAST_SIGNIFICANCE) &&
    selfConsistent &&
    fit.solution.converged &&
    reducedOf(fit) < MOST_MISFIT_OF_GUESS
  );
}

const MOST_MISFIT_OF_GUESS = 1.15;

interface ChosenFit {
  readonly points: SelectedPoints;
  readonly choices: ModelChoices;
  readonly full: FullFit;
}

/** A misfit beyond this asks for the second reading, which is taken when it at least halves the reduced chi square. */
const GROSS_MISFIT = 2;

/** The tail tied to the laws, unless the spectrum flatly contradicts it and a window below the tail does not. */
function fitWithTailOrWithout(
  spectrum: Spectrum,
  protocol: Protocol,
  start: LadderState,
  points: SelectedPoints,
  climbed: Climbed,
  choices: ModelChoices,
  watch: Watch,
): ChosenFit {
  const fit = fitEvery(spectrum, protocol, watch);
  const plain = fit(points, climbed.state, choices, 0.4);
  const smeared = slitActs(spectrum, protocol)
    ? null
    : lookBetweenLines(plain, plain.full, spectrum, protocol, watch, fit);
  const first = smeared !== null && isExplained(plain.full, smeared.full, points) ? smeared : plain;
  const reduced = reducedChi2(first.full);
  if (!choices.tail || reduced < GROSS_MISFIT || followsStrengthLaw(first.full)) return first;
  watch.report(0.6, "trying without a tail");
  const other = fitWithoutTail(spectrum, withFreeLevels(protocol), start, points.energy[0]!, choices, watch);
  if (other === null || other.reducedChi2 > reduced / GROSS_MISFIT) return first;
  const second = fit(other.points, other.state, { ...choices, tail: false }, 0.6);
  return reducedChi2(second.full) < reduced / GROSS_MISFIT ? second : first;
}

type FitEvery = (on: SelectedPoints, state: LadderState, how: ModelChoices, from: number) => ChosenFit;

function fitEvery(spectrum: Spectrum, protocol: Protocol, watch: Watch): FitEvery {
  return (on, state, how, from) => ({
    points: on,
    choices: how,
    full: fitEveryPoint(on, state, protocol, spectrum.unit, how, watch, (pass) =>
      watch.report(from + 0.02 * Math.min(pass, 5), `fitting every point, pass ${pass + 1}`),
    ),
  });
}

/** A slit averages light: what it leaves over in a fit of the absorption says nothing before the light is fitted. */
function slitActs(spectrum: Spectrum, protocol: Protocol): boolean {
  return slitOf(protocol).given && protocol.lines.domain !== "alpha" && depthPerSignal(spectrum) !== null;
}

/**
 * Where the lines on their own leave a misfit: what high lines have lost may be smeared over their surroundings. The fit
 * with that; null where there is no misfit (in `judged`), or no question.
 */
function lookBetweenLines(
  plain: ChosenFit,
  judged: FullFit,
  spectrum: Spectrum,
  protocol: Protocol,
  watch: Watch,
  fit: FitEvery,
): ChosenFit | null {
  const { points, choices, full } = plain;
  const { chi2, degreesOfFreedom } = judged.fit.solution;
  const { smeared, cutoff_n } = protocol.tail;
  const enough = full.state.ns.length >= FEWEST_TO_FADE && cutoff_n === null && smeared === "auto";
  if (!choices.tail || !enough || chi2 < LEAST_MISFIT * degreesOfFreedom) return null;
  watch.report(0.5, "looking between the lines");
  const how: ModelChoices = { ...choices, smeared: true };
  const free = withFreeLevels(protocol);
  const thinned = thinPoints(points, linesForThinning(full.state, protocol));
  const climbed = climbLadder(thinned, full.state, free, spectrum.unit, how, watch);
  return fit(points, climbed.state, how, 0.5);
}

/**
 * Whether what is smeared explains all of what was left over, or at least half and looks like a series that fades; and the
 * information criterion prefers it. Next to the last line shares may swing even where all is explained: there they and the
 * areas of blended lines describe the same absorption.
 */
function isExplained(plain: FullFit, other: FullFit, points: SelectedPoints): boolean {
  const { chi2, degreesOfFreedom } = plain.fit.solution;
  const { solution } = other.fit;
  const more = degreesOfFreedom - solution.degreesOfFreedom;
  const gain = (chi2 - solution.chi2) / (points.pointsAsOne ?? 1) - more * Math.log(points.energy.length);
  const left = (solution.chi2 - solution.degreesOfFreedom) / (chi2 - degreesOfFreedom);
  const explained = left < 0.05 || (left < 0.5 && fadesUpward(smearedShares(other.fit)));
  return solution.converged && gain > LEAST_BIC_GAIN && explained;
}

const FEWEST_TO_FADE = 6;
/** Estimated noise is good to a few percent, so a tenth of chi square is a misfit. */
const LEAST_MISFIT = 1.1;

/** Areas over the strength law within a factor of three of each other, and a tail that is neither nothing nor too much. */
function followsStrengthLaw({ fit }: FullFit): boolean {
  const { tail } = fit.problem.spec;
  if (tail === null || fit.factor === null) return false;
  const ratios = fit.lines.ns.map(
    (n, j) => fit.lines.area[j]! / strength(n, tail.levels.defect0, tail.strength.law, tail.strength.base),
  );
  const steady = Math.min(...ratios) > 0 && Math.max(...ratios) < MOST_SPREAD * Math.min(...ratios);
  return steady && !fit.factor.atBound && fit.factor.value > LEAST_FACTOR;
}

const MOST_SPREAD = 3;
const LEAST_FACTOR = 0.3;

function reducedChi2(full: FullFit): number {
  const { chi2, degreesOfFreedom } = full.fit.solution;
  return chi2 / Math.max(1, degreesOfFreedom);
}

/** One standard deviation per point as a line sees it that is wider than neighbours share their noise. */
function noiseOfLines({ sigma, pointsAsOne }: SelectedPoints): Float64Array {
  if (pointsAsOne === undefined) return sigma;
  const root = Math.sqrt(pointsAsOne);
  return sigma.map((one) => root * one);
}

/** Higher lines are hardly ever peaks of their own. */
const HIGHEST_N_JUDGED = 40;

/** Readings of n are told apart by the convention |defect - centre| <= 0.5, unless a preset or the user pins it. */
function defectCentre(protocol: Protocol): number {
  const ideal = (3 - protocol.material.dimension) / 2;
  return protocol.series.defect === "none" ? ideal : (protocol.material.defect0 ?? ideal);
}

/** From below the first line to just above the gap, as the lines themselves say, unless the protocol does. */
function fitWindow(spectrum: Spectrum, protocol: Protocol, start: LadderState): SelectedPoints {
  const last = start.ns.length - 1;
  const low = protocol.window_eV?.[0] ?? start.energy[0]! - WINDOW_BELOW_WIDTHS * start.width[0]!;
  const above = Math.max(WINDOW_ABOVE_RYDBERGS * start.levels.rydberg, 3 * start.width[last]!);
  const high = protocol.window_eV?.[1] ?? start.levels.gap + above;
  return selectPoints(spectrum, protocol.mask_eV, low, high);
}

/** Ten widths of the widest line on both sides together are what tells asymmetry from background. */
const WINDOW_BELOW_WIDTHS = 6;
/** 1 meV for cuprous oxide. */
const WINDOW_ABOVE_RYDBERGS = 0.011;

/** In words, where the window that was asked for holds nothing of the file. */
function windowOutside(spectrum: Spectrum, protocol: Protocol): string | null {
  const first = spectrum.energy_eV[0]!;
  const last = spectrum.energy_eV[spectrum.energy_eV.length - 1]!;
  const [low, high] = protocol.window_eV ?? [first, last];
  if (low <= last && high >= first) return null;
  return `The window from ${low} to ${high} eV lies outside the file, which runs from ${first.toPrecision(7)} to ${last.toPrecision(7)} eV: nothing was fitted.`;
}

/** Energies that a sentence can hold. */
const MOST_NAMED = 12;

function noSeries(
  spectrum: Spectrum,
  protocol: Protocol,
  points: SelectedPoints,
  peaks: readonly Peak[],
  seconds: number,
  tried = "",
): Analysis {
  const named = peaks.slice(0, MOST_NAMED).map((peak) => `${(1e3 * peak.energy_eV).toPrecision(6)} meV`);
  const more = peaks.length - named.length;
  const seen = `${named.join(", ")}${more > 0 ? ` and ${more} more` : ""}`;
  const outside = points.energy.length === 0 ? windowOutside(spectrum, protocol) : null;
  const note = doubt(
    "no-series",
    "series",
    outside !== null
      ? outside
      : peaks.length === 0
        ? "No significant line was found on the background."
        : `${peaks.length} significant line${peaks.length === 1 ? "" : "s"} (${seen}), but no level law with at least three of them was found.${tried}`,
    outside !== null
      ? "correct window_eV, or leave it out"
      : "check axis, unit and window; name the lines (lines.n) and the material; state the noise (noise.sigma) where neighbouring readings share it",
  );
  return {
    result: {
      schema: RESULT_SCHEMA,
      source: { file: spectrum.file, sha256: spectrum.sha256, points: spectrum.energy_eV.length },
      reading: describeReading(spectrum, points.energy.length),
      protocol,
      status: "no-series",
      notes: sortNotes([note, ...spectrum.notes, ...presetNotes(protocol)]),
      fit: null,
      lines: [],
      series: null,
      systematic: null,
      width_law: null,
      strength_law: null,
      tail: null,
      derived: null,
      background: [],
      seconds: { guess: seconds, solve: 0, uncertainty: 0 },
    },
    curves: emptyCurves(spectrum),
    resampling: null,
  };
}
