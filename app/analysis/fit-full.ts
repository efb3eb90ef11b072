import { stopIfCancelled, type Note, type Watch } from "../base/index.ts";
import {
  fitSpectrum,
  withAxisJitter,
  withCorrelatedErrors,
  withScaledErrors,
  type FitPoints,
  type SpectrumFit,
} from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { fitStrengths, fitWidths, type RangeChoice } from "../series/index.ts";
import { neighbourCorrelation } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { sameWave } from "./fringes.ts";
import { leastSignificance, significances, withSharedNoise, type Climbed } from "./climb-ladder.ts";
import { buildModel, stateAfter, withLines, type LadderState, type ModelChoices } from "./ladder-model.ts";
import { covarianceBlock, determinedPlaces, judgeLevels, withLevelRange } from "./level-range.ts";
import { tiedRange } from "./tied-range.ts";

/** What was fitted: the absorption, or the transmitted light itself (measured-domain.ts). */
export interface FitDomain {
  readonly name: "alpha" | "transmittance";
  readonly notes: readonly Note[];
  /** Codes of notes of the reading that hold for a fit of the absorption only. */
  readonly answered: readonly string[];
  /** What the light has beside its absorption: fringes, stray light; as rows of the background. */
  readonly parts?: readonly {
    readonly term: string;
    readonly name: string;
    readonly unit: string;
    readonly value: number;
    readonly sigma: number;
  }[];
  /** Period of fringes that were fitted to the light, and whether the lines turn their phase. */
  readonly fringes?: number;
  readonly dispersion?: boolean;
}

const ABSORPTION: FitDomain = { name: "alpha", notes: [], answered: [] };

export interface FullFit extends Climbed {
  readonly domain: FitDomain;
  /** What the last fit was made with, ties to the laws among it. */
  readonly choices: ModelChoices;
  readonly range: RangeChoice | null;
  /** Seconds of the last fit, from its start values through its covariance. */
  readonly solveSeconds: number;
  /** Whether the laws of the tail and those of the lines came to agree. */
  readonly selfConsistent: boolean;
  /** Whether the standard errors allow for the correlation of neighbouring residuals. */
  readonly correlated: boolean;
  /** Period that the columns of additive fringes were made with. */
  readonly fringesAt?: number;
  /** What tying widths or areas to their laws cost against the fit before, with every one free. */
  readonly ties?: { readonly what: string; readonly chi2: number; readonly dof: number };
  /** The fit before such ties, whose lines judge the laws. */
  readonly untied?: SpectrumFit;
}

const MOST_PASSES = 6;
/** The laws that the tail is tied to agree with those fitted afterwards to this part of a standard error. */
const AGREEMENT = 0.02;

/** One pass: the model of a state fitted to the points. */
export type FitPass = (model: ReturnType<typeof buildModel>) => SpectrumFit;

/**
 * The fit on every point. The laws of the tail are linearised about the line parameters of the pass before, so passes
 * follow each other until gap and Rydberg energy stand still; lines that turn out insignificant go.
 */
export function fitEveryPoint(
  points: FitPoints,
  initial: LadderState,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
  report: (pass: number) => void,
  fitPass: FitPass = (model) => fitSpectrum(points, model.spec, model.start, { watch }),
): FullFit {
  const free = fitFreeLevels(points, initial, protocol, unit, choices, watch, report, fitPass);
  const ties = tiedLines(free, protocol);
  const how: ModelChoices = { ...choices, ...ties };
  const tied =
    Object.keys(ties).length === 0
      ? free
      : tieLines(free, fitFreeLevels(points, free.state, protocol, unit, how, watch, report, fitPass));
  if (protocol.series.mode === "free" || tied.range === null) return tied;
  return tieLevels(points, tied, tied.range, protocol, unit, how, watch, fitPass);
}

/** n that the laws of widths and strengths are found to describe, where the protocol ties these to them. */
function tiedLines(
  { fit, range }: FullFit,
  protocol: Protocol,
): Pick<ModelChoices, "tiedWidths" | "tiedAreas"> {
  const levels = range?.fit.estimates.values;
  const defects = { defect0: levels?.[2] ?? 0, defect2: levels?.[3] ?? 0 };
  const chosen = (
    block: 1 | 2,
    values: Float64Array,
  ): { n: number[]; values: Float64Array; covariance: Float64Array } => {
    const places = determinedPlaces(fit, block);
    return {
      n: places.map((j) => fit.lines.ns[j]!),
      values: Float64Array.from(places, (j) => values[j]!),
      covariance: covarianceBlock(fit, block, places),
    };
  };
  const ties: { tiedWidths?: readonly number[]; tiedAreas?: readonly number[] } = {};
  if (protocol.width.mode === "tied") {
    const { n, values, covariance } = chosen(1, fit.lines.width);
    const { exponent, base, floor_kind } = protocol.width;
    const law = fitWidths({
      n,
      width_eV: values,
      covariance,
      exponent,
      base,
      floorKind: floor_kind,
      ...defects,
    });
    if (law.ok && law.value.n.length >= 2) ties.tiedWidths = law.value.n;
  }
  if (protocol.strength.mode === "tied") {
    const { n, values, covariance } = chosen(2, fit.lines.area);
    const { law: envelope, base } = protocol.strength;
    const law = fitStrengths({ n, area: values, covariance, law: envelope, base, ...defects });
    if (law.ok && law.value.n.length >= 2) ties.tiedAreas = law.value.n;
  }
  return ties;
}

function tieLines(free: FullFit, tied: FullFit): FullFit {
  const parts = tied.fit.constrained;
  const what = [
    ...((parts?.widthLaw ?? null) === null ? [] : ["the widths to the width law"]),
    ...((parts?.strengthLaw ?? null) === null ? [] : ["the areas to the strength law"]),
  ];
  return {
    ...tied,
    ties: {
      what: what.join(" and "),
      chi2: tied.fit.solution.chi2 - free.fit.solution.chi2,
      dof: tied.fit.solution.degreesOfFreedom - free.fit.solution.degreesOfFreedom,
    },
    untied: free.fit,
  };
}

/**
 * A range of n that is named speaks for the lines above the last one told apart where it has this many lines and its
 * law comes near them.
 */
const FEWEST_TO_LEAD = 5;
const WORST_TO_LEAD = 25;

function canLead({ fit }: RangeChoice): boolean {
  return fit.n.length >= FEWEST_TO_LEAD && fit.chi2 <= WORST_TO_LEAD * Math.max(1, fit.degreesOfFreedom);
}

/**
 * Energies of all lines free, whatever the protocol says: what decides over the range of n.
 * A range that is named changes the law and the tail that follows it, never which lines are found: those come from the
 * range that the lines support. A range of a few lines, or one that its law does not hold for, cannot speak for the tail.
 */
function fitFreeLevels(
  points: FitPoints,
  initial: LadderState,
  asked: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
  report: (pass: number) => void,
  fitPass: FitPass,
): FullFit {
  const free: Protocol = { ...asked, series: { ...asked.series, mode: "free" } };
  const own: Protocol = { ...free, series: { ...free.series, fit_n: "auto" } };
  const found = passesUntilSettled(points, initial, own, false, unit, choices, watch, report, fitPass);
  if (asked.series.fit_n === "auto") return found;
  const range = judgeLevels(found.fit, free);
  if (range === null || !canLead(range)) return { ...found, range };
  const start = withLevelRange(found.state, range);
  return passesUntilSettled(points, start, free, true, unit, choices, watch, report, fitPass);
}

/** `held`: the lines are known, and none is dropped. */
function passesUntilSettled(
  points: FitPoints,
  initial: LadderState,
  protocol: Protocol,
  held: boolean,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
  report: (pass: number) => void,
  fitPass: FitPass,
): FullFit {
  const needed = leastSignificance(points.energy.length);
  let state = initial;
  let result: FullFit | null = null;
  let settled = false;
  for (let pass = 0; pass < MOST_PASSES && !settled; pass++) {
    report(pass);
    stopIfCancelled(watch);
    const model = buildModel(points, state, protocol, unit, choices);
    const began = watch.seconds();
    const plain = fitPass(model);
    const fit = withAskedErrors(plain, protocol);
    const solveSeconds = watch.seconds() - began;
    stopIfCancelled(watch);
    const range = judgeLevels(fit, protocol);
    const next = withLevelRange(stateAfter(fit, model.state), range);
    // A first fit that is still poor would widen its errors until no line is left: the plain ones decide what is seen.
    const seen = significances(withSharedNoise(plain, points));
    let keep = state.ns.length;
    if (protocol.lines.n === "auto" && !held) while (keep > 3 && !(seen[keep - 1]! > needed)) keep--;
    const dropped = keep < state.ns.length;
    settled =
      !dropped &&
      sameWave(model.state.fringes, next.fringes) &&
      agrees(model.state, stateAfter(fit, model.state), next.include, range);
    result = {
      fit,
      state: next,
      range,
      solveSeconds,
      selfConsistent: settled,
      correlated: allowsCorrelation(plain, protocol),
      domain: ABSORPTION,
      choices,
      ...(model.state.fringes === undefined ? {} : { fringesAt: model.state.fringes.period }),
    };
    state = dropped ? withLines(next, state.ns.slice(0, keep)) : next;
  }
  if (result === null) throw new Error("no pass was made");
  return result;
}

/** The lines of the range that was found are tied to the level law; the others stay free. */
function tieLevels(
  points: FitPoints,
  free: FullFit,
  range: RangeChoice,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
  fitPass: FitPass,
): FullFit {
  let { state } = free;
  let result = free;
  for (let pass = 0; pass < MOST_PASSES; pass++) {
    stopIfCancelled(watch);
    const model = buildModel(points, state, protocol, unit, choices);
    const began = watch.seconds();
    const plain = fitPass(model);
    const fit = withAskedErrors(plain, protocol);
    const solveSeconds = watch.seconds() - began;
    const next = stateAfter(fit, model.state);
    // The weights of the tail's laws stay those of the free fit: lines on a law have no errors of their own.
    state = { ...next, energySigma: free.state.energySigma };
    const selfConsistent = agrees(model.state, next, next.include, range);
    result = {
      ...free,
      fit,
      state,
      range: tiedRange(fit, free.fit, range, protocol.axis.jitter_eV),
      solveSeconds,
      selfConsistent,
      correlated: allowsCorrelation(plain, protocol),
      ...(model.state.fringes === undefined ? {} : { fringesAt: model.state.fringes.period }),
    };
    if (selfConsistent) break;
  }
  return result;
}

/** Neighbouring residuals that correlate by more make standard errors from independent noise clearly too small. */
export const CORRELATED_ABOVE = 0.3;

function allowsCorrelation({ solution }: SpectrumFit, { uncertainty }: Protocol): boolean {
  if (uncertainty.correlated !== "auto") return uncertainty.correlated === "allow";
  return neighbourCorrelation(solution.residuals) > CORRELATED_ABOVE;
}

/** Standard errors that allow for correlated residuals or are scaled by them, as the protocol asks, and the axis' jitter. */
function withAskedErrors(fit: SpectrumFit, protocol: Protocol): SpectrumFit {
  if (allowsCorrelation(fit, protocol))
    return withAxisJitter(withCorrelatedErrors(fit), protocol.axis.jitter_eV);
  const { chi2, degreesOfFreedom } = fit.solution;
  const scaled = protocol.uncertainty.scale_by_residuals
    ? withScaledErrors(fit, chi2 / Math.max(1, degreesOfFreedom))
    : fit;
  return withAxisJitter(scaled, protocol.axis.jitter_eV);
}

/** The laws at the start of a pass (fitted to the lines of the pass before) and those at its end are the same. */
function agrees(
  before: LadderState,
  after: LadderState,
  include: readonly boolean[],
  range: RangeChoice | null,
): boolean {
  if (range === null) return true;
  if (before.include.some((one, j) => one !== include[j])) return false;
  const { values, covariance } = range.fit.estimates;
  const size = values.length;
  const close = (i: number, a: number, b: number): boolean => {
    const sigma = Math.sqrt(covariance[i * size + i]!);
    return !(sigma > 0) || Math.abs(a - b) <= AGREEMENT * sigma;
  };
  const widthSteady =
    Math.abs(before.widths.coefficient - after.widths.coefficient) <= 1e-3 * after.widths.coefficient;
  return (
    widthSteady &&
    close(0, before.levels.gap, after.levels.gap) &&
    close(1, before.levels.rydberg, after.levels.rydberg) &&
    close(2, before.levels.defect0, after.levels.defect0)
  );
}
