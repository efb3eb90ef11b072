import { doubt, stopIfCancelled, type Note, type Watch } from "../base/index.ts";
import { fitSpectrum, withAxisJitter, type FitPoints, type SpectrumFit } from "../fit/index.ts";
import type { BackgroundTerm, Protocol, RunglineResult } from "../protocol/index.ts";
import { fitLevels, type LevelFit } from "../series/index.ts";
import { informationCriteria, runsTest } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { areaSystematic } from "./area-systematic.ts";
import type { HeldDefect } from "./held-defect.ts";
import { buildModel, energyOf, type LadderState, type ModelChoices } from "./ladder-model.ts";
import { parameterCount } from "./describe-constraints.ts";
import { covarianceBlock, determinedPlaces, tiedLevels } from "./level-range.ts";

type Systematic = NonNullable<RunglineResult["systematic"]>;

interface Trial {
  readonly name: string;
  readonly choices: ModelChoices;
  readonly low: number;
  readonly high: number;
  /** Fits the same points as the reference, so that information criteria can be compared. */
  readonly samePoints: boolean;
}

/** A background is defensible when its information criterion is within this of the best one. */
const DEFENSIBLE_BIC = 10;

/**
 * What      Spread that other defensible backgrounds and windows put on gap, Rydberg energy and defect: half the range
 *           of the values, the chosen model among them. Trials on the same points count when their BIC is within 10 of
 *           the best (Kass and Raftery, J. Am. Stat. Assoc. 90, 773 (1995): "very strong" evidence beyond); trials of
 *           another window always count. Every trial is listed, whether it counts or not. Trials have the ties and constraints of
 *           the reported fit.
 * Shapes    points: the averaged points (differences between trials are what matters).
 */
export function judgeSystematics(
  spectrum: Spectrum,
  points: FitPoints,
  state: LadderState,
  reference: LevelFit,
  protocol: Protocol,
  choices: ModelChoices,
  held: HeldDefect | null,
  watch: Watch,
): Systematic {
  const trials = planTrials(points, state, protocol, choices);
  const rows: (Systematic["trials"][number] & { samePoints: boolean })[] = [];
  for (const trial of trials) {
    const chi2 = trial.samePoints ? (rows[0]?.chi2 ?? null) : null;
    const row = runTrial(points, state, reference, protocol, spectrum.unit, trial, chi2, watch);
    if (row !== null) rows.push({ ...row, samePoints: trial.samePoints });
  }
  const bics = rows.filter((row) => row.samePoints && row.bic !== null).map((row) => row.bic!);
  const best = Math.min(...bics);
  const counted = rows.filter(
    (row) => row.gap_eV !== null && (!row.samePoints || row.bic! <= best + DEFENSIBLE_BIC),
  );
  const chosen = rows[0];
  if (chosen !== undefined && !counted.includes(chosen)) counted.push(chosen);
  const half = (pick: (row: Systematic["trials"][number]) => number | null): number | null => {
    const values = counted.map(pick).filter((value): value is number => value !== null);
    return values.length < 2 ? null : (Math.max(...values) - Math.min(...values)) / 2;
  };
  const gap = half((row) => row.gap_eV);
  const rydberg = half((row) => row.rydberg_eV);
  const { offset_sigma_eV: offset, scale_sigma: scale } = protocol.axis;
  const relative = areaSystematic(spectrum, protocol, points);
  return {
    // An error of the axis, or of a defect that is held, stands even where no other background could be tried.
    gap_eV: withOthers(gap, Math.hypot(offset, scale * state.levels.gap, held?.gap_eV ?? 0)),
    rydberg_eV: withOthers(rydberg, Math.hypot(scale * state.levels.rydberg, held?.rydberg_eV ?? 0)),
    defect0: withOthers(
      half((row) => row.defect0),
      held?.sigma ?? 0,
    ),
    ...(held === null ? {} : { held_defect: held }),
    ...(relative === null ? {} : { area_relative: relative }),
    trials: rows.map(({ samePoints, ...row }, i) => ({
      ...row,
      same_points: samePoints,
      counted: counted.includes(rows[i]!),
    })),
  };
}

function withOthers(spread: number | null, others: number): number | null {
  if (spread === null) return others > 0 ? others : null;
  return Math.hypot(spread, others);
}

/** A background on the list that describes the spectrum clearly better than the one that was asked for is said, not taken. */
export function systematicNotes(systematic: Systematic | null): Note[] {
  const chosen = systematic?.trials[0];
  if (systematic === null || chosen === undefined || chosen.bic === null) return [];
  const rivals = systematic.trials.filter((row) => row.same_points === true && row.bic !== null);
  const best = rivals.reduce((a, b) => (b.bic! < a.bic! ? b : a), chosen);
  if (best === chosen || best.bic! > chosen.bic - DEFENSIBLE_BIC) return [];
  const moved = best.gap_eV === null || chosen.gap_eV === null ? null : best.gap_eV - chosen.gap_eV;
  return [
    doubt(
      "background-better",
      "background",
      `Another background describes the spectrum clearly better: ${best.name} (BIC lower by ${(chosen.bic - best.bic!).toFixed(0)}, p of runs ${best.runs_p?.toPrecision(2) ?? "unknown"} against ${chosen.runs_p?.toPrecision(2) ?? "unknown"})${
        moved === null ? "" : `; it moves the gap by ${(1e6 * moved).toPrecision(3)} µeV`
      }.`,
      "set background (or tail.model) in the protocol to it, or say why not",
    ),
  ];
}

function planTrials(
  points: FitPoints,
  state: LadderState,
  protocol: Protocol,
  choices: ModelChoices,
): Trial[] {
  const low = points.energy[0]!;
  const high = points.energy[points.energy.length - 1]!;
  const same = { low, high, samePoints: true };
  const trials: Trial[] = [{ name: "as chosen", choices, ...same }];
  const polynomial = choices.background.find((term) => term.term === "polynomial");
  if (polynomial !== undefined) {
    for (const order of [polynomial.order - 1, polynomial.order + 1]) {
      if (order < 0 || order > 8) continue;
      const background = choices.background.map((term): BackgroundTerm =>
        term === polynomial ? { ...polynomial, order } : term,
      );
      trials.push({ name: `polynomial of order ${order}`, choices: { ...choices, background }, ...same });
    }
  }
  const onset = choices.background.find((term) => term.term === "square-root");
  if (onset !== undefined) {
    const background = choices.background.filter((term) => term !== onset);
    if (background.length > 0)
      trials.push({ name: "without square-root onset", choices: { ...choices, background }, ...same });
  }
  if (choices.tail) {
    trials.push({
      name: choices.continuumOdd ? "continuum without odd part" : "continuum with odd part",
      choices: { ...choices, continuumOdd: !choices.continuumOdd },
      ...same,
    });
    const top = state.ns[state.ns.length - 1]!;
    const background: BackgroundTerm[] = [
      ...choices.background,
      { term: "urbach", energy_eV: Math.max(1e-6, (state.levels.gap - energyOf(top, state.levels)) / 2) },
    ];
    trials.push({
      name: "Urbach tail instead of the series tail",
      choices: { ...choices, tail: false, background },
      ...same,
    });
  }
  const first = state.energy[0]!;
  const narrower = low + 0.4 * Math.max(0, first - low);
  if (narrower > low)
    trials.push({ name: "window from higher up", choices, low: narrower, high, samePoints: false });
  const gap = state.levels.gap;
  if (high > gap && protocol.window_eV === null) {
    trials.push({
      name: "window to nearer the gap",
      choices,
      low,
      high: gap + 0.4 * (high - gap),
      samePoints: false,
    });
  }
  return trials;
}

/** Gap, Rydberg energy and defect of a trial: those of the spectrum fit where the lines are tied to the law. */
function levelsOf(fit: SpectrumFit, reference: LevelFit): ArrayLike<number> | null {
  const tied = tiedLevels(fit);
  if (tied !== null) return [tied.gap, tied.rydberg, tied.defect0];
  const places = determinedPlaces(fit, 0).filter((j) => reference.n.includes(fit.lines.ns[j]!));
  const levels = fitLevels({
    n: places.map((j) => fit.lines.ns[j]!),
    energy_eV: Float64Array.from(places, (j) => fit.lines.energy[j]!),
    covariance: covarianceBlock(fit, 0, places),
    defect: reference.defect,
    heldDefect: reference.estimates.values[2],
  });
  return levels.ok ? levels.value.estimates.values : null;
}

const FIRST_LOOK = 4;
const MOST_ITERATIONS = 20;
const HOPELESS = 5;

function runTrial(
  points: FitPoints,
  state: LadderState,
  reference: LevelFit,
  protocol: Protocol,
  unit: Spectrum["unit"],
  trial: Trial,
  chosenChi2: number | null,
  watch: Watch,
): Systematic["trials"][number] | null {
  const inside = (value: number): boolean => value >= trial.low && value <= trial.high;
  const keep = [...points.energy.keys()].filter((i) => inside(points.energy[i]!));
  const part: FitPoints = {
    energy: Float64Array.from(keep, (i) => points.energy[i]!),
    signal: Float64Array.from(keep, (i) => points.signal[i]!),
    sigma: Float64Array.from(keep, (i) => points.sigma[i]!),
  };
  const model = buildModel(part, state, protocol, unit, trial.choices);
  const attempt = (maxIterations: number): SpectrumFit =>
    fitSpectrum(part, model.spec, model.start, {
      watch,
      maxIterations,
      gradientTolerance: 1e-4,
      costTolerance: 1e-6,
    });
  let raw = attempt(FIRST_LOOK);
  // A trial that is still this far off after a first look never becomes defensible: it is listed where it stands.
  const hopeless = chosenChi2 !== null && raw.solution.chi2 > HOPELESS * chosenChi2;
  if (!raw.solution.converged && !hopeless) raw = attempt(MOST_ITERATIONS);
  const fit = withAxisJitter(raw, protocol.axis.jitter_eV);
  // A fit that was stopped has values of no meaning.
  stopIfCancelled(watch);
  const values = levelsOf(fit, reference);
  const parameters = parameterCount(fit);
  return {
    name: trial.name,
    gap_eV: values?.[0] ?? null,
    rydberg_eV: values?.[1] ?? null,
    defect0: values?.[2] ?? null,
    chi2: fit.solution.chi2,
    bic: informationCriteria(fit.solution.chi2, part.energy.length, parameters).bic,
    runs_p: runsTest(fit.solution.residuals).p,
  };
}
