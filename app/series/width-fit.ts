import { doubt, failure, success, type Estimates, type Note, type Result } from "../base/index.ts";
import { defectAt, WIDTH, widthBase, widthLaw, type WidthBase } from "../laws/index.ts";
import { profileInterval } from "../solve/index.ts";
import { fitToLaw, type LawSolution } from "./law-fit.ts";
import { format, REJECTED_BELOW } from "./level-fit.ts";
import { selectMatrix, selectVector } from "./select-lines.ts";
import type { SeriesIssue } from "./series-issue.ts";

export interface WidthInput {
  readonly n: readonly number[];
  /** Full widths at half maximum (k), eV. */
  readonly width_eV: Float64Array;
  /** (k x k, row-major) eV^2 */
  readonly covariance: Float64Array;
  readonly exponent: number | "free";
  readonly base: WidthBase;
  readonly floorKind: "lorentzian" | "gaussian" | "none";
  /** Read for base n-delta only, and taken as exact: its error is far below that of the widths. Default 0. */
  readonly defect0?: number | undefined;
  readonly defect2?: number | undefined;
  /** Half width of the interval in standard errors; default 1. */
  readonly factor?: number | undefined;
  /** Judge whether the lowest line follows; default true. */
  readonly judgeRange?: boolean | undefined;
  /** Test a held exponent by freeing it, and profile a free one; default true. */
  readonly testExponent?: boolean | undefined;
  /** How the minimum is found (law-fit.ts); default `search`. */
  readonly how?: "search" | "newton" | undefined;
}

export interface WidthFit {
  /** Lines of the fit. */
  readonly n: readonly number[];
  readonly leftOut: readonly number[];
  /** floor_eV, coefficient_eV, exponent; held ones and a floor at zero have variance 0. */
  readonly estimates: Estimates;
  readonly floorAtZero: boolean;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly p: number;
  /** Width minus law for every line given (k), eV. */
  readonly offset_eV: Float64Array;
  /** The exponent set free, with its profile interval: a test where it is held. Null with too few lines. */
  readonly exponentTest: {
    readonly value: number;
    readonly sigma: number;
    readonly low: number | null;
    readonly high: number | null;
    /** Fall of chi square when the exponent is freed. */
    readonly gain: number;
  } | null;
  readonly converged: boolean;
  /** d parameters/d widths of the lines of the fit (3 x lines, row-major). */
  readonly gain: Float64Array;
  readonly notes: readonly Note[];
}

const DEFAULT_EXPONENT = 3;
/** Outside these a power of n is no width law. */
const LEAST_EXPONENT = 0.1;
const MOST_EXPONENT = 10;

/**
 * What      Width law G_n = floor + G_1 b^-k (laws/width.ts) fitted to line widths with their covariance, the floor
 *           kept at or above zero. The lowest line is left out where the others reject it by three standard errors.
 * Units     eV.
 * Domain    one line more than the coefficient needs, else the exponent, then the floor, is held and a note says so.
 * Accuracy  tests/app/series/width-and-strength.test.ts.
 */
export function fitWidths(given: WidthInput): Result<WidthFit, SeriesIssue> {
  const input = withModelErrors(given);
  const count = input.n.length;
  if (count < 1)
    return failure({ code: "series/too-few-lines", facts: { law: "width", found: count, needed: 1 } });
  const all = input.n.map((_, i) => i);
  const whole = fitLines(input, all, input.exponent, input.how);
  if (whole === null) {
    return failure({ code: "series/bad-covariance", facts: { law: "width", lines: count } });
  }
  let chosen = whole;
  if (input.judgeRange !== false && count >= 5 && whole.solution.p < 0.05) {
    const others = fitLines(input, all.slice(1), input.exponent, input.how);
    // What counts is whether the line is foreign to the others, not whether the others are perfect.
    if (others !== null && whole.solution.chi2 - others.solution.chi2 > 9) chosen = others;
  }
  const { solution, places, exponentFree, floorFree } = chosen;
  const values = solution.values;
  const offset = Float64Array.from(input.n, (n, i) => input.width_eV[i]! - predict(input, n, values));
  const exponentTest = input.testExponent === false ? null : testExponent(input, chosen);
  const notes = describe(input, chosen, exponentTest);
  return success({
    n: places.map((i) => input.n[i]!),
    leftOut: input.n.filter((_, i) => !places.includes(i)),
    estimates: {
      names: ["floor_eV", "coefficient_eV", "exponent"],
      units: ["eV", "eV", "1"],
      values,
      covariance: solution.covariance,
      degreesOfFreedom: solution.degreesOfFreedom,
      sigmaFrom: "given",
    },
    floorAtZero: chosen.floorAtZero,
    chi2: solution.chi2,
    degreesOfFreedom: solution.degreesOfFreedom,
    p: solution.p,
    offset_eV: offset,
    exponentTest,
    converged: solution.converged,
    gain: solution.gain,
    notes: [
      ...fewNotes(input, exponentFree, floorFree, chosen.floorAtZero, chosen.exponentLost === true),
      ...notes,
    ],
  });
}

/** Error of the width of a Lorentz line of given area under white noise, as a power of the width. */
const ERROR_POWER = 1.5;
/** A reading further from the law than this factor says nothing about its own error. */
const MOST_RESCALED = 1.5;

/**
 * Weights from the law and not from the single reading: a width that came out small by chance also claims a small error, and
 * pulls the law down (by 0.2 standard errors of the floor where the narrowest lines are known to a fifth). The errors are
 * carried from the widths that were read to those of a first fit.
 */
function withModelErrors(input: WidthInput): WidthInput {
  const count = input.n.length;
  if (count < 3) return input;
  const all = input.n.map((_, i) => i);
  const first = fitLines(input, all, input.exponent, "newton");
  if (first === null) return input;
  const scale = Float64Array.from(input.n, (n, i) => {
    const ratio = predict(input, n, first.solution.values) / input.width_eV[i]!;
    return ratio > 1 / MOST_RESCALED && ratio < MOST_RESCALED ? ratio ** ERROR_POWER : 1;
  });
  return {
    ...input,
    covariance: input.covariance.map(
      (value, at) => value * scale[Math.floor(at / count)]! * scale[at % count]!,
    ),
  };
}

interface Chosen {
  readonly solution: LawSolution;
  readonly places: readonly number[];
  readonly exponentFree: boolean;
  readonly floorFree: boolean;
  readonly floorAtZero: boolean;
  /** The exponent was to be free, but the widths follow no falling power of n. */
  readonly exponentLost?: boolean;
}

function fitLines(
  input: WidthInput,
  places: readonly number[],
  exponent: number | "free",
  how: "search" | "newton" = "search",
  start: ArrayLike<number> | null = null,
): Chosen | null {
  const n = places.map((i) => input.n[i]!);
  const widths = selectVector(input.width_eV, places);
  const covariance = selectMatrix(input.covariance, input.n.length, places);
  let room = n.length - 1;
  const floorFree = input.floorKind !== "none" && room > 0;
  if (floorFree) room -= 1;
  const exponentFree = exponent === "free" && room > 0;
  const power = exponent === "free" ? (start?.[2] ?? DEFAULT_EXPONENT) : exponent;

  const attempt = (freeFloor: boolean): LawSolution | null =>
    fitToLaw({
      observed: widths,
      covariance,
      how,
      start: startValues(input, n, widths, power, freeFloor),
      held: [!freeFloor, false, !exponentFree],
      model: (theta, out) => {
        for (let i = 0; i < n.length; i++) out[i] = predict(input, n[i]!, theta);
      },
      jacobian: (theta, out) => {
        for (let i = 0; i < n.length; i++) {
          const row = evaluate(input, n[i]!, theta);
          for (let j = 0; j < 3; j++) out[j * n.length + i] = row[WIDTH.byFloor + j]!;
        }
      },
    });
  const sensible = (solution: LawSolution | null): solution is LawSolution =>
    solution !== null &&
    solution.values[0]! >= 0 &&
    solution.values[1]! > 0 &&
    (!exponentFree || (solution.values[2]! > LEAST_EXPONENT && solution.values[2]! < MOST_EXPONENT));
  if (floorFree) {
    const solution = attempt(true);
    if (sensible(solution)) return { solution, places, exponentFree, floorFree, floorAtZero: false };
  }
  const solution = attempt(false);
  if (solution === null) return null;
  if (exponentFree && !sensible(solution)) {
    // Widths that do not fall with n leave no power law; one with the usual exponent is then said to be rejected.
    const held = fitLines(input, places, DEFAULT_EXPONENT, how);
    return held === null ? null : { ...held, exponentLost: true };
  }
  return { solution, places, exponentFree, floorFree, floorAtZero: floorFree };
}

/** Two ends of the series: the floor from the narrowest line, the coefficient from the lowest. */
function startValues(
  input: WidthInput,
  n: readonly number[],
  widths: Float64Array,
  exponent: number,
  floorFree: boolean,
): Float64Array {
  const first = Math.pow(baseOf(input, n[0]!), -exponent);
  const last = Math.pow(baseOf(input, n[n.length - 1]!), -exponent);
  const slope = (widths[0]! - widths[n.length - 1]!) / (first - last);
  const coefficient = floorFree && slope > 0 ? slope : widths[0]! / first;
  const floor = Math.max(widths[n.length - 1]! - coefficient * last, 0.1 * widths[n.length - 1]!);
  return Float64Array.of(floorFree ? floor : 0, coefficient, exponent);
}

function baseOf(input: WidthInput, n: number): number {
  return widthBase(n, defectAt(n, input.defect0 ?? 0, input.defect2 ?? 0), input.base);
}

function evaluate(input: WidthInput, n: number, theta: ArrayLike<number>): Float64Array {
  const out = new Float64Array(WIDTH.size);
  widthLaw(
    n,
    defectAt(n, input.defect0 ?? 0, input.defect2 ?? 0),
    {
      floor: theta[0]!,
      coefficient: theta[1]!,
      exponent: theta[2]!,
      base: input.base,
      floorKind: input.floorKind === "gaussian" ? "gaussian" : "lorentzian",
    },
    out,
  );
  return out;
}

function predict(input: WidthInput, n: number, theta: ArrayLike<number>): number {
  return evaluate(input, n, theta)[WIDTH.width]!;
}

function testExponent(input: WidthInput, chosen: Chosen): WidthFit["exponentTest"] {
  if (chosen.places.length < 4) return null;
  const free = chosen.exponentFree
    ? chosen
    : fitLines(input, chosen.places, "free", "search", chosen.solution.values);
  if (free === null || !free.exponentFree) return null;
  const value = free.solution.values[2]!;
  const sigma = Math.sqrt(free.solution.covariance[8]!);
  const factor = input.factor ?? 1;
  const { low, high } = profileInterval({
    minimised: (held) => fitLines(input, chosen.places, held, "newton")?.solution.chi2 ?? Number.NaN,
    best: value,
    chi2: free.solution.chi2,
    sigma,
    rise: factor * factor,
  });
  return { value, sigma, low, high, gain: Math.max(0, chosen.solution.chi2 - free.solution.chi2) };
}

/** Points of a curve on each side of its minimum. */
const STEPS = 6;

/**
 * Chi square over its minimum along the exponent, floor and coefficient fitted again at every value: rows (value, rise) at steps
 * of half a standard error to three on each side of the free exponent. Empty where it cannot be freed.
 */
export function exponentCurve(given: WidthInput, fit: WidthFit): readonly (readonly [number, number])[] {
  const test = fit.exponentTest;
  if (test === null || !(test.sigma > 0)) return [];
  const input = withModelErrors(given);
  const places = fit.n.map((n) => input.n.indexOf(n));
  const least = fit.chi2 - test.gain;
  const points: [number, number][] = [];
  for (let step = -STEPS; step <= STEPS; step++) {
    const value = test.value + (3 * test.sigma * step) / STEPS;
    if (value < LEAST_EXPONENT || value > MOST_EXPONENT) continue;
    const rise = step === 0 ? 0 : (fitLines(input, places, value, "newton")?.solution.chi2 ?? NaN) - least;
    if (Number.isFinite(rise)) points.push([value, rise]);
  }
  return points;
}

function fewNotes(
  input: WidthInput,
  exponentFree: boolean,
  floorFree: boolean,
  floorAtZero: boolean,
  exponentLost: boolean,
): Note[] {
  const notes: Note[] = [];
  if (input.exponent === "free" && !exponentFree) {
    notes.push(
      doubt(
        "width-exponent-held",
        "width_law.exponent",
        exponentLost
          ? `The widths do not fall as a power of n between ${LEAST_EXPONENT} and ${MOST_EXPONENT}: the exponent is held at ${DEFAULT_EXPONENT}.`
          : `${input.n.length} lines are too few to find the exponent of the widths: held at ${DEFAULT_EXPONENT}.`,
        "measure more lines, or set width.exponent",
      ),
    );
  }
  if (input.floorKind !== "none" && !floorFree) {
    notes.push(
      doubt(
        "width-floor-held",
        "width_law.floor_eV",
        "One line cannot tell a floor of the widths: held at zero.",
        "measure more lines",
      ),
    );
  }
  if (floorAtZero) {
    notes.push(
      doubt(
        "width-floor-at-zero",
        "width_law.floor_eV",
        "The floor of the widths would be negative: held at zero, and its standard error is not determined.",
        "set width.floor_kind=none to say so, or look whether the narrow lines are narrower than the sampling step",
      ),
    );
  }
  return notes;
}

function describe(input: WidthInput, chosen: Chosen, test: WidthFit["exponentTest"]): Note[] {
  const notes: Note[] = [];
  const { solution } = chosen;
  const leftOut = input.n.filter((_, i) => !chosen.places.includes(i));
  if (leftOut.length > 0) {
    notes.push(
      doubt(
        "width-lowest-left-out",
        "width_law.fit_n",
        `The width of n = ${leftOut.join(", ")} does not follow the law of the others and is left out.`,
        "nothing to do where the lowest line is known to be broadened otherwise",
      ),
    );
  }
  if (solution.degreesOfFreedom > 0 && solution.p < REJECTED_BELOW) {
    notes.push(
      doubt(
        "width-law-rejected",
        "width_law",
        `The width law does not describe the widths within their errors (chi square ${format(solution.chi2)} for ${solution.degreesOfFreedom} degrees of freedom).`,
        "free the exponent (width.exponent=free), try another base (width.base) or floor (width.floor_kind)",
      ),
    );
  }
  if (test !== null && !chosen.exponentFree && test.gain > 9) {
    notes.push(
      doubt(
        "width-exponent-differs",
        "width_law.exponent",
        `Set free, the exponent of the widths is ${format(test.value)} +- ${format(test.sigma)} instead of ${format(solution.values[2]!)} (chi square falls by ${format(test.gain)}).`,
        "free it (width.exponent=free), or try width.base=n-delta",
      ),
    );
  }
  return notes;
}
