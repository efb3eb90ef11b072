import { doubt, stopIfCancelled, type Watch } from "../base/index.ts";
import { strength } from "../laws/index.ts";
import { RESULT_SCHEMA, type Protocol, type RunglineResult } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { assignPrincipalNumbers } from "./assign-n.ts";
import { climbLadder, startLadder, type Climbed } from "./climb-ladder.ts";
import { drawCurves, emptyCurves, type Curves } from "./curves.ts";
import { describeReading, describeResult, sortNotes } from "./describe-result.ts";
import { presetNotes } from "./find-doubts.ts";
import { findPeaks, type Peak } from "./find-peaks.ts";
import { fitEveryPoint, type FullFit } from "./fit-full.ts";
import type { LadderState, ModelChoices } from "./ladder-model.ts";
import { fitInDomain } from "./measured-domain.ts";
import { selectPoints, type SelectedPoints } from "./select-points.ts";
import { linesForThinning, thinPoints } from "./thin-points.ts";
import { fitWithoutTail } from "./without-tail.ts";

/** The result without what only a shell knows (version, clock). */
export type AnalysisResult = Omit<RunglineResult, "run"> & {
  readonly seconds: { guess: number; solve: number; uncertainty: number };
};

export interface Analysis {
  readonly result: AnalysisResult;
  readonly curves: Curves;
}

/**
 * The main job on one spectrum: find the lines, assign n, extend upward while significant, judge the background,
 * fit the laws, derive, and say every doubt. Pure: the same spectrum and protocol give the same bits.
 * Throws `Cancelled` when the watch says so.
 */
export function analyse(spectrum: Spectrum, protocol: Protocol, watch: Watch): Analysis {
  const began = watch.seconds();
  watch.report(0.05, "looking for lines");
  const everything = selectPoints(
    spectrum,
    protocol.mask_eV,
    protocol.window_eV?.[0] ?? -Infinity,
    protocol.window_eV?.[1] ?? Infinity,
  );
  const peaks = findPeaks(everything.energy, everything.signal, everything.sigma);
  stopIfCancelled(watch);
  watch.report(0.15, "assigning n");
  const assignment = assignPrincipalNumbers(peaks, {
    defectCentre: defectCentre(protocol),
    defectHeld: protocol.series.defect === "none",
    lowestN: protocol.material.first_n ?? (protocol.material.envelope === "P" ? 2 : 1),
    // The peaks speak for n whether or not the user wants all of them as lines of their own.
    highestN: Math.max(protocol.lines.max_n, HIGHEST_N_JUDGED),
  });
  if (assignment === null) return noSeries(spectrum, protocol, everything, peaks, watch.seconds() - began);
  const start = startLadder(peaks, assignment, protocol);
  const points = fitWindow(spectrum, protocol, start);
  const thinned = thinPoints(points, linesForThinning(start, protocol));
  watch.report(0.2, "climbing the ladder");
  const choices: ModelChoices = {
    background: protocol.background,
    tail: protocol.tail.model === "law",
    continuumOdd: true,
    asymmetry: protocol.lines.asymmetry,
  };
  const climbed = climbLadder(thinned, start, withFreeLevels(protocol), spectrum.unit, choices, watch);
  const guessSeconds = watch.seconds() - began;
  const chosen = fitWithTailOrWithout(spectrum, protocol, start, points, climbed, choices, watch);
  const { full, points: fitted } = fitInDomain(
    chosen.full,
    spectrum,
    chosen.points,
    protocol,
    chosen.choices,
    watch,
    (pass) => watch.report(Math.min(0.8, 0.7 + 0.02 * pass), `fitting the light, pass ${pass + 1}`),
  );
  watch.report(0.8, "uncertainties");
  const uncertaintyBegan = watch.seconds();
  const parts = describeResult(spectrum, protocol, fitted, peaks, assignment, full, chosen.choices, watch);
  watch.report(1, "done");
  return {
    result: {
      ...parts,
      seconds: {
        guess: guessSeconds,
        solve: full.solveSeconds,
        uncertainty: watch.seconds() - uncertaintyBegan,
      },
    },
    curves: drawCurves(spectrum, fitted, full),
  };
}

/** Which lines there are is decided with every energy free. */
function withFreeLevels(protocol: Protocol): Protocol {
  return { ...protocol, series: { ...protocol.series, mode: "free" } };
}

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
  const fit = (on: SelectedPoints, state: LadderState, how: ModelChoices, from: number): ChosenFit => ({
    points: on,
    choices: how,
    full: fitEveryPoint(on, state, protocol, spectrum.unit, how, watch, (pass) =>
      watch.report(from + 0.02 * Math.min(pass, 5), `fitting every point, pass ${pass + 1}`),
    ),
  });
  const first = fit(points, climbed.state, choices, 0.4);
  const reduced = reducedChi2(first.full);
  if (!choices.tail || reduced < GROSS_MISFIT || followsStrengthLaw(first.full)) return first;
  watch.report(0.6, "trying without a tail");
  const other = fitWithoutTail(spectrum, withFreeLevels(protocol), start, points.energy[0]!, choices, watch);
  if (other === null || other.reducedChi2 > reduced / GROSS_MISFIT) return first;
  const second = fit(other.points, other.state, { ...choices, tail: false }, 0.6);
  return reducedChi2(second.full) < reduced / GROSS_MISFIT ? second : first;
}

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

function noSeries(
  spectrum: Spectrum,
  protocol: Protocol,
  points: SelectedPoints,
  peaks: readonly Peak[],
  seconds: number,
): Analysis {
  const seen = peaks.map((peak) => `${(1e3 * peak.energy_eV).toPrecision(6)} meV`).join(", ");
  const note = doubt(
    "no-series",
    "series",
    peaks.length === 0
      ? "No significant line was found on the background."
      : `${peaks.length} significant line${peaks.length === 1 ? "" : "s"} (${seen}), but no level law with at least three of them was found.`,
    "check axis, unit and window; name the lines (lines.n) and the material, or measure with less noise",
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
  };
}
