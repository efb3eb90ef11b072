import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  choleskyFactor,
  choleskySolve,
  linearLeastSquares,
  largestEigenvalue,
} from "../../../app/solve/index.ts";
import { crossProduct, gramMatrix, residualOf, transposedTimes } from "../../../app/solve/gram.ts";
import { RowBlockTriangle } from "../../../app/solve/rowBlockTriangle.ts";

function randomMatrix(rows: number, columns: number, seed: number): Float64Array {
  const random = makeRandom(seed);
  return Float64Array.from({ length: rows * columns }, () => random.normal());
}

/** A^-1 (n x n), column by column; it is symmetric. */
function inverseOf(a: Float64Array, n: number): Float64Array {
  const factor = choleskyFactor(a, n)!;
  const inverse = new Float64Array(n * n);
  for (let j = 0; j < n; j++) {
    const column = inverse.subarray(j * n, (j + 1) * n);
    column[j] = 1;
    choleskySolve(factor, n, column);
  }
  return inverse;
}

describe("products of columns", () => {
  test.each([
    [1, 1, 1],
    [7, 3, 2],
    [600, 9, 5],
    [257, 4, 4],
    [1000, 13, 1],
  ])("%i rows, %i by %i columns equal the plain sums", (rows, na, nb) => {
    const a = randomMatrix(rows, na, 1);
    const b = randomMatrix(rows, nb, 2);
    const plain = (x: Float64Array, i: number, y: Float64Array, j: number): number => {
      let sum = 0;
      for (let r = 0; r < rows; r++) sum += x[i * rows + r]! * y[j * rows + r]!;
      return sum;
    };
    const cross = new Float64Array(na * nb);
    const gram = new Float64Array(na * na);
    const image = new Float64Array(na);
    crossProduct(a, na, b, nb, rows, rows, cross);
    gramMatrix(a, na, rows, rows, gram);
    transposedTimes(a, na, rows, rows, b, image);
    for (let i = 0; i < na; i++) {
      // Derived: the definition
      for (let j = 0; j < nb; j++) expect(cross[i * nb + j]!).toBeCloseTo(plain(a, i, b, j), 10);
      for (let j = 0; j < na; j++) expect(gram[i * na + j]!).toBeCloseTo(plain(a, i, a, j), 10);
      expect(image[i]!).toBeCloseTo(plain(a, i, b, 0), 10);
    }
    const x = randomMatrix(na, 1, 3);
    const out = new Float64Array(rows);
    residualOf(a, na, rows, rows, x, b.subarray(0, rows), out);
    for (let r = 0; r < rows; r++) {
      let sum = b[r]!;
      for (let i = 0; i < na; i++) sum -= a[i * rows + r]! * x[i]!;
      expect(out[r]!).toBeCloseTo(sum, 11);
    }
  });
});

describe("factorisations", () => {
  test("the triangle by row blocks has the Gram matrix of its columns, whatever the number of rows", () => {
    for (const [rows, n] of [
      [3, 5],
      [64, 6],
      [65, 7],
      [1000, 10],
    ] as const) {
      const a = randomMatrix(rows, n, rows);
      const triangle = new RowBlockTriangle(n);
      triangle.factor([a.subarray(0, 2 * rows), a.subarray(2 * rows)], [2, n - 2], [rows, rows], rows);
      const gram = new Float64Array(n * n);
      gramMatrix(a, n, rows, rows, gram);
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < n; j++) {
          let sum = 0;
          for (let k = 0; k < n; k++) sum += triangle.r[k * n + i]! * triangle.r[k * n + j]!;
          // Derived: R'R = A'A
          expect(Math.abs(sum - gram[i * n + j]!)).toBeLessThan(1e-12 * rows);
          if (j < i) expect(triangle.r[i * n + j]).toBe(0);
        }
      }
    }
  });

  test("largest eigenvalues of a Hilbert matrix and of its inverse", () => {
    const n = 5;
    const hilbert = Float64Array.from({ length: 25 }, (_, at) => 1 / (1 + Math.floor(at / n) + (at % n)));
    const inverse = inverseOf(hilbert, n);
    // Source: condition number of the 5 x 5 Hilbert matrix, 4.766e5 (Higham, Accuracy and Stability of Numerical
    // Algorithms, 2nd ed. (2002), table 28.1; value from memory)
    expect((largestEigenvalue(hilbert, n) * largestEigenvalue(inverse, n)) / 4.766e5).toBeCloseTo(1, 3);
  });

  test("largest eigenvalue of a chain of springs", () => {
    for (const n of [1, 2, 3, 40]) {
      const chain = new Float64Array(n * n);
      for (let i = 0; i < n; i++) chain[i * n + i] = 2;
      for (let i = 1; i < n; i++) chain[i * n + i - 1] = -1;
      // Derived: 2 - 2 cos(n pi/(n + 1)), the highest mode of n masses between walls
      expect(largestEigenvalue(chain, n)).toBeCloseTo(2 - 2 * Math.cos((n * Math.PI) / (n + 1)), 13);
    }
  });

  test("Cholesky solves and inverts, and refuses what is not positive definite", () => {
    const a = Float64Array.from([4, 2, 1, 2, 5, 3, 1, 3, 6]);
    const factor = choleskyFactor(a, 3)!;
    const x = Float64Array.from([1, 2, 3]);
    choleskySolve(factor, 3, x);
    for (let i = 0; i < 3; i++) {
      let sum = 0;
      for (let j = 0; j < 3; j++) sum += a[i * 3 + j]! * x[j]!;
      // Derived: A x = b
      expect(sum).toBeCloseTo(i + 1, 12);
    }
    const inverse = inverseOf(a, 3);
    for (let i = 0; i < 3; i++) {
      for (let j = 0; j < 3; j++) {
        let sum = 0;
        for (let k = 0; k < 3; k++) sum += a[i * 3 + k]! * inverse[k * 3 + j]!;
        // Derived: A A^-1 = 1
        expect(sum).toBeCloseTo(i === j ? 1 : 0, 12);
      }
    }
    expect(choleskyFactor(Float64Array.from([1, 2, 2, 1]), 2)).toBe(null);
    expect(choleskyFactor(Float64Array.from([1, 0, 0, NaN]), 2)).toBe(null);
  });
});

describe("linear least squares", () => {
  test("weights of 0 leave rows out and dependent columns are flagged, the others keep their covariance", () => {
    const m = 40;
    const columns = new Float64Array(m * 4);
    const data = new Float64Array(m);
    const weights = new Float64Array(m);
    for (let i = 0; i < m; i++) {
      columns[i] = 1;
      columns[m + i] = i;
      columns[2 * m + i] = Math.sin(i);
      columns[3 * m + i] = 3 * i;
      data[i] = i === 5 ? NaN : 2 + 6 * i + 4 * Math.sin(i);
      weights[i] = i === 5 ? 0 : 2;
    }
    const solution = linearLeastSquares(columns, m, 4, data, weights);
    expect(solution.rank).toBe(3);
    expect([...solution.undetermined]).toEqual([0, 1, 0, 1]);
    // Derived: the data are 2 + 6 i + 4 sin i exactly, and the two slopes share 6
    expect(solution.coefficients[0]!).toBeCloseTo(2, 11);
    expect(solution.coefficients[1]! + 3 * solution.coefficients[3]!).toBeCloseTo(6, 12);
    expect(solution.coefficients[2]!).toBeCloseTo(4, 11);
    expect(solution.degreesOfFreedom).toBe(m - 1 - 3);
    const three = linearLeastSquares(columns.subarray(0, 3 * m), m, 3, data, weights);
    expect(solution.covariance[2 * 4 + 2]! / three.covariance[2 * 3 + 2]!).toBeCloseTo(1, 10);
    expect(Number.isNaN(solution.covariance[1 * 4 + 1]!)).toBe(true);
  });

  test("a straight line has the textbook covariance", () => {
    const x = [1, 2, 3, 4, 5];
    const columns = Float64Array.from([...x.map(() => 1), ...x]);
    const solution = linearLeastSquares(
      columns,
      5,
      2,
      Float64Array.from([1, 3, 2, 5, 4]),
      new Float64Array(5).fill(2),
    );
    // Derived: slope variance sigma^2/sum (x - 3)^2 = 0.25/10, that of the intercept 0.25 (1/5 + 9/10)
    expect(solution.covariance[3]!).toBeCloseTo(0.025, 14);
    expect(solution.covariance[0]!).toBeCloseTo(0.275, 14);
    expect(solution.coefficients[1]!).toBeCloseTo(0.8, 14);
  });
});
