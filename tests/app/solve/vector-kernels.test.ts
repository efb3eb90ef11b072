import { afterAll, describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { solveSeparable } from "../../../app/solve/index.ts";
import { crossProduct, gramMatrix } from "../../../app/solve/gram.ts";
import { RowBlockTriangle } from "../../../app/solve/rowBlockTriangle.ts";
import { usePlainLoops, vectorKernels } from "../../../app/solve/vectorKernels.ts";
import { lineProblem, TWO_LINES } from "./lines.ts";

function randomMatrix(rows: number, columns: number, seed: number): Float64Array {
  const random = makeRandom(seed);
  return Float64Array.from({ length: rows * columns }, () => random.normal());
}

/** The same with plain and with compiled loops. */
function both<T>(run: () => T): [T, T] {
  usePlainLoops(true);
  const plain = run();
  usePlainLoops(false);
  return [plain, run()];
}

function largestDifference(a: Float64Array, b: Float64Array): number {
  let largest = 0;
  a.forEach((value, i) => (largest = Math.max(largest, Math.abs(value - b[i]!))));
  return largest;
}

afterAll(() => usePlainLoops(false));

describe("compiled loops", () => {
  test("are to be had in this program", () => {
    usePlainLoops(false);
    expect(vectorKernels()).not.toBeNull();
    usePlainLoops(true);
    expect(vectorKernels()).toBeNull();
  });

  test.each([
    [645, 55, 7],
    [333, 13, 10],
    [2001, 4, 3],
    [901, 21, 22],
    [4000, 3, 2],
  ])("%i rows, %i and %i columns: products and triangle as the plain loops", (rows, na, nb) => {
    const a = randomMatrix(rows, na, 3);
    const b = randomMatrix(rows, nb, 4);
    const [plain, compiled] = both(() => {
      const gram = new Float64Array(na * na);
      gramMatrix(a, na, rows, rows, gram);
      const cross = new Float64Array(na * nb);
      crossProduct(a, na, b, nb, rows, rows, cross);
      const triangle = new RowBlockTriangle(na + nb);
      triangle.factor([a, b], [na, nb], [rows, rows], rows);
      return { gram, cross, r: triangle.r };
    });
    // Derived: the same sums in another order; columns of length sqrt(rows)
    expect(largestDifference(plain.gram, compiled.gram)).toBeLessThan(1e-13 * rows);
    expect(largestDifference(plain.cross, compiled.cross)).toBeLessThan(1e-13 * rows);
    expect(largestDifference(plain.r, compiled.r)).toBeLessThan(1e-12 * Math.sqrt(rows));
  });

  test("a number that is none stays one", () => {
    const a = randomMatrix(3000, 5, 5);
    a[7] = NaN;
    const gram = new Float64Array(25);
    usePlainLoops(false);
    gramMatrix(a, 5, 3000, 3000, gram);
    expect(gram[0]).toBeNaN();
    expect(gram[6]).not.toBeNaN();
  });

  test("one fit after another of different size finds nothing of the one before", () => {
    const large = randomMatrix(3000, 30, 6);
    const small = randomMatrix(1000, 6, 7);
    const gram = new Float64Array(36);
    const again = new Float64Array(36);
    usePlainLoops(false);
    gramMatrix(small, 6, 1000, 1000, gram);
    gramMatrix(large, 30, 3000, 3000, new Float64Array(900));
    gramMatrix(small, 6, 1000, 1000, again);
    expect(Array.from(again)).toEqual(Array.from(gram));
  });

  test("a fit has the same answer with either, to 1e-12", () => {
    const { problem, theta } = lineProblem(5000, TWO_LINES, 0.01, 8);
    const start = theta.map((value, j) => value + (j % 2 === 0 ? 0.02 : 0.01));
    const options = { gradientTolerance: 1e-12, costTolerance: 1e-15 };
    const [plain, compiled] = both(() => solveSeparable(problem, start, options));
    expect(compiled.converged).toBe(true);
    expect(Math.abs(compiled.chi2 / plain.chi2 - 1)).toBeLessThan(1e-12);
    plain.theta.forEach((value, j) => {
      const sigma = Math.sqrt(plain.covariance[j * (problem.nonlinear + problem.linear) + j]!);
      expect(Math.abs(compiled.theta[j]! - value)).toBeLessThan(1e-8 * sigma);
      expect(Math.abs(compiled.theta[j]! / value - 1)).toBeLessThan(1e-10);
    });
    plain.covariance.forEach((value, i) => {
      if (value !== 0) expect(Math.abs(compiled.covariance[i]! / value - 1)).toBeLessThan(1e-8);
    });
  });
});
