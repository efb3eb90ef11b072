import { profileInterval } from "../solve/index.ts";
import { fitToLaw } from "./law-fit.ts";
import type { LevelName } from "./joint-region.ts";
import { LEVEL_NAMES, makeLevelProblem, type LevelFit, type LevelInput } from "./level-fit.ts";
import { selectMatrix, selectVector } from "./select-lines.ts";

interface Ends {
  readonly low: number | null;
  readonly high: number | null;
}

export interface LevelProfile {
  readonly gap_eV: Ends;
  readonly rydberg_eV: Ends;
  readonly defect0: Ends;
}

/** Chi square over its minimum along one parameter, the others fitted again at every value: rows (value, rise), ascending. */
export interface ProfileCurve {
  readonly name: LevelName;
  readonly points: readonly (readonly [number, number])[];
}

/**
 * What      Profile-likelihood intervals of gap, Rydberg energy and delta0: the others are fitted again for every held
 *           value. Two nulls where a parameter was held.
 * Domain    `input` holds the lines of the fit or more of them; the fit names the ones that count.
 * Source    Venzon and Moolgavkar, Appl. Stat. 37, 87 (1988).
 */
export function profileLevels(input: LevelInput, fit: LevelFit, factor = 1): LevelProfile {
  const { minimised, origin, reference, variance } = levelProfile(input, fit);
  const ends = (i: number): Ends => {
    if (!(variance(i) > 0)) return { low: null, high: null };
    const found = profileInterval({
      minimised: (value) => minimised(i, value),
      best: origin[i]!,
      chi2: fit.chi2,
      sigma: Math.sqrt(variance(i)),
      rise: factor * factor,
    });
    const back = i === 0 ? reference : 0;
    return {
      low: found.low === null ? null : found.low + back,
      high: found.high === null ? null : found.high + back,
    };
  };
  return { gap_eV: ends(0), rydberg_eV: ends(1), defect0: ends(2) };
}

/** The same as curves, at steps of half a standard error to three on each side; parameters that were held are left out. */
export function levelProfileCurves(input: LevelInput, fit: LevelFit): ProfileCurve[] {
  const { minimised, origin, reference, variance } = levelProfile(input, fit);
  return [0, 1, 2].flatMap((i): ProfileCurve[] => {
    if (!(variance(i) > 0)) return [];
    const sigma = Math.sqrt(variance(i));
    const back = i === 0 ? reference : 0;
    const points: [number, number][] = [];
    for (let step = -STEPS; step <= STEPS; step++) {
      const value = origin[i]! + (3 * sigma * step) / STEPS;
      const rise = step === 0 ? 0 : minimised(i, value) - fit.chi2;
      if (Number.isFinite(rise)) points.push([value + back, rise]);
    }
    return [{ name: LEVEL_NAMES[i]!, points }];
  });
}

/** Points of a curve on each side of its minimum. */
const STEPS = 6;

interface Profiled {
  /** Chi square with parameter i held at a value; not a number where no law is found there. */
  readonly minimised: (i: number, value: number) => number;
  /** The fitted values, energies counted from `reference`, so that small steps of the gap keep their digits. */
  readonly origin: Float64Array;
  readonly reference: number;
  /** 0 where the parameter was held. */
  readonly variance: (i: number) => number;
}

function levelProfile(input: LevelInput, fit: LevelFit): Profiled {
  const places = fit.n.map((n) => input.n.indexOf(n));
  const lines: LevelInput = {
    ...input,
    how: "newton",
    n: fit.n,
    energy_eV: selectVector(input.energy_eV, places),
    covariance: selectMatrix(input.covariance, input.n.length, places),
  };
  const { values, covariance } = fit.estimates;
  const reference = Math.max(...lines.energy_eV);
  const shifted = lines.energy_eV.map((energy) => energy - reference);
  const origin = Float64Array.from(values);
  origin[0] = origin[0]! - reference;
  const variance = (i: number): number => covariance[i * 6]!;
  const freeDefects = [2, 3, 4].filter((i) => variance(i) > 0).length;
  const minimised = (i: number, value: number): number => {
    const start = Float64Array.from(origin);
    // The other parameters follow the held one along the ridge of the covariance.
    const move = (value - origin[i]!) / variance(i);
    for (let j = 0; j < start.length; j++) start[j] = start[j]! + move * covariance[j * 5 + i]!;
    start[i] = value;
    const problem = makeLevelProblem(lines, shifted, start, freeDefects);
    const held = problem.held!.map((one, j) => one || j === i);
    return fitToLaw({ ...problem, held })?.chi2 ?? Number.NaN;
  };
  return { minimised, origin, reference, variance };
}
