import {
  assumption,
  NOT_DETERMINED,
  stopIfCancelled,
  symmetric,
  type Note,
  type Quantity,
  type Watch,
} from "../base/index.ts";
import { SMEARED, type LineParameterName } from "../fit/index.ts";
import { RESULT_SCHEMA, type Protocol, type RunglineResult } from "../protocol/index.ts";
import {
  deriveQuantities,
  exponentCurve,
  fitStrengths,
  fitWidths,
  profileLevels,
  rankReadings,
  seriesToResult,
  strengthsToResult,
  widthsToResult,
  type StrengthInput,
  type WidthInput,
} from "../series/index.ts";
import { durbinWatson, informationCriteria, neighbourCorrelation, runsTest } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { AnalysisResult } from "./analyse.ts";
import type { Assignment } from "./assign-n.ts";
import { bicGain, significances } from "./climb-ladder.ts";
import {
  constraintNotes,
  describeExtra,
  heldQuantity,
  isHeld,
  parameterCount,
  tiedStrengthLaw,
  tiedWidthLaw,
} from "./describe-constraints.ts";
import { describeDiagnostics } from "./diagnostics.ts";
import { findDoubts } from "./find-doubts.ts";
import type { Peak } from "./find-peaks.ts";
import { FRINGE_PERIOD } from "./fringes.ts";
import type { FullFit } from "./fit-full.ts";
import { heldDefect, heldDefectNotes } from "./held-defect.ts";
import { intervalFactor } from "./interval.ts";
import { covarianceBlock, determinedPlaces, levelInput } from "./level-range.ts";
import type { SelectedPoints } from "./select-points.ts";
import { sortNotes } from "./sort-notes.ts";
import { profileSpectrum, type SpectrumProfile } from "./spectrum-profile.ts";
import { judgeSystematics, systematicNotes } from "./systematics.ts";
import { linesForThinning, thinPoints } from "./thin-points.ts";

export type Described = Omit<AnalysisResult, "seconds">;

/** The numbers of a finished fit, in the shape of a result. */
export function describeResult(
  spectrum: Spectrum,
  protocol: Protocol,
  points: SelectedPoints,
  peaks: readonly Peak[],
  assignment: Assignment,
  full: FullFit,
  watch: Watch,
): Described {
  const { fit, state, range } = full;
  const factor = intervalFactor(protocol.uncertainty.level);
  const { solution } = fit;
  const reduced = solution.chi2 / Math.max(1, solution.degreesOfFreedom);
  const k = fit.lines.ns.length;
  const error = (block: number, j: number): number => {
    const i = block * k + j;
    return Math.sqrt(fit.lines.covariance[i * 4 * k + i]!);
  };
  const quantity = (value: number, sigma: number, atBound = false): Quantity =>
    atBound || !(sigma > 0) ? { value, sigma: null, low: null, high: null } : symmetric(value, sigma, factor);
  const energies = {
    n: fit.lines.ns,
    energy_eV: fit.lines.energy,
    covariance: covarianceBlock(
      fit,
      0,
      fit.lines.ns.map((_, j) => j),
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
      covariance: lineCovariance(full, j),
      significance: seen[j]!,
      bic_gain: bicGain(seen[j]!, m),
    })),
    signalUnit: spectrum.unit,
    factor,
  });
  const tiedNs = fit.problem.spec.tiedLevels?.tiedNs ?? [];
  const asymmetryFree = protocol.lines.asymmetry !== "zero";
  const lines: RunglineResult["lines"] = fit.lines.ns.map((n, j) => {
    const bound = fit.atBound.includes(n);
    const { binding_eV: _, ...derived } = derivedParts.lines[j]!;
    // q of a line whose area is hardly seen says nothing.
    const held = (parameter: "energy" | "width" | "area"): Quantity | null =>
      isHeld(fit, n, parameter) ? heldQuantity(fit.lines[parameter][j]!) : null;
    // At a bound the data say where a value wants to be, not how well it is known; so it is with what follows from it.
    const ended = (parameter: LineParameterName): boolean =>
      fit.constrained?.limited.some((one) => one.n === n && one.parameter === parameter) ?? false;
    const unlessEnded = (found: Quantity, ...parameters: LineParameterName[]): Quantity =>
      parameters.some(ended) ? { ...found, sigma: null, low: null, high: null } : found;
    const qKnown = asymmetryFree && (protocol.lines.asymmetry === "shared" || seen[j]! > 3);
    return {
      n,
      energy_eV: held("energy") ?? quantity(fit.lines.energy[j]!, error(0, j), bound || ended("energy")),
      width_eV: held("width") ?? quantity(fit.lines.width[j]!, error(1, j), bound || ended("width")),
      area: held("area") ?? quantity(fit.lines.area[j]!, error(2, j), ended("area")),
      asymmetry: isHeld(fit, n, "asymmetry")
        ? heldQuantity(fit.lines.asymmetry[j]!)
        : !asymmetryFree
          ? { value: 0, sigma: 0, low: 0, high: 0 }
          : qKnown
            ? quantity(fit.lines.asymmetry[j]!, error(3, j), ended("asymmetry"))
            : NOT_DETERMINED,
      significance: isHeld(fit, n, "area") ? 0 : seen[j]!,
      bic_gain: isHeld(fit, n, "area") ? null : bicGain(seen[j]!, m),
      peak: unlessEnded(derived.peak, "width", "area", "asymmetry"),
      spacing_eV: derived.spacing_eV,
      width_over_spacing: derived.width_over_spacing,
      lifetime_ps: unlessEnded(derived.lifetime_ps, "width"),
      law_offset_eV: tiedNs.includes(n)
        ? { value: 0, sigma: 0, low: 0, high: 0 }
        : unlessEnded(derived.law_offset_eV, "energy"),
      in_level_fit: derived.in_level_fit,
      area_n3: unlessEnded(derived.area_n3, "area"),
      strength_per_cm3: unlessEnded(derived.strength_per_cm3, "area"),
    };
  });
  const profile = protocol.uncertainty.profile
    ? profileSpectrum(points, full, protocol, spectrum.unit, watch)
    : null;
  const laws = describeLaws(full, protocol, factor, profile);
  stopIfCancelled(watch);
  const held = range === null ? null : heldDefect(fit, range.fit, protocol);
  const systematic =
    protocol.uncertainty.systematic && range !== null
      ? judgeSystematics(
          spectrum,
          thinPoints(points, linesForThinning(state, protocol)),
          state,
          range.fit,
          protocol,
          full.choices,
          held,
          watch,
        )
      : null;
  const parameters = parameterCount(fit);
  const criteria = informationCriteria(solution.chi2, m, parameters + (full.domain.parts?.length ?? 0));
  const lag1 = neighbourCorrelation(solution.residuals);
  const fitPart: NonNullable<RunglineResult["fit"]> = {
    domain: full.domain.name,
    termination: solution.termination,
    sigma_from:
      protocol.uncertainty.scale_by_residuals || full.correlated
        ? "residuals"
        : spectrum.noise.source === "estimated"
          ? "estimated"
          : "given",
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
    condition: Number.isFinite(solution.condition) ? solution.condition : null,
    rank: solution.rank,
    parameters: parameters + (full.domain.parts?.length ?? 0),
    window_eV: [points.energy[0]!, points.energy[m - 1]!],
  };
  const tail: RunglineResult["tail"] =
    fit.factor === null || fit.problem.spec.tail === null
      ? null
      : {
          factor: quantity(fit.factor.value, fit.factor.sigma, fit.factor.atBound),
          from_n: fit.problem.spec.tail.fromN,
          to_n: fit.problem.spec.tail.toN,
        };
  const { series } = laws;
  const notes = sortNotes([
    ...spectrum.notes.filter((note) => !full.domain.answered.includes(note.code)),
    ...full.domain.notes,
    ...findDoubts({ spectrum, protocol, points, peaks, assignment, full, fit: fitPart, lines, tail, series }),
    ...laws.notes,
    ...constraintNotes(full, protocol),
    ...derivedParts.notes,
    ...systematicNotes(systematic),
    ...heldDefectNotes(held),
    ...linearisedNotes(full, protocol),
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
    ...(fit.constrained === undefined || fit.constrained.extra.length === 0
      ? {}
      : { extra: describeExtra(fit, factor) }),
    series,
    systematic,
    width_law: laws.width,
    strength_law: laws.strength,
    tail,
    derived:
      derivedParts.derived === null
        ? null
        : { ...derivedParts.derived, radius_um: [...derivedParts.derived.radius_um] },
    background: [
      ...fit.background.map((column) => ({
        term: column.term,
        name: column.name,
        unit: column.unit,
        // The column of the period holds what is still to be added to it.
        quantity: quantity(
          column.value + (column.name === FRINGE_PERIOD ? (full.fringesAt ?? 0) : 0),
          column.sigma,
          // Smeared strength rests on a shape that is assumed: its error by chi square alone would be far too small.
          column.term === SMEARED,
        ),
      })),
      ...(full.domain.parts ?? []).map(({ term, name, unit, value, sigma }) => ({
        term,
        name,
        unit,
        quantity: quantity(value, sigma),
      })),
    ],
    diagnostics: describeDiagnostics(full, protocol, laws.exponentCurve),
  };
}

/** Trials and drawn spectra of fits of the light are not fits of the light. */
function linearisedNotes({ domain }: FullFit, { uncertainty }: Protocol): Note[] {
  const made = [
    ...(uncertainty.systematic ? ["other backgrounds and windows"] : []),
    ...(uncertainty.resample === "none" ? [] : ["resampled spectra"]),
  ];
  if (domain.name === "alpha" || made.length === 0) return [];
  const beside = (domain.parts?.length ?? 0) > 0 ? ", with fringes and stray light as they were found" : "";
  return [
    assumption(
      "trials-linearised",
      "systematic",
      `The fits of ${made.join(" and ")} are those of the light linearised about its fit${beside}.`,
      "nothing to do where the trials lie within a few standard errors of the fit",
    ),
  ];
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

interface DescribedLaws {
  readonly series: RunglineResult["series"];
  readonly width: RunglineResult["width_law"];
  readonly strength: RunglineResult["strength_law"];
  /** Of the exponent that is fitted to the widths of the lines; empty where it is part of the spectrum fit. */
  readonly exponentCurve: readonly (readonly [number, number])[];
  readonly notes: readonly Note[];
}

/** Level, width and strength laws on the parameters of the lines. */
function describeLaws(
  full: FullFit,
  protocol: Protocol,
  factor: number,
  spectrumProfile: SpectrumProfile | null,
): DescribedLaws {
  const { range } = full;
  // Lines that are tied to a law cannot judge it: those of the fit before do.
  const fit = full.untied ?? full.fit;
  const levels = range?.fit.estimates.values;
  const select = (
    block: number,
    values: Float64Array,
  ): { n: number[]; values: Float64Array; covariance: Float64Array } => {
    const places = determinedPlaces(fit, block);
    return {
      n: places.map((j) => fit.lines.ns[j]!),
      values: Float64Array.from(places, (j) => values[j]!),
      covariance: covarianceBlock(fit, block, places),
    };
  };
  const width = select(1, fit.lines.width);
  const area = select(2, fit.lines.area);
  const defects = { defect0: levels?.[2] ?? 0, defect2: levels?.[3] ?? 0 };
  const widthInput: WidthInput = {
    n: width.n,
    width_eV: width.values,
    covariance: width.covariance,
    exponent: protocol.width.exponent,
    base: protocol.width.base,
    floorKind: protocol.width.floor_kind,
    ...defects,
    factor,
  };
  const strengthInput: StrengthInput = {
    n: area.n,
    area: area.values,
    covariance: area.covariance,
    law: protocol.strength.law,
    base: protocol.strength.base,
    ...defects,
  };
  const widths = fitWidths(widthInput);
  const strengths = fitStrengths(strengthInput);
  const notes: Note[] = [];
  let series: RunglineResult["series"] = null;
  if (range !== null) {
    const readings = rankReadings({
      defect0: range.fit.estimates.values[2]!,
      defectFree: range.fit.defect !== "none",
      dimension: protocol.material.dimension,
      envelope: protocol.material.envelope,
      pinned: protocol.material.first_n !== null,
      widths: widthInput,
      strengths: strengthInput,
    });
    const input = levelInput(full.fit, protocol);
    // Tied levels come from the spectrum fit itself, and so do their intervals.
    const profile = !protocol.uncertainty.profile
      ? undefined
      : protocol.series.mode === "tied"
        ? {
            gap_eV: spectrumProfile?.gap_eV,
            rydberg_eV: spectrumProfile?.rydberg_eV,
            defect0: spectrumProfile?.defect0,
          }
        : input === null
          ? undefined
          : profileLevels(input, range.fit, factor);
    series = seriesToResult(range, readings, factor, profile);
    notes.push(...range.notes, ...readings.notes);
  }
  if (widths.ok) notes.push(...widths.value.notes);
  if (strengths.ok) notes.push(...strengths.value.notes);
  const ownWidths = full.fit.constrained?.widthLaw ?? null;
  return {
    series,
    exponentCurve:
      protocol.uncertainty.profile && widths.ok && ownWidths === null
        ? exponentCurve(widthInput, widths.value)
        : [],
    width:
      tiedWidthLaw(full.fit.constrained, protocol.width.base, factor, spectrumProfile?.exponent ?? null) ??
      (widths.ok ? widthsToResult(widths.value, protocol.width.base, factor) : null),
    strength:
      tiedStrengthLaw(full.fit.constrained, protocol.strength, factor) ??
      (strengths.ok
        ? strengthsToResult(strengths.value, protocol.strength.law, protocol.strength.base, factor)
        : null),
    notes,
  };
}

export function describeReading(spectrum: Spectrum, usedPoints: number): RunglineResult["reading"] {
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
    ...(spectrum.slit === undefined ? {} : { slit: spectrum.slit }),
  };
}

function finiteOnly(record: object): Record<string, number | null> {
  return Object.fromEntries(
    Object.entries(record).map(([key, value]) => [key, Number.isFinite(value) ? (value as number) : null]),
  );
}
