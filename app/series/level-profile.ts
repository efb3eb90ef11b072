import { profileInterval } from "../solve/index.ts";
import { fitToLaw } from "./law-fit.ts";
import { makeLevelProblem, type LevelFit, type LevelInput } from "./level-fit.ts";
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

/**
 * What      Profile-likelihood intervals of gap, Rydberg energy and delta0: the others are fitted again for every held
 *           value. Two nulls where a parameter was held.
 * Domain    `input` holds the lines of the fit or more of them; the fit names the ones that count.
 * Source    Venzon and Moolgavkar, Appl. Stat. 37, 87 (1988).
 */
export function profileLevels(input: LevelInput, fit: LevelFit, factor = 1): LevelProfile {
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
  const isFree = (i: number): boolean => covariance[i * 6]! > 0;
  const freeDefects = [2, 3, 4].filter(isFree).length;
  const ends = (i: number): Ends => {
    if (!isFree(i)) return { low: null, high: null };
    const sigma = Math.sqrt(covariance[i * 6]!);
    const found = profileInterval({
      minimised: (value) => {
        const start = Float64Array.from(origin);
        // The other parameters follow the held one along the ridge of the covariance.
        const move = (value - origin[i]!) / covariance[i * 6]!;
        for (let j = 0; j < start.length; j++) start[j] = start[j]! + move * covariance[j * 5 + i]!;
        start[i] = value;
        const problem = makeLevelProblem(lines, shifted, start, freeDefects);
        const held = problem.held!.map((one, j) => one || j === i);
        return fitToLaw({ ...problem, held })?.chi2 ?? Number.NaN;
      },
      best: origin[i]!,
      chi2: fit.chi2,
      sigma,
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
