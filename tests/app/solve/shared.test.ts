import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { solveSeparable, solveShared, type SeparableProblem } from "../../../app/solve/index.ts";
import { lineProblem, TWO_LINES } from "./lines.ts";

/** Theta of a member: centre 0, width 0, centre 1, width 1; the first centre and the second width are shared. */
const SHARED_PLACES = [0, 3];

function members(count: number, sigma: number): { problem: SeparableProblem; theta: Float64Array }[] {
  const random = makeRandom(7);
  return Array.from({ length: count }, (_, a) => {
    const truth = {
      ...TWO_LINES,
      centres: [TWO_LINES.centres[0]!, TWO_LINES.centres[1]! + 0.02 * random.normal()],
      widths: [TWO_LINES.widths[0]! * (1 + 0.3 * a), TWO_LINES.widths[1]!],
      heights: [1 / (1 + a), 0.6 / (1 + 0.5 * a)],
    };
    return lineProblem(180 + 20 * a, truth, sigma, 100 + a);
  });
}

/** All members as one dense problem: shared parameters first, then each member's own; coefficients member by member. */
function stack(parts: readonly { problem: SeparableProblem }[]): SeparableProblem {
  const rows = parts.reduce((sum, { problem }) => sum + problem.rows, 0);
  const linear = parts.reduce((sum, { problem }) => sum + problem.linear, 0);
  const own = [1, 2];
  const nonlinear = 2 + own.length * parts.length;
  const at = (a: number): number => parts.slice(0, a).reduce((sum, { problem }) => sum + problem.rows, 0);
  const local = (theta: Float64Array, a: number): Float64Array =>
    Float64Array.of(theta[0]!, theta[2 + 2 * a]!, theta[3 + 2 * a]!, theta[1]!);
  const place = (a: number): number[] => [0, 2 + 2 * a, 3 + 2 * a, 1];
  return {
    rows,
    nonlinear,
    linear,
    data: Float64Array.from(parts.flatMap(({ problem }) => [...problem.data])),
    weights: Float64Array.from(parts.flatMap(({ problem }) => [...problem.weights])),
    columns: (theta, phi) => {
      phi.fill(0);
      let column = 0;
      parts.forEach(({ problem }, a) => {
        const small = new Float64Array(problem.rows * problem.linear);
        problem.columns(local(theta, a), small);
        for (let j = 0; j < problem.linear; j++)
          phi.set(small.subarray(j * problem.rows, (j + 1) * problem.rows), (column + j) * rows + at(a));
        column += problem.linear;
      });
    },
    derivatives: (theta, c, out) => {
      out.fill(0);
      let column = 0;
      parts.forEach(({ problem }, a) => {
        const small = new Float64Array(problem.rows * problem.nonlinear);
        problem.derivatives(local(theta, a), c.subarray(column, column + problem.linear), small);
        place(a).forEach((target, j) =>
          out.set(small.subarray(j * problem.rows, (j + 1) * problem.rows), target * rows + at(a)),
        );
        column += problem.linear;
      });
    },
  };
}

function start(theta: Float64Array, shift: number): Float64Array {
  return theta.map((value, j) => value * (1 + shift * (j % 2 === 0 ? 1 : -1)));
}

describe("several problems in one fit", () => {
  const parts = members(3, 0.01);
  const shared = solveShared(
    parts.map(({ problem, theta }) => ({
      problem,
      start: start(theta, 0.1),
      sharedAt: Int32Array.from(SHARED_PLACES),
    })),
    Float64Array.of(TWO_LINES.centres[0]! * 1.1, TWO_LINES.widths[1]! * 0.9),
  );
  const dense = stack(parts);
  const whole = solveSeparable(
    dense,
    Float64Array.from([
      TWO_LINES.centres[0]! * 1.1,
      TWO_LINES.widths[1]! * 0.9,
      ...parts.flatMap(({ theta }) => [...start(theta, 0.1).subarray(1, 3)]),
    ]),
    { steering: "orthogonal" },
  );
  const size = dense.nonlinear + dense.linear;
  const sigma = (i: number): number => Math.sqrt(whole.covariance[i * size + i]!);

  it("ends where one dense fit ends, and says so for the same reasons", () => {
    expect(shared.converged).toBe(true);
    expect(whole.converged).toBe(true);
    // Derived: the same minimum of the same sum of squares.
    expect(Math.abs(shared.chi2 / whole.chi2 - 1)).toBeLessThan(1e-12);
    // Derived: as above.
    expect(shared.degreesOfFreedom).toBe(whole.degreesOfFreedom);
    for (let g = 0; g < 2; g++)
      // Derived: as above, in standard errors.
      expect(Math.abs(shared.shared[g]! - whole.theta[g]!)).toBeLessThan(1e-6 * sigma(g));
    parts.forEach((_, a) => {
      for (const j of [1, 2]) {
        const i = 1 + 2 * a + j;
        // Derived: as above.
        expect(Math.abs(shared.members[a]!.theta[j]! - whole.theta[i]!)).toBeLessThan(1e-6 * sigma(i));
      }
    });
  });

  it("has the covariance of one dense fit: shared block, own blocks, cross terms and those between members", () => {
    /** Place of parameter j (theta, then c) of member a in the dense fit. */
    const place = (a: number, j: number): number =>
      j >= 4 ? dense.nonlinear + 5 * a + (j - 4) : ([0, 2 + 2 * a, 3 + 2 * a, 1] as const)[j]!;
    const close = (value: number, i: number, j: number): void => {
      const scale = sigma(i) * sigma(j);
      // Derived: the inverse of the same normal matrix.
      expect(Math.abs(value - whole.covariance[i * size + j]!) / scale).toBeLessThan(1e-8);
    };
    for (let g = 0; g < 2; g++) for (let h = 0; h < 2; h++) close(shared.sharedCovariance[g * 2 + h]!, g, h);
    for (let a = 0; a < 3; a++)
      for (let i = 0; i < 9; i++)
        for (let j = 0; j < 9; j++)
          close(shared.members[a]!.covariance[i * 9 + j]!, place(a, i), place(a, j));
    for (let i = 0; i < 9; i++)
      for (let j = 0; j < 9; j++) {
        let sum = 0;
        for (let g = 0; g < 2; g++)
          for (let h = 0; h < 2; h++)
            sum +=
              shared.sensitivity[0]![i * 2 + g]! *
              shared.sharedCovariance[g * 2 + h]! *
              shared.sensitivity[2]![j * 2 + h]!;
        if (!SHARED_PLACES.includes(i) && !SHARED_PLACES.includes(j)) close(sum, place(0, i), place(2, j));
      }
  });

  it("keeps bounds of shared and of own parameters, held ones without variance", () => {
    const lower = Float64Array.of(-1, 0.01, 0, 0.01);
    const bounded = solveShared(
      parts.map(({ problem, theta }) => ({
        problem,
        start: start(theta, 0.1),
        lower,
        upper: Float64Array.of(1, 0.1, 1, 1),
        sharedAt: Int32Array.from(SHARED_PLACES),
      })),
      Float64Array.of(-0.33, 0.05),
      { lower: Float64Array.of(-1, 0.01), upper: Float64Array.of(1, 0.06) },
    );
    expect(bounded.converged).toBe(true);
    // Derived: the optimum with these widths (0.067 without the bound) lies beyond it.
    expect(bounded.shared[1]).toBe(0.06);
    expect(Array.from(bounded.activeBounds)).toEqual([0, 1]);
    expect(bounded.sharedCovariance[3]).toBe(0);
    for (const member of bounded.members) {
      // Derived: widths of 0.12 and more against a bound of 0.1.
      expect(member.theta[1]).toBe(0.1);
      expect(member.activeBounds[1]).toBe(1);
      expect(member.covariance[1 * 9 + 1]).toBe(0);
    }
  });

  it("is the plain separable fit where there is one problem alone", () => {
    const [one] = parts;
    const alone = solveShared(
      [{ problem: one!.problem, start: start(one!.theta, 0.1), sharedAt: Int32Array.of(0) }],
      Float64Array.of(one!.theta[0]! * 1.1),
    );
    const plain = solveSeparable(one!.problem, start(one!.theta, 0.1));
    for (let j = 0; j < 4; j++)
      // Derived: the same problem, in standard errors.
      expect(Math.abs(alone.members[0]!.theta[j]! - plain.theta[j]!)).toBeLessThan(
        1e-6 * Math.sqrt(plain.covariance[j * 9 + j]!),
      );
    // Derived: as above.
    expect(alone.members[0]!.covariance[0]! / plain.covariance[0]!).toBeCloseTo(1, 8);
  });

  it("stops when asked, and says that it did not converge", () => {
    let looks = 0;
    const stopped = solveShared(
      parts.map(({ problem, theta }) => ({
        problem,
        start: start(theta, 0.1),
        sharedAt: Int32Array.from(SHARED_PLACES),
      })),
      Float64Array.of(-0.33, 0.05),
      { watch: { report: () => undefined, cancelled: () => ++looks > 6, seconds: () => 0 } },
    );
    expect(stopped.termination).toBe("cancelled");
    expect(stopped.converged).toBe(false);
  });
});
