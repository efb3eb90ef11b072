import { LEVEL, levelLaw, WIDTH, widthLaw } from "../laws/index.ts";
import { condenseRows, type CondensedProblem } from "../solve/index.ts";
import { panelsFor, panelsServe } from "./condense-points.ts";
import type { FitPoints, ModelSpec } from "./model-spec.ts";
import type { SpectrumProblem } from "./spectrum-problem.ts";
import { groupBands } from "./tail.ts";
import type { Feature } from "./transmittance-grid.ts";

/** Below this many points there is little to gain. */
const LEAST_ROWS = 600;
/** Condensed rows must be fewer than this part of the points. */
const WORTH_WHILE = 0.6;
/** Part of a background column that may stand in the panels' highest polynomials: one with a structure of its own stays. */
const SMOOTH = 1e-20;
/** A line under a Gaussian of standard deviation s has no pole; up to this many s from the axis it grows little. */
const GAUSS_REACH = 2;
const FAR_N = 1e6;

/**
 * What      One spectrum on few rows (condense.ts in solve), for parameters near theta; null where that is not worth while
 *           or the background has a structure finer than the panels.
 * Shapes    those of `problem`; `build` makes the same problem from other points and background columns.
 */
export function condenseSpectrum(problem: SpectrumProblem, theta: Float64Array): CondensedProblem | null {
  const condensed = condenseWith(problem, (at) => featuresAt(problem, at), theta);
  return condensed === null ? null : { ...condensed, problem: condensed.inner };
}

export interface CondensedSpectrum {
  readonly points: FitPoints;
  /** The same model on these points. */
  readonly inner: SpectrumProblem;
  readonly lost: number;
  serves(theta: Float64Array): boolean;
}

/** The same for a problem around this one, which may have features of its own at its parameters `at`. */
export function condenseWith(
  problem: SpectrumProblem,
  features: (at: Float64Array) => readonly Feature[],
  start: Float64Array,
): CondensedSpectrum | null {
  const { points, spec, weights } = problem;
  const m = points.energy.length;
  if (m < LEAST_ROWS) return null;
  const panels = panelsFor(points.energy, features(start));
  const columns = spec.background.map((column) => column.values);
  const rows = condenseRows(points.energy, [points.signal, ...columns], weights, panels);
  if (rows.x.length > WORTH_WHILE * m) return null;
  for (let b = 0; b < columns.length; b++) {
    let square = 0;
    for (let i = 0; i < m; i++) square += (columns[b]![i]! * weights[i]!) ** 2;
    if (rows.highest[b + 1]! > SMOOTH * square) return null;
  }
  const reduced: ModelSpec = {
    ...spec,
    background: spec.background.map((column, b) => ({ ...column, values: rows.columns[b + 1]! })),
  };
  const few: FitPoints = {
    energy: rows.x,
    signal: rows.columns[0]!,
    sigma: rows.weight.map((weight) => 1 / weight),
  };
  return {
    points: few,
    inner: problem.onPoints(few, reduced),
    lost: rows.lost[0]!,
    serves: (at) => panelsServe(points.energy, panels, features(at)),
  };
}

/** What the instrument adds to the width of a line, for the distance of its poles. */
export function lineReach({ gaussStd, lineStds, instrumentLorentz }: ModelSpec): number {
  return 2 * GAUSS_REACH * Math.min(gaussStd, ...(lineStds ?? [])) + (instrumentLorentz ?? 0);
}

/** Lines, tied lines, and the edges of groups of lines and of the continuum: wherever the model is not smooth. */
export function featuresAt(problem: SpectrumProblem, theta: Float64Array): Feature[] {
  const { spec } = problem;
  const extra = lineReach(spec);
  const features: Feature[] = spec.ns.map((_, j) => ({
    energy: problem.energyOf(j, theta),
    width: problem.widthOf(j, theta) + extra,
  }));
  for (const column of spec.background) features.push(...(column.features ?? []));
  const { tail } = spec;
  if (tail === null) return features;
  const { levels, widths } = problem.lawsAt(theta);
  const level = new Float64Array(LEVEL.size);
  const width = new Float64Array(WIDTH.size);
  const add = (n: number, widthN = n): void => {
    levelLaw(n, { ...levels, defect4: 0 }, level);
    widthLaw(widthN, tail.levels.defect0, widths, width);
    features.push({ energy: level[LEVEL.energy]!, width: Math.max(0, width[WIDTH.width]!) + extra });
  };
  for (const n of tail.below) add(n);
  for (let n = tail.fromN; n <= tail.toN; n++) add(n);
  if (tail.band)
    for (const { edgeN, upperN, middleN } of groupBands(tail)) {
      add(edgeN, middleN);
      add(upperN, middleN);
    }
  add(FAR_N);
  return features;
}
