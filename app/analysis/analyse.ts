import {
  doubt,
  NOT_DETERMINED,
  stopIfCancelled,
  symmetric,
  type Note,
  type Quantity,
  type Watch,
} from "../base/index.ts";
import { WIDTH, widthLaw } from "../laws/index.ts";
import { RESULT_SCHEMA, type Protocol, type RunglineResult } from "../protocol/index.ts";
import {
  deriveQuantities,
  fitStrengths,
  fitWidths,
  rankReadings,
  type StrengthInput,
  type WidthInput,
} from "../series/index.ts";
import { durbinWatson, informationCriteria, neighbourCorrelation, runsTest } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { assignPrincipalNumbers, type Assignment } from "./assign-n.ts";
import { bicGain, climbLadder, significances, startLadder, type Climbed } from "./climb-ladder.ts";
import { drawCurves, emptyCurves, type Curves } from "./curves.ts";
import { describeSeries } from "./describe-series.ts";
import { findDoubts, presetNotes } from "./find-doubts.ts";
import { findPeaks, type Peak } from "./find-peaks.ts";
import { fitEveryPoint, type FullFit } from "./fit-full.ts";
import { intervalFactor } from "./interval.ts";
import { energyOf, type LadderState, type ModelChoices } from "./ladder-model.ts";
import { covarianceBlock, determinedPlaces } from "./level-range.ts";
import { selectPoints, type SelectedPoints } from "./select-points.ts";
import { judgeSystematics } from "./systematics.ts";
import { thinPoints } from "./thin-points.ts";
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
    highestN: protocol.lines.max_n,
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
  const climbed = climbLadder(thinned, start, protocol, spectrum.unit, choices, watch);
  const chosen = chooseTail(spectrum, protocol, start, points, climbed, choices, watch);
  const guessSeconds = watch.seconds() - began;
  const full = fitEveryPoint(
    chosen.points,
    chosen.state,
    protocol,
    spectrum.unit,
    chosen.choices,
    watch,
    (pass) => watch.report(Math.min(0.8, 0.4 + 0.1 * pass), `fitting every point, pass ${pass + 1}`),
  );
  watch.report(0.8, "uncertainties");
  const uncertaintyBegan = watch.seconds();
  const parts = describe(spectrum, protocol, chosen.points, peaks, assignment, full, chosen.choices, watch);
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
    curves: drawCurves(spectrum, chosen.points, full),
  };
}

interface ChosenTail {
  readonly points: SelectedPoints;
  readonly state: LadderState;
  readonly choices: ModelChoices;
}

/** A misfit beyond this on averaged points asks for the second reading, which is taken when it at least halves it. */
const GROSS_MISFIT = 2;

/** The tail tied to the laws, unless the spectrum flatly contradicts it and a window below the tail does not. */
function chooseTail(
  spectrum: Spectrum,
  protocol: Protocol,
  start: LadderState,
  points: SelectedPoints,
  climbed: Climbed,
  choices: ModelChoices,
  watch: Watch,
): ChosenTail {
  const withTail: ChosenTail = { points, state: climbed.state, choices };
  const { chi2, degreesOfFreedom } = climbed.fit.solution;
  const reduced = chi2 / Math.max(1, degreesOfFreedom);
  if (!choices.tail || reduced < GROSS_MISFIT) return withTail;
  watch.report(0.3, "trying without a tail");
  const other = fitWithoutTail(spectrum, protocol, start, points.energy[0]!, choices, watch);
  if (other === null || other.reducedChi2 > reduced / GROSS_MISFIT) return withTail;
  return { points: other.points, state: other.state, choices: { ...choices, tail: false } };
}

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

function linesForThinning(start: LadderState, protocol: Protocol): { energy: number; width: number }[] {
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

type Described = Omit<AnalysisResult, "seconds">;

function describe(
  spectrum: Spectrum,
  protocol: Protocol,
  points: SelectedPoints,
  peaks: readonly Peak[],
  assignment: Assignment,
  full: FullFit,
  choices: ModelChoices,
  watch: Watch,
): Described {
  const { fit, state, range } = full;
  const factor = intervalFactor(protocol.uncertainty.level);
  const { solution } = fit;
  const reduced = solution.chi2 / Math.max(1, solution.degreesOfFreedom);
  const scale = protocol.uncertainty.scale_by_residuals ? Math.sqrt(reduced) : 1;
  const k = fit.lines.ns.length;
  const error = (block: number, j: number): number => {
    const i = block * k + j;
    return Math.sqrt(fit.lines.covariance[i * 4 * k + i]!) * scale;
  };
  const quantity = (value: number, sigma: number, atBound = false): Quantity =>
    atBound || !(sigma > 0) ? { value, sigma: null, low: null, high: null } : symmetric(value, sigma, factor);
  const places = determinedPlaces(fit, 0);
  const energies = {
    n: fit.lines.ns,
    energy_eV: fit.lines.energy,
    covariance: scaleAll(
      covarianceBlock(
        fit,
        0,
        fit.lines.ns.map((_, j) => j),
      ),
      scale * scale,
    ),
  };
  const seen = significances(fit);
  const m = points.energy.length;
  const derivedParts = deriveQuantities({
    material: protocol.material,
    levels: range?.fit ?? null,
    energies,
    lines: fit.lines.ns.map((n, j) => ({
      n,
      width_eV: fit.lines.width[j]!,
      area: fit.lines.area[j]!,
      asymmetry: fit.lines.asymmetry[j]!,
      covariance: scaleAll(lineCovariance(full, j), scale * scale),
      significance: seen[j]!,
      bic_gain: bicGain(seen[j]!, m),
    })),
    signalUnit: spectrum.unit,
    factor,
  });
  const asymmetryFree = protocol.lines.asymmetry !== "zero";
  const lines: RunglineResult["lines"] = fit.lines.ns.map((n, j) => {
    const bound = fit.atBound.includes(n);
    const { binding_eV: _, ...derived } = derivedParts.lines[j]!;
    // q of a line whose area is hardly seen says nothing (PHYSICS of the asymmetry).
    const qKnown = asymmetryFree && (protocol.lines.asymmetry === "shared" || seen[j]! > 3);
    return {
      n,
      energy_eV: quantity(fit.lines.energy[j]!, error(0, j), bound),
      width_eV: quantity(fit.lines.width[j]!, error(1, j), bound),
      area: quantity(fit.lines.area[j]!, error(2, j)),
      asymmetry: !asymmetryFree
        ? { value: 0, sigma: 0, low: 0, high: 0 }
        : qKnown
          ? quantity(fit.lines.asymmetry[j]!, error(3, j))
          : NOT_DETERMINED,
      significance: seen[j]!,
      bic_gain: bicGain(seen[j]!, m),
      peak: derived.peak,
      spacing_eV: derived.spacing_eV,
      width_over_spacing: derived.width_over_spacing,
      lifetime_ps: derived.lifetime_ps,
      law_offset_eV: derived.law_offset_eV,
      in_level_fit: derived.in_level_fit,
      area_n3: derived.area_n3,
      strength_per_cm3: derived.strength_per_cm3,
    };
  });
  const laws = describeLaws(full, protocol, scale, factor);
  const seriesPart =
    range === null
      ? null
      : describeSeries(range, fit, covarianceBlock(fit, 0, places), places, laws.readings, protocol);
  stopIfCancelled(watch);
  const systematic =
    protocol.uncertainty.systematic && range !== null
      ? judgeSystematics(
          thinPoints(points, linesForThinning(state, protocol)),
          state,
          range.fit,
          protocol,
          spectrum.unit,
          choices,
          watch,
        )
      : null;
  const parameters = fit.problem.nonlinear + fit.problem.linear;
  const criteria = informationCriteria(solution.chi2, m, parameters);
  const lag1 = neighbourCorrelation(solution.residuals);
  const fitPart: NonNullable<RunglineResult["fit"]> = {
    domain: "alpha",
    termination: solution.termination,
    sigma_from: protocol.uncertainty.scale_by_residuals ? "residuals" : "given",
    chi2: solution.chi2,
    dof: solution.degreesOfFreedom,
    reduced_chi2: reduced,
    aic: criteria.aic,
    bic: criteria.bic,
    durbin_watson: durbinWatson(solution.residuals),
    runs_p: runsTest(solution.residuals).p,
    lag1,
    effective_points: m * Math.min(1, (1 - lag1) / (1 + lag1)),
    iterations: solution.iterations,
    reached: finiteOnly(solution.reached),
    tolerances: finiteOnly(solution.tolerances),
    condition: solution.condition,
    rank: solution.rank,
    parameters,
    window_eV: [points.energy[0]!, points.energy[m - 1]!],
  };
  const tail: RunglineResult["tail"] =
    fit.factor === null || fit.problem.spec.tail === null
      ? null
      : {
          factor: quantity(fit.factor.value, fit.factor.sigma * scale, fit.factor.atBound),
          from_n: fit.problem.spec.tail.fromN,
          to_n: fit.problem.spec.tail.toN,
        };
  const series = seriesPart?.series ?? null;
  const notes = sortNotes([
    ...spectrum.notes,
    ...findDoubts({ spectrum, protocol, points, peaks, assignment, full, fit: fitPart, lines, tail, series }),
    ...(seriesPart?.notes ?? []),
    ...laws.notes,
    ...derivedParts.notes,
  ]);
  return {
    schema: RESULT_SCHEMA,
    source: { file: spectrum.file, sha256: spectrum.sha256, points: spectrum.energy_eV.length },
    reading: describeReading(spectrum, m),
    protocol,
    status: solution.converged ? "converged" : "not-converged",
    notes,
    fit: fitPart,
    lines,
    series,
    systematic,
    width_law: laws.width,
    strength_law: laws.strength,
    tail,
    derived:
      derivedParts.derived === null
        ? null
        : { ...derivedParts.derived, radius_um: [...derivedParts.derived.radius_um] },
    background: fit.background.map((column) => ({
      term: column.term,
      name: column.name,
      unit: column.unit,
      quantity: quantity(column.value, column.sigma * scale),
    })),
  };
}

/** 3 x 3 covariance of width, area and asymmetry of line j. */
function lineCovariance(full: FullFit, j: number): Float64Array {
  const { covariance, ns } = full.fit.lines;
  const k = ns.length;
  const places = [k + j, 2 * k + j, 3 * k + j];
  return Float64Array.from(
    { length: 9 },
    (_, i) => covariance[places[Math.floor(i / 3)]! * 4 * k + places[i % 3]!]!,
  );
}

function scaleAll(values: Float64Array, factor: number): Float64Array {
  return factor === 1 ? values : values.map((value) => value * factor);
}

function describeLaws(
  full: FullFit,
  protocol: Protocol,
  scale: number,
  factor: number,
): {
  width: RunglineResult["width_law"];
  strength: RunglineResult["strength_law"];
  readings: NonNullable<RunglineResult["series"]>["readings"];
  notes: readonly Note[];
} {
  const { fit, range } = full;
  const levels = range?.fit.estimates.values;
  const widthPlaces = determinedPlaces(fit, 1);
  const areaPlaces = determinedPlaces(fit, 2);
  const widthInput: WidthInput = {
    n: widthPlaces.map((j) => fit.lines.ns[j]!),
    width_eV: Float64Array.from(widthPlaces, (j) => fit.lines.width[j]!),
    covariance: scaleAll(covarianceBlock(fit, 1, widthPlaces), scale * scale),
    exponent: protocol.width.exponent,
    base: protocol.width.base,
    floorKind: protocol.width.floor_kind,
    defect0: levels?.[2] ?? 0,
    defect2: levels?.[3] ?? 0,
    factor,
  };
  const strengthInput: StrengthInput = {
    n: areaPlaces.map((j) => fit.lines.ns[j]!),
    area: Float64Array.from(areaPlaces, (j) => fit.lines.area[j]!),
    covariance: scaleAll(covarianceBlock(fit, 2, areaPlaces), scale * scale),
    law: protocol.strength.law,
    base: protocol.strength.base,
    defect0: levels?.[2] ?? 0,
    defect2: levels?.[3] ?? 0,
  };
  const widths = fitWidths(widthInput);
  const strengths = fitStrengths(strengthInput);
  const notes: Note[] = [];
  if (widths.ok) notes.push(...widths.value.notes);
  if (strengths.ok) notes.push(...strengths.value.notes);
  let readings: NonNullable<RunglineResult["series"]>["readings"] = [];
  if (range !== null) {
    const ranked = rankReadings({
      defect0: range.fit.estimates.values[2]!,
      defectFree: range.fit.defect !== "none",
      dimension: protocol.material.dimension,
      envelope: protocol.material.envelope,
      pinned: protocol.material.first_n !== null,
      widths: widthInput,
      strengths: strengthInput,
    });
    readings = ranked.readings.map((reading) => ({ ...reading }));
    notes.push(...ranked.notes);
  }
  const span = (ns: readonly number[]): [number, number] => [ns[0] ?? 0, ns[ns.length - 1] ?? 0];
  const pick = (estimates: { values: Float64Array; covariance: Float64Array }, i: number): Quantity => {
    const sigma = Math.sqrt(estimates.covariance[i * estimates.values.length + i]!);
    return symmetric(estimates.values[i]!, Number.isFinite(sigma) ? sigma : null, factor);
  };
  return {
    width: widths.ok
      ? {
          floor_eV: widths.value.floorAtZero
            ? { value: 0, sigma: null, low: null, high: null }
            : pick(widths.value.estimates, 0),
          coefficient_eV: pick(widths.value.estimates, 1),
          exponent: pick(widths.value.estimates, 2),
          base: protocol.width.base,
          fit_n: span(widths.value.n),
          chi2: widths.value.chi2,
          dof: widths.value.degreesOfFreedom,
          p: widths.value.degreesOfFreedom > 0 ? widths.value.p : null,
        }
      : null,
    strength: strengths.ok
      ? {
          coefficient: pick(strengths.value.estimates, 0),
          law: protocol.strength.law,
          base: protocol.strength.base,
          fit_n: span(strengths.value.n),
          chi2: strengths.value.chi2,
          dof: strengths.value.degreesOfFreedom,
          p: strengths.value.degreesOfFreedom > 0 ? strengths.value.p : null,
          half_at_n: strengths.value.half_at_n,
        }
      : null,
    readings,
    notes,
  };
}

function describeReading(spectrum: Spectrum, usedPoints: number): RunglineResult["reading"] {
  const last = spectrum.energy_eV.length - 1;
  return {
    columns: spectrum.columns.map((column) => ({ ...column })),
    dialect: { ...spectrum.dialect },
    facts: spectrum.facts.map(({ key, label, text }) => ({ key, label, text })),
    skipped: spectrum.skippedRows,
    signal_unit: spectrum.unit,
    range_eV: [spectrum.energy_eV[0]!, spectrum.energy_eV[last]!],
    used_points: usedPoints,
    noise: { source: spectrum.noise.source, median_sigma: spectrum.noise.medianSigma },
  };
}

function finiteOnly(record: object): Record<string, number | null> {
  return Object.fromEntries(
    Object.entries(record).map(([key, value]) => [key, Number.isFinite(value) ? (value as number) : null]),
  );
}

/** The gravest first, each once. */
function sortNotes(notes: readonly Note[]): Note[] {
  const once = notes.filter(
    (note, i) => notes.findIndex((other) => other.code === note.code && other.about === note.about) === i,
  );
  return [
    ...once.filter((note) => note.level === "doubt"),
    ...once.filter((note) => note.level === "assumption"),
  ];
}

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
