import { readFileSync } from "node:fs";

export interface StrdProblem {
  readonly name: string;
  readonly file: string;
  readonly n_parameters: number;
  readonly n_observations: number;
  readonly start1: number[];
  readonly start2: number[];
  readonly certified: number[];
  readonly certified_sd: number[];
  readonly rss: number;
  readonly dof: number;
}

const FOLDER = new URL("../../fixtures/reference/", import.meta.url);

export function strdIndex(): { nonlinear: StrdProblem[]; linear: StrdProblem[] } {
  return JSON.parse(readFileSync(new URL("strd/index.json", FOLDER), "utf8")) as {
    nonlinear: StrdProblem[];
    linear: StrdProblem[];
  };
}

/** The rows of numbers below the comments and the line of names. */
export function strdRows(problem: StrdProblem): number[][] {
  return readFileSync(new URL(problem.file, FOLDER), "utf8")
    .split("\n")
    .filter((line) => line !== "" && !line.startsWith("#"))
    .slice(1)
    .map((line) => line.split(",").map(Number));
}

/** Matching significant digits, -log10 of the relative error (absolute where the certified value is 0), at most `most`. */
export function matchingDigits(value: number, certified: number, most: number): number {
  if (value === certified) return most;
  const error = certified === 0 ? Math.abs(value) : Math.abs(value - certified) / Math.abs(certified);
  return Number.isNaN(error) ? -Infinity : Math.min(most, -Math.log10(error));
}
