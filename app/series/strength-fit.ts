import { doubt, failure, success, type Estimates, type Note, type Result } from "../base/index.ts";
import { defectAt, strength, type StrengthBase, type StrengthEnvelope } from "../laws/index.ts";
import { fitToLaw, type LawSolution } from "./law-fit.ts";
import { format, REJECTED_BELOW } from "./level-fit.ts";
import { selectMatrix, selectVector } from "./select-lines.ts";
import type { SeriesIssue } from "./series-issue.ts";

export interface StrengthInput {
  readonly n: readonly number[];
  /** (k) eV times the unit of the signal */
  readonly area: Float64Array;
  /** (k x k, row-major) */
  readonly covariance: Float64Array;
  readonly law: StrengthEnvelope;
  readonly base: StrengthBase;
  /** Read for base n-delta only, taken as exact. Default 0. */
  readonly defect0?: number | undefined;
  readonly defect2?: number | undefined;
  /** Judge which lines follow; default true. */
  readonly judgeRange?: boolean | undefined;
}

export interface StrengthFit {
  readonly n: readonly number[];
  readonly leftOut: readonly number[];
  /** coefficient */
  readonly estimates: Estimates;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly p: number;
  /** Area over law, and its standard error from the area alone, for every line given (k). */
  readonly ratio: Float64Array;
  readonly ratioSigma: Float64Array;
  /** n at which the area has fallen to half of the law, between lines by interpolation; null where it has not. */
  readonly half_at_n: number | null;
  /** d coefficient/d areas of the lines of the fit. */
  readonly gain: Float64Array;
  readonly notes: readonly Note[];
}

/** Chi square above this probability: the law holds. */
const HOLDS_ABOVE = 0.05;
const FEWEST_LINES = 3;

/**
 * What      Strength law A_n = C s(n) (laws/strength.ts) by generalised least squares, which is linear in C. The law
 *           is taken from all lines unless these reject it (p < 0.01), else from the longest run of neighbouring lines that follow it (p > 0.05, three lines or more, the lowest
 *           run first); lines that have fallen off at high n, or a lowest line that stands out, are then compared with it.
 * Units     area in eV times the unit of the signal; C likewise.
 * Accuracy  tests/app/series/width-and-strength.test.ts.
 */
export function fitStrengths(input: StrengthInput): Result<StrengthFit, SeriesIssue> {
  const count = input.n.length;
  if (count < 1)
    return failure({ code: "series/too-few-lines", facts: { law: "strength", found: count, needed: 1 } });
  const law = Float64Array.from(input.n, (n) =>
    strength(n, defectAt(n, input.defect0 ?? 0, input.defect2 ?? 0), input.law, input.base),
  );
  const whole = fitRun(input, law, 0, count);
  if (whole === null)
    return failure({ code: "series/bad-covariance", facts: { law: "strength", lines: count } });
  let [from, to, solution] = [0, count, whole];
  if (!(whole.p > REJECTED_BELOW) && input.judgeRange !== false) {
    search: for (let length = count - 1; length >= FEWEST_LINES; length--) {
      for (let first = 0; first + length <= count; first++) {
        const run = fitRun(input, law, first, first + length);
        if (run === null || !(run.p > HOLDS_ABOVE) || !(run.values[0]! > 0)) continue;
        [from, to, solution] = [first, first + length, run];
        break search;
      }
    }
  }
  const coefficient = solution.values[0]!;
  const ratio = law.map((s, i) => input.area[i]! / (coefficient * s));
  const ratioSigma = law.map((s, i) => Math.sqrt(input.covariance[i * count + i]!) / (coefficient * s));
  const half = findHalf(input.n, ratio, ratioSigma, from);
  return success({
    n: input.n.slice(from, to),
    leftOut: input.n.filter((_, i) => i < from || i >= to),
    estimates: {
      names: ["coefficient"],
      units: ["eV x signal"],
      values: solution.values,
      covariance: solution.covariance,
      degreesOfFreedom: solution.degreesOfFreedom,
      sigmaFrom: "given",
    },
    chi2: solution.chi2,
    degreesOfFreedom: solution.degreesOfFreedom,
    p: solution.p,
    ratio,
    ratioSigma,
    half_at_n: half,
    gain: solution.gain,
    notes: describe(input, solution, from, to, half),
  });
}

function fitRun(input: StrengthInput, law: Float64Array, from: number, to: number): LawSolution | null {
  const places = Array.from({ length: to - from }, (_, i) => from + i);
  const s = selectVector(law, places);
  const areas = selectVector(input.area, places);
  const anchor = s.findIndex((one) => one > 0);
  if (anchor < 0) return null;
  return fitToLaw({
    // Linear in C: one step.
    how: "newton",
    observed: areas,
    covariance: selectMatrix(input.covariance, input.n.length, places),
    start: Float64Array.of(areas[anchor]! / s[anchor]!),
    model: (theta, out) => {
      for (let i = 0; i < s.length; i++) out[i] = theta[0]! * s[i]!;
    },
    jacobian: (_theta, out) => {
      out.set(s);
    },
  });
}

/** The first n from which on the ratio stays below one half by more than its error. */
function findHalf(
  n: readonly number[],
  ratio: Float64Array,
  sigma: Float64Array,
  from: number,
): number | null {
  for (let i = Math.max(1, from + 1); i < n.length; i++) {
    if (!(ratio[i]! + sigma[i]! < 0.5) || !ratio.slice(i).every((one) => one < 0.5)) continue;
    const before = ratio[i - 1]!;
    if (!(before > 0.5)) return n[i]!;
    return n[i - 1]! + ((before - 0.5) / (before - ratio[i]!)) * (n[i]! - n[i - 1]!);
  }
  return null;
}

function describe(
  input: StrengthInput,
  solution: LawSolution,
  from: number,
  to: number,
  half: number | null,
): Note[] {
  const notes: Note[] = [];
  const above = input.n.slice(to);
  const below = input.n.slice(0, from);
  if (below.length + above.length > 0) {
    notes.push(
      doubt(
        "strength-range-cut",
        "strength_law.fit_n",
        `The strength law holds for n = ${input.n[from]} to ${input.n[to - 1]}; n = ${[...below, ...above].join(", ")} do not follow it.`,
        "compare area n^3 in the lines table; a fall at high n is a property of the crystal, not of the fit",
      ),
    );
  }
  if (solution.degreesOfFreedom > 0 && solution.p < REJECTED_BELOW) {
    notes.push(
      doubt(
        "strength-law-rejected",
        "strength_law",
        `The strength law does not describe the areas within their errors (chi square ${format(solution.chi2)} for ${solution.degreesOfFreedom} degrees of freedom).`,
        "try strength.law or strength.base, or tail.model=none to see how far the tail depends on it",
      ),
    );
  }
  if (half !== null) {
    notes.push(
      doubt(
        "strength-rolls-off",
        "strength_law.half_at_n",
        `The areas have fallen to half of the law at n = ${format(half)}.`,
        "charged impurities, strain and pump light remove high lines: compare with another spot or a lower power",
      ),
    );
  }
  return notes;
}
