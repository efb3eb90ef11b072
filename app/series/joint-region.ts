import { fitToLaw } from "./law-fit.ts";
import { LEVEL_NAMES, makeLevelProblem, type LevelFit, type LevelInput } from "./level-fit.ts";
import { selectMatrix, selectVector } from "./select-lines.ts";

export type LevelName = (typeof LEVEL_NAMES)[number];

/** A closed curve of equal likelihood in two parameters of the level law, the others fitted again at every point of it. */
export interface JointRegion {
  readonly x: LevelName;
  readonly y: LevelName;
  /** Rise of chi square on the curve. */
  readonly rise: number;
  /** Points of the curve, once around; eV and pure numbers as the names say. */
  readonly points: readonly (readonly [number, number])[];
}

/**
 * What      Joint confidence region of two parameters by profile likelihood: along each direction of the standardised
 *           covariance ellipse the radius where chi square, minimised over the rest, has risen by -2 ln(1 - level).
 * Domain    null where one of the two was held. A direction along which chi square does not rise so far within six times the
 *           ellipse ends there.
 * Accuracy  radius to 1e-3 of itself; on a law linear in both the ellipse itself (tests/app/series/joint-region.test.ts).
 * Source    Box and Lucas, Biometrika 46, 77 (1959); chi square of two degrees of freedom has the quantile -2 ln(1 - p).
 */
export function jointRegion(
  input: LevelInput,
  fit: LevelFit,
  x: LevelName,
  y: LevelName,
  level: number,
  directions = 24,
): JointRegion | null {
  const i = LEVEL_NAMES.indexOf(x);
  const j = LEVEL_NAMES.indexOf(y);
  const size = LEVEL_NAMES.length;
  const { values, covariance } = fit.estimates;
  const [vx, vy, cxy] = [covariance[i * size + i]!, covariance[j * size + j]!, covariance[i * size + j]!];
  if (!(vx > 0) || !(vy > 0)) return null;
  const places = fit.n.map((n) => input.n.indexOf(n));
  if (places.some((place) => place < 0)) return null;
  const lines: LevelInput = {
    ...input,
    how: "newton",
    n: fit.n,
    energy_eV: selectVector(input.energy_eV, places),
    covariance: selectMatrix(input.covariance, input.n.length, places),
  };
  const reference = Math.max(...lines.energy_eV);
  const shifted = lines.energy_eV.map((energy) => energy - reference);
  const origin = Float64Array.from(values);
  origin[0] = origin[0]! - reference;
  const freeDefects = [2, 3, 4].filter((p) => covariance[p * (size + 1)]! > 0).length;
  const rise = -2 * Math.log(1 - level);
  // Cholesky of the 2 x 2 block: (x, y) = best + L (cos, sin) r.
  const lx = Math.sqrt(vx);
  const lyx = cxy / lx;
  const ly = Math.sqrt(Math.max(0, vy - lyx * lyx));
  if (!(ly > 0)) return null;
  const determinant = vx * vy - cxy * cxy;
  const excess = (dx: number, dy: number): number => {
    const start = Float64Array.from(origin);
    // The others follow the two held ones along the ridge of the covariance.
    const px = (vy * dx - cxy * dy) / determinant;
    const py = (vx * dy - cxy * dx) / determinant;
    for (let p = 0; p < size; p++)
      start[p] = start[p]! + px * covariance[p * size + i]! + py * covariance[p * size + j]!;
    start[i] = origin[i]! + dx;
    start[j] = origin[j]! + dy;
    const problem = makeLevelProblem(lines, shifted, start, freeDefects);
    const held = problem.held!.map((one, p) => one || p === i || p === j);
    return (fitToLaw({ ...problem, held })?.chi2 ?? Number.NaN) - fit.chi2;
  };
  const points: [number, number][] = [];
  for (let direction = 0; direction < directions; direction++) {
    const angle = (2 * Math.PI * direction) / directions;
    const ux = lx * Math.cos(angle);
    const uy = lyx * Math.cos(angle) + ly * Math.sin(angle);
    // Root of chi square is nearly linear in the radius: scale to the target until it is met.
    let radius = Math.sqrt(rise);
    for (let turn = 0; turn < 12; turn++) {
      const found = excess(radius * ux, radius * uy);
      if (!(found > 0)) {
        // No sensible law there: half way back.
        radius *= Number.isNaN(found) ? 0.7 : 1.5;
        continue;
      }
      const ratio = Math.sqrt(rise / found);
      radius *= Math.min(2, Math.max(0.5, ratio));
      if (Math.abs(ratio - 1) < 1e-3 || radius > 6 * Math.sqrt(rise)) break;
    }
    points.push([values[i]! + radius * ux, values[j]! + radius * uy]);
  }
  return { x, y, rise, points };
}
