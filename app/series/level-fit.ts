import {
  assumption,
  doubt,
  failure,
  propagate,
  success,
  type Estimates,
  type Note,
  type Result,
} from "../base/index.ts";
import { LEVEL, levelLaw } from "../laws/index.ts";
import { choleskyFactor, forwardSubstitute } from "../solve/index.ts";
import { fitToLaw, type LawProblem, type LawSolution } from "./law-fit.ts";
import type { SeriesIssue } from "./series-issue.ts";

export type DefectChoice = "none" | "constant" | "ritz";

export interface LevelInput {
  /** Principal quantum numbers, ascending (k). */
  readonly n: readonly number[];
  /** (k) */
  readonly energy_eV: Float64Array;
  /** (k x k, row-major) eV^2 */
  readonly covariance: Float64Array;
  readonly defect: DefectChoice;
  /** Defect where it is not free: asked for (`none`: pass the ideal (3 - D)/2) or with too few lines. Default 0. */
  readonly heldDefect?: number | undefined;
  /** Hold the Rydberg energy, eV. */
  readonly heldRydberg_eV?: number | undefined;
  /** Highest Ritz term that is free; default 2. */
  readonly ritzOrder?: 2 | 4 | undefined;
  /** How the minimum is found (law-fit.ts); default `search`. */
  readonly how?: "search" | "newton" | undefined;
}

export interface LevelFit {
  readonly n: readonly number[];
  /** gap_eV, rydberg_eV, defect0, defect2, defect4; held parameters have variance 0. */
  readonly estimates: Estimates;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  /** Probability of a larger chi square; 1 where nothing is left to test. */
  readonly p: number;
  /** Energy minus law, and its standard error (k). */
  readonly offset_eV: Float64Array;
  readonly offsetSigma_eV: Float64Array;
  /** Which defects were fitted: none, constant, ritz. */
  readonly defect: DefectChoice;
  readonly held: readonly { readonly name: string; readonly value: number; readonly reason: string }[];
  readonly converged: boolean;
  /** d parameters/d energies (5 x k, row-major): the linearised fit. */
  readonly gain: Float64Array;
  /** Root of reduced chi square where the law is rejected (p < 0.01), else null. */
  readonly errorScale: number | null;
  readonly notes: readonly Note[];
}

export const LEVEL_NAMES = ["gap_eV", "rydberg_eV", "defect0", "defect2", "defect4"] as const;
const UNITS = ["eV", "eV", "1", "1", "1"] as const;
const PARAMETERS = 5;
/** Chi square below this probability rejects a law. */
export const REJECTED_BELOW = 0.01;

/**
 * What      Level law E_n = E_g - Ry/(n - delta_n)^2 fitted to line energies with their full covariance. The start
 *           needs no preset: for a given delta0 the law is linear in gap and Rydberg energy, so delta0 is scanned
 *           and the Ritz terms are freed one after another.
 * Units     eV.
 * Domain    two lines or more; the defect is free from four lines on, a Ritz term from five (delta4: six); with a held
 *           Rydberg energy from one line less. With fewer the notes say what was held and why.
 * Accuracy  tests/reference/atomic-series.test.ts (measured levels), tests/app/series/level-fit.test.ts.
 * Source    see laws/level.ts; the convention for few lines follows from the degrees of freedom.
 */
export function fitLevels(input: LevelInput): Result<LevelFit, SeriesIssue> {
  const k = input.n.length;
  const heldRydberg = input.heldRydberg_eV;
  const spare = heldRydberg === undefined ? 0 : 1;
  if (k + spare < 2) {
    return failure({ code: "series/too-few-lines", facts: { law: "level", found: k, needed: 2 - spare } });
  }
  const wantedFree =
    input.defect === "none" ? 0 : input.defect === "constant" ? 1 : 1 + (input.ritzOrder ?? 2) / 2;
  // gap and Rydberg energy and one degree of freedom come first.
  const freeDefects = Math.max(0, Math.min(wantedFree, k + spare - 3));
  const heldDefect = input.heldDefect ?? 0;

  const reference = Math.max(...input.energy_eV);
  const shifted = Float64Array.from(input.energy_eV, (energy) => energy - reference);
  const start = scanDefect(input, shifted, freeDefects > 0 ? null : heldDefect);
  if (start === null) {
    return failure({ code: "series/bad-covariance", facts: { law: "level", lines: k } });
  }
  let theta = start;
  let solution: LawSolution | null = null;
  // The Ritz terms are freed one after another, each from the solution before it.
  for (let stage = Math.min(1, freeDefects); stage <= freeDefects; stage++) {
    solution = fitToLaw(makeLevelProblem(input, shifted, theta, stage));
    if (solution === null) return failure({ code: "series/not-finite", facts: { law: "level" } });
    theta = solution.values;
  }
  if (solution === null) return failure({ code: "series/not-finite", facts: { law: "level" } });

  const values = Float64Array.from(solution.values);
  values[0] = values[0]! + reference;
  const estimates: Estimates = {
    names: LEVEL_NAMES,
    units: UNITS,
    values,
    covariance: solution.covariance,
    degreesOfFreedom: solution.degreesOfFreedom,
    sigmaFrom: "given",
  };
  const held = listHeld(input, freeDefects, wantedFree, heldDefect);
  const rejected = solution.degreesOfFreedom > 0 && solution.p < REJECTED_BELOW;
  return success({
    n: input.n,
    estimates,
    chi2: solution.chi2,
    degreesOfFreedom: solution.degreesOfFreedom,
    p: solution.p,
    offset_eV: solution.residuals,
    offsetSigma_eV: offsetSigmas(input, solution.covariance, theta),
    defect: freeDefects === 0 ? "none" : freeDefects === 1 ? "constant" : "ritz",
    held,
    converged: solution.converged,
    gain: solution.gain,
    errorScale: rejected ? Math.sqrt(solution.chi2 / solution.degreesOfFreedom) : null,
    notes: describeFit(input, solution, held, rejected),
  });
}

/** gap and Rydberg energy for each delta0 of a ladder of n_1 - delta0, the best taken; or for the one that is held. */
function scanDefect(input: LevelInput, shifted: Float64Array, defect: number | null): Float64Array | null {
  const k = input.n.length;
  const scale = Float64Array.from(shifted, (_, i) => 1 / Math.sqrt(input.covariance[i * k + i]!));
  if (!scale.every((one) => Number.isFinite(one) && one > 0)) return null;
  const correlation = new Float64Array(k * k);
  for (let i = 0; i < k; i++)
    for (let j = 0; j < k; j++) correlation[i * k + j] = input.covariance[i * k + j]! * scale[i]! * scale[j]!;
  const factor = choleskyFactor(correlation, k);
  if (factor === null) return null;
  const whiten = (values: Float64Array): Float64Array => {
    for (let i = 0; i < k; i++) values[i] = values[i]! * scale[i]!;
    forwardSubstitute(factor, k, values);
    return values;
  };
  const target = whiten(shifted.slice());
  const ones = whiten(new Float64Array(k).fill(1));
  const column = new Float64Array(k);
  const onesNorm = dot(ones, ones);
  const first = Math.min(...input.n);
  const candidates: number[] = [];
  if (defect !== null) candidates.push(defect);
  else
    for (let j = 0; j <= 48; j++)
      candidates.push(first - 0.15 * Math.exp((j / 48) * Math.log((first + 2) / 0.15)));
  let best: Float64Array | null = null;
  let bestChi2 = Infinity;
  for (const delta of candidates) {
    for (let i = 0; i < k; i++) column[i] = -1 / (input.n[i]! - delta) ** 2;
    whiten(column);
    let rydberg = input.heldRydberg_eV;
    if (rydberg === undefined) {
      const share = dot(ones, column) / onesNorm;
      const offset = dot(ones, target) / onesNorm;
      let top = 0;
      let bottom = 0;
      for (let i = 0; i < k; i++) {
        const c = column[i]! - share * ones[i]!;
        top += c * (target[i]! - offset * ones[i]!);
        bottom += c * c;
      }
      rydberg = top / bottom;
    }
    let gap = 0;
    for (let i = 0; i < k; i++) gap += ones[i]! * (target[i]! - rydberg * column[i]!);
    gap /= onesNorm;
    let chi2 = 0;
    for (let i = 0; i < k; i++) chi2 += (target[i]! - rydberg * column[i]! - gap * ones[i]!) ** 2;
    if (chi2 < bestChi2) {
      bestChi2 = chi2;
      best = Float64Array.of(gap, rydberg, delta, 0, 0);
    }
  }
  return best;
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

export function makeLevelProblem(
  input: LevelInput,
  shifted: Float64Array,
  start: Float64Array,
  freeDefects: number,
): LawProblem {
  const k = input.n.length;
  const out = new Float64Array(LEVEL.size);
  const at = (n: number, theta: Float64Array): void => {
    levelLaw(
      n,
      { gap: theta[0]!, rydberg: theta[1]!, defect0: theta[2]!, defect2: theta[3]!, defect4: theta[4]! },
      out,
    );
  };
  return {
    observed: shifted,
    covariance: input.covariance,
    start,
    how: input.how,
    held: [false, input.heldRydberg_eV !== undefined, freeDefects < 1, freeDefects < 2, freeDefects < 3],
    model: (theta, values) => {
      for (let i = 0; i < k; i++) {
        at(input.n[i]!, theta);
        values[i] = out[LEVEL.energy]!;
      }
    },
    jacobian: (theta, values) => {
      for (let i = 0; i < k; i++) {
        at(input.n[i]!, theta);
        for (let j = 0; j < PARAMETERS; j++) values[j * k + i] = out[LEVEL.byGap + j]!;
      }
    },
  };
}

/** Gradient of E_n in the five parameters. */
export function levelGradient(n: number, values: ArrayLike<number>): Float64Array {
  const out = new Float64Array(LEVEL.size);
  levelLaw(
    n,
    { gap: values[0]!, rydberg: values[1]!, defect0: values[2]!, defect2: values[3]!, defect4: values[4]! },
    out,
  );
  return out.slice(LEVEL.byGap, LEVEL.byGap + PARAMETERS);
}

/** Residuals of a least-squares fit have the variance V - J C J'. */
function offsetSigmas(input: LevelInput, covariance: Float64Array, theta: Float64Array): Float64Array {
  const k = input.n.length;
  return Float64Array.from(input.n, (n, i) =>
    Math.sqrt(Math.max(0, input.covariance[i * k + i]! - propagate(levelGradient(n, theta), covariance))),
  );
}

function listHeld(
  input: LevelInput,
  freeDefects: number,
  wantedFree: number,
  heldDefect: number,
): LevelFit["held"] {
  const held: { name: string; value: number; reason: string }[] = [];
  if (input.heldRydberg_eV !== undefined) {
    held.push({ name: "rydberg_eV", value: input.heldRydberg_eV, reason: "asked" });
  }
  const few = `${input.n.length} lines are too few to free it`;
  for (let j = freeDefects; j < 3; j++) {
    const reason = j < wantedFree ? few : j === 0 ? "series.defect is none" : "not asked";
    held.push({ name: LEVEL_NAMES[2 + j]!, value: j === 0 ? heldDefect : 0, reason });
  }
  return held;
}

function describeFit(
  input: LevelInput,
  solution: LawSolution,
  held: LevelFit["held"],
  rejected: boolean,
): Note[] {
  const notes: Note[] = [];
  const lines = input.n.length;
  const forced = held.filter((one) => one.reason.endsWith("too few to free it"));
  if (forced.length > 0) {
    const names = forced.map((one) => `${one.name} at ${one.value}`).join(", ");
    // Three lines can follow the law by chance with any defect that is held.
    const say = lines <= 3 ? doubt : assumption;
    notes.push(
      say(
        "defect-held",
        "series.defect0",
        `With ${lines} lines the series cannot tell the defect from gap and Rydberg energy: held ${names}.`,
        "measure higher lines, or set material.defect0 to the value you want held",
      ),
    );
  }
  if (solution.degreesOfFreedom === 0) {
    notes.push(
      doubt(
        "law-not-tested",
        "series.p",
        `${lines} lines fix the law with nothing left over: chi square cannot test it.`,
        "measure more lines, or hold the defect (series.defect=none)",
      ),
    );
  } else if (solution.degreesOfFreedom === 1) {
    notes.push(
      doubt(
        "one-degree-left",
        "series.defect0",
        `${lines} lines leave one degree of freedom: the test of the law is weak and gap, Rydberg energy and defect are strongly correlated.`,
        "measure more lines, or hold the defect (series.defect=none with material.defect0)",
      ),
    );
  }
  if (rejected) {
    const factor = Math.sqrt(solution.chi2 / solution.degreesOfFreedom);
    notes.push(
      doubt(
        "law-rejected",
        "series",
        `The level law does not describe these lines within their errors (chi square ${format(solution.chi2)} for ${solution.degreesOfFreedom} degrees of freedom, ${sayProbability(solution.p)}). Standard errors times ${format(factor)} are given beside the plain ones.`,
        "start at a higher n (series.fit_n), allow a Ritz term (series.defect=ritz), or look for blends and satellites",
      ),
    );
  }
  if (!solution.converged) {
    notes.push(
      doubt(
        "law-not-converged",
        "series",
        "The fit of the level law stopped before it was stationary.",
        "look at the energies in the lines table for one that is far off, and leave it out (lines.n)",
      ),
    );
  }
  return notes;
}

/** `p = 0.0027`, `p < 1e-16`. */
export function sayProbability(p: number): string {
  return p < 1e-16 ? "p < 1e-16" : `p = ${Number(p.toPrecision(2))}`;
}

/** Four significant digits, for sentences. */
export function format(value: number): string {
  return String(Number(value.toPrecision(4)));
}
