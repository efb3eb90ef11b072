import { weighRows } from "./gather.ts";
import { residualOf, sumOfSquares, transposedTimes } from "./gram.ts";
import type { SeparableProblem } from "./types.ts";
import { addImages, addSquares, type Directions } from "./weakDirections.ts";

/** Rows of a block: its columns stay in the second-level cache. */
const BLOCK = 256;

/** What every row says about an answer that was found on few. */
export interface EveryRow {
  /** (y - model) weight (m) */
  readonly residuals: Float64Array;
  readonly chi2: number;
  /** [D | Phi]'r (p + k) */
  readonly gradient: Float64Array;
  /** |[D | Phi] v|^2 for each direction v */
  readonly squares: Float64Array;
}

/**
 * What      One pass over every row at (theta, c), block by block, without a matrix of all of them: residuals, the gradient
 *           along nonlinear parameters and coefficients, and the lengths of a few directions' images. Null where the
 *           problem has no blocks, has rows left out, or is not finite.
 * Shapes    SeparableProblem in types.ts; directions over theta, then c.
 * Units     weighted.
 * Accuracy  sums of products in double precision; the blocks are the problem's own columns.
 * Source    condense.ts, whose answers it tests.
 */
export function passEveryRow(
  problem: SeparableProblem,
  theta: Float64Array,
  coefficients: Float64Array,
  directions: Directions,
): EveryRow | null {
  const { rows, nonlinear: p, linear: k, data, weights } = problem;
  if (problem.blocks === undefined || problem.offset !== undefined || weights.includes(0)) return null;
  const write = problem.blocks(theta, coefficients);
  const columns = new Float64Array(BLOCK * (p + k));
  const part = new Float64Array(BLOCK);
  const product = new Float64Array(p + k);
  const residuals = new Float64Array(rows);
  const gradient = new Float64Array(p + k);
  const squares = new Float64Array(directions.count);
  const images = new Float64Array(BLOCK * directions.count);
  let chi2 = 0;
  for (let first = 0; first < rows; first += BLOCK) {
    const height = Math.min(BLOCK, rows - first);
    const derivatives = columns.subarray(0, height * p);
    const phi = columns.subarray(height * p, height * (p + k));
    write(first, first + height, phi, derivatives);
    if (!weighRows(columns, p + k, weights, first, height)) return null;
    for (let r = 0; r < height; r++) part[r] = data[first + r]! * weights[first + r]!;
    residualOf(phi, k, height, height, coefficients, part, part);
    residuals.set(part.subarray(0, height), first);
    chi2 += sumOfSquares(part, height);
    transposedTimes(columns, p + k, height, height, part, product);
    for (let j = 0; j < p + k; j++) gradient[j] = gradient[j]! + product[j]!;
    images.fill(0);
    const block = { a: columns, ld: height, from: 0, rows: height, columns: p + k };
    addImages(block, 0, directions, images);
    addSquares(images, height, squares);
  }
  return Number.isFinite(chi2) ? { residuals, chi2, gradient, squares } : null;
}
