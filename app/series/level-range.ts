import { doubt, failure, success, symmetric, type Note, type Quantity, type Result } from "../base/index.ts";
import { fSurvival } from "../solve/index.ts";
import { fitLevels, format, sayProbability, type LevelFit, type LevelInput } from "./level-fit.ts";
import { placesWithin, selectMatrix, selectVector } from "./select-lines.ts";
import type { SeriesIssue } from "./series-issue.ts";

export interface RangeInput extends LevelInput {
  readonly fit_n: "auto" | readonly [number, number];
  /** Half width of the interval in standard errors (1 for 68.27 %); default 1. */
  readonly factor?: number | undefined;
}

/** The same law for one range of n. */
export interface RangeStep {
  readonly n_min: number;
  readonly n_max: number;
  readonly gap_eV: Quantity;
  readonly rydberg_eV: Quantity;
  readonly defect0: Quantity;
  readonly chi2: number;
  readonly dof: number;
  /** Null where nothing is left to test. */
  readonly p: number | null;
}

export interface RangeChoice {
  readonly fit: LevelFit;
  /** Lowest and highest n of the fit. */
  readonly fit_n: readonly [number, number];
  /** Every lowest n with the highest n of the fit, then every highest n with its lowest. */
  readonly ranges: readonly RangeStep[];
  /**
   * Least chi square of a range of five lines where all of them are flatly rejected and four were taken; else 0. Three
   * parameters follow four lines easily, so this is what the choice of four hides.
   */
  readonly passedOver: number;
  readonly notes: readonly Note[];
}

/** Lines that a range chosen by itself must keep. */
const FEWEST_LINES = 5;
/** Chi square above this probability: the law holds. */
const HOLDS_ABOVE = 0.05;
/** Reduced chi square beyond which errors that are too small are no excuse: lines are off the law. */
const FLATLY_REJECTED = 25;

/**
 * What      Which lines follow the level law: the lowest n_min with p > 0.05 and at least five lines up to the highest,
 *           and below it the lines that an F test does not tell from those kept.
 *           Where none has it and all are flatly rejected, four lines that follow the law (one degree of freedom is left then).
 *           Else the n_min whose scaled standard errors of gap and Rydberg energy have the smallest product (low n pin
 *           the Rydberg energy where they are on the law at all), and a note says so.
 * Units     eV.
 * Domain    fewer than five lines are all used. A range that is asked for is taken as it is.
 */
export function chooseLevelRange(input: RangeInput): Result<RangeChoice, SeriesIssue> {
  const count = input.n.length;
  if (count === 0) {
    return failure({ code: "series/too-few-lines", facts: { law: "level", found: 0, needed: 2 } });
  }
  const highest = Math.max(...input.n);
  const factor = input.factor ?? 1;
  if (input.fit_n !== "auto") {
    const [min, max] = input.fit_n;
    const fit = fitWithin(input, min, max);
    if (!fit.ok) return fit;
    return finish(input, fit.value, factor, []);
  }
  if (count < FEWEST_LINES) {
    const fit = fitWithin(input, 0, highest);
    if (!fit.ok) return fit;
    return finish(input, fit.value, factor, []);
  }
  let fallback: LevelFit | null = null;
  let fallbackError = Infinity;
  let failed: Result<LevelFit, SeriesIssue> | null = null;
  const tried: { first: number; fit: LevelFit }[] = [];
  for (let first = 0; count - first >= FEWEST_LINES; first++) {
    const fit = fitWithin(input, input.n[first]!, highest, "newton");
    if (!fit.ok) {
      failed = fit;
      continue;
    }
    if (fit.value.p > HOLDS_ABOVE) {
      const lowest = lowestCompatible(fit.value, tried);
      const final = fitWithin(input, input.n[lowest]!, highest);
      return final.ok ? finish(input, final.value, factor, skipNotes(input, lowest)) : final;
    }
    tried.push({ first, fit: fit.value });
    const error = scaledUncertainty(fit.value);
    if (error < fallbackError) {
      fallbackError = error;
      fallback = fit.value;
    }
  }
  if (fallback === null) return failed as Exclude<typeof failed, null | { ok: true }>;
  const four = fourThatHold(input, tried, highest);
  if (four !== null) {
    const passedOver = Math.min(...tried.map(({ fit }) => fit.chi2));
    return finish(input, four, factor, skipNotes(input, count - FEWEST_LINES + 1), passedOver);
  }
  const final = fitWithin(input, fallback.n[0]!, highest);
  if (!final.ok) return final;
  return finish(input, final.value, factor, [
    doubt(
      "no-range-follows-law",
      "series.fit_n",
      `No range of five lines or more follows the level law with p > 0.05. Taken: n = ${fallback.n[0]} to ${highest}, where gap and Rydberg energy have the smallest scaled errors (${sayProbability(fallback.p)}).`,
      "name the range (series.fit_n), allow a Ritz term (series.defect=ritz), or look for blends in the residuals",
    ),
  ]);
}

/** The four highest lines, where they follow the law and no longer range comes near it. */
function fourThatHold(
  input: LevelInput,
  tried: readonly { readonly fit: LevelFit }[],
  highest: number,
): LevelFit | null {
  const flatly = tried.every(({ fit }) => fit.chi2 > FLATLY_REJECTED * Math.max(1, fit.degreesOfFreedom));
  if (!flatly) return null;
  const four = fitWithin(input, input.n[input.n.length - FEWEST_LINES + 1]!, highest);
  return four.ok && four.value.degreesOfFreedom > 0 && four.value.p > HOLDS_ABOVE ? four.value : null;
}

/**
 * Place of the lowest line that may stay. Lines are left out because the law of the higher ones rejects them, not
 * because a shorter range passes by luck: an F test asks whether the lines below are further off than the scatter of
 * those kept (or their errors, if that is larger) allows. Where they are not, they stay, and the whole may be rejected.
 */
function lowestCompatible(kept: LevelFit, tried: readonly { first: number; fit: LevelFit }[]): number {
  const scatter = Math.max(1, kept.chi2 / Math.max(1, kept.degreesOfFreedom));
  for (const { first, fit } of tried) {
    const lines = fit.degreesOfFreedom - kept.degreesOfFreedom;
    if (lines < 1 || fit.defect !== kept.defect) continue;
    const ratio = (fit.chi2 - kept.chi2) / lines / scatter;
    if (fSurvival(Math.max(0, ratio), lines, kept.degreesOfFreedom) > HOLDS_ABOVE) return first;
  }
  return tried.length === 0 ? 0 : tried[tried.length - 1]!.first + 1;
}

function skipNotes(input: LevelInput, first: number): Note[] {
  if (first === 0) return [];
  const skipped = input.n.slice(0, first);
  return [
    doubt(
      "low-n-off-law",
      "series.fit_n",
      `The law is fitted from n = ${input.n[first]}: with n = ${skipped.join(", ")} chi square rejects it. Their energies minus the law stand in the lines table.`,
      "nothing to do where the lowest lines are known to lie off the law; else name the range (series.fit_n)",
    ),
  ];
}

function fitWithin(
  input: LevelInput,
  min: number,
  max: number,
  how: "search" | "newton" = "search",
): Result<LevelFit, SeriesIssue> {
  const places = placesWithin(input.n, min, max);
  return fitLevels({
    ...input,
    how,
    n: places.map((i) => input.n[i]!),
    energy_eV: selectVector(input.energy_eV, places),
    covariance: selectMatrix(input.covariance, input.n.length, places),
  });
}

function finish(
  input: LevelInput,
  fit: LevelFit,
  factor: number,
  notes: readonly Note[],
  passedOver = 0,
): Result<RangeChoice, SeriesIssue> {
  const min = fit.n[0]!;
  const max = fit.n[fit.n.length - 1]!;
  const ranges: RangeStep[] = [];
  const add = (low: number, high: number): void => {
    const step = low === min && high === max ? success(fit) : fitWithin(input, low, high, "newton");
    if (step.ok) ranges.push(toStep(step.value, factor));
  };
  for (const low of input.n) if (low < max) add(low, max);
  for (const high of input.n) if (high > min && high !== max) add(min, high);
  return success({
    fit,
    fit_n: [min, max],
    ranges,
    passedOver,
    notes: [...notes, ...fit.notes, ...movingNotes(fit, ranges)],
  });
}

/** A gap that walks by more than its errors when one more line is left out is a sign of a wrong law. */
function movingNotes(fit: LevelFit, ranges: readonly RangeStep[]): Note[] {
  const gap = fit.estimates.values[0]!;
  const sigma = Math.sqrt(fit.estimates.covariance[0]!);
  const index = ranges.findIndex((step) => step.n_min === fit.n[0] && step.n_max === fit.n[fit.n.length - 1]);
  const next = ranges[index + 1];
  if (next === undefined || next.n_min <= fit.n[0]! || next.dof < 1) return [];
  // The variance of the change between nested fits is the difference of their variances.
  const change = Math.abs(next.gap_eV.value! - gap);
  const expected = Math.sqrt(Math.max(0, next.gap_eV.sigma! ** 2 - sigma ** 2));
  if (!(change > 3 * expected && expected > 0)) return [];
  return [
    doubt(
      "gap-depends-on-range",
      "series.gap_eV",
      `Leaving out n = ${fit.n[0]} moves the gap by ${format(change * 1e6)} µeV, ${format(change / expected)} times what chance allows.`,
      "look at the table of ranges, and start higher (series.fit_n)",
    ),
  ];
}

function toStep(fit: LevelFit, factor: number): RangeStep {
  const { values, covariance } = fit.estimates;
  const quantity = (i: number): Quantity => symmetric(values[i]!, Math.sqrt(covariance[i * 6]!), factor);
  return {
    n_min: fit.n[0]!,
    n_max: fit.n[fit.n.length - 1]!,
    gap_eV: quantity(0),
    rydberg_eV: quantity(1),
    defect0: quantity(2),
    chi2: fit.chi2,
    dof: fit.degreesOfFreedom,
    p: fit.degreesOfFreedom > 0 ? fit.p : null,
  };
}

function scaledUncertainty(fit: LevelFit): number {
  const { covariance, values } = fit.estimates;
  const size = values.length;
  const reduced = fit.chi2 / Math.max(1, fit.degreesOfFreedom);
  return Math.sqrt(covariance[0]! * covariance[size + 1]!) * reduced;
}
