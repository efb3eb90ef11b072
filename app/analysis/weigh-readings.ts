import { assumption, doubt, type Note } from "../base/index.ts";
import { REJECTED_BELOW, type RangeChoice } from "../series/index.ts";
import type { SpectrumFit } from "../fit/index.ts";
import type { LadderState } from "./ladder-model.ts";

/** A fitted reading of n, as far as it is weighed. */
export interface FittedReading {
  readonly fit: SpectrumFit;
  readonly state: LadderState;
  readonly range: RangeChoice | null;
  /** Found lines inside the series that have no n in this reading. */
  readonly unassigned: number;
  /** What found lines below the window would have cost inside it: the squares of their significances. */
  readonly shutOut: number;
}

/** What a line that is left out of the law, missing inside the ladder or foreign to it is worth in chi square. */
const COST_OF_EXCEPTION = 12;
/** Readings within this of each other are told apart by nothing but the law of the peaks; also the least gain of a change. */
export const CLEARLY_BETTER = 20;

/**
 * What      One number for a reading of n: chi square of the spectrum (over reduced chi square of the best reading where that
 *           exceeds one, since a misfit shared by all readings decides nothing), plus that of the level law, plus a fixed
 *           price for every line left out of the law, missing inside or foreign.
 * Domain    readings fitted to the same number of points; where the windows differ the spectrum counts by its reduced chi
 *           square times `points`.
 * Source    sum of -2 log likelihood with a price per exception, as Schwarz's criterion has a price per parameter.
 */
export function weighReading(reading: FittedReading, points: number, scale: number): number {
  const { fit, state, range } = reading;
  const reduced = fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom);
  const { ns } = state;
  const absent = ns[ns.length - 1]! - ns[0]! + 1 - ns.length;
  const outside =
    range === null ? ns.length : ns.filter((n) => n < range.fit_n[0] || n > range.fit_n[1]).length;
  const law = range === null ? 0 : Math.max(range.fit.chi2, range.passedOver);
  return (
    (reduced * points) / scale +
    law +
    reading.shutOut +
    COST_OF_EXCEPTION * (absent + outside + reading.unassigned)
  );
}

/** Whether a reading gives reason to try others: a law that fails, a fit that fails, lines without n, a defect near the edge. */
export function isDoubtful(reading: FittedReading, defectCentre: number, settled: boolean): boolean {
  const { fit, range } = reading;
  const reduced = fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom);
  if (range === null || reading.unassigned > 0 || !settled || reduced > DOUBTFUL_MISFIT) return true;
  if (range.fit.degreesOfFreedom > 0 && range.fit.p < REJECTED_BELOW) return true;
  if (range.fit.n.length < reading.state.ns.length) return true;
  return range.fit.defect !== "none" && Math.abs(range.fit.estimates.values[2]! - defectCentre) > EDGE;
}

const DOUBTFUL_MISFIT = 1.1;
const EDGE = 0.35;

/** A reading in words: which n the lines found were given. */
function inWords(state: LadderState): string {
  const { ns } = state;
  const absent: number[] = [];
  for (let n = ns[0]!; n < ns[ns.length - 1]!; n++) if (!ns.includes(n)) absent.push(n);
  return `n = ${ns[0]} to ${ns[ns.length - 1]}${absent.length > 0 ? ` without ${absent.join(", ")}` : ""}`;
}

/** What the weighing of readings has to tell. */
export function readingNotes(
  chosen: LadderState,
  others: readonly { readonly state: LadderState; readonly excess: number }[],
  revised: boolean,
): Note[] {
  const notes: Note[] = [];
  if (revised) {
    const first = others[0]!;
    notes.push(
      assumption(
        "reading-revised",
        "lines",
        `The peaks alone suggested ${inWords(first.state)}; fitted, ${inWords(chosen)} describes spectrum and level law better (chi square lower by ${Number(first.excess.toPrecision(3))}).`,
        "name the lines (lines.n) to decide it yourself",
      ),
    );
  }
  const near = others.filter((one) => Math.abs(one.excess) < CLEARLY_BETTER);
  if (near.length > 0) {
    notes.push(
      doubt(
        "reading-disputed",
        "lines",
        `Another reading of the same lines is hardly worse: ${near.map((one) => `${inWords(one.state)} (chi square ${one.excess >= 0 ? "higher" : "lower"} by ${Number(Math.abs(one.excess).toPrecision(3))})`).join("; ")}.`,
        "name the lines (lines.n), or measure the place of the line in question better",
      ),
    );
  }
  return notes;
}
