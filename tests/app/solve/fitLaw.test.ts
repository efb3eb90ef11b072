import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { chiSquareSurvival, choleskyFactor, fitLaw, solveGeneral } from "../../../app/solve/index.ts";
import type { LawProblem } from "../../../app/solve/index.ts";

/** y = a - b/(n - c)^2, n = 2 .. */
function ladder(data: Float64Array, uncertainty: Pick<LawProblem, "sigmas" | "covariance">): LawProblem {
  const count = data.length;
  return {
    data,
    ...uncertainty,
    parameters: 3,
    model: (v, out) => {
      for (let i = 0; i < count; i++) out[i] = v[0]! - v[1]! / (i + 2 - v[2]!) ** 2;
    },
    jacobian: (v, out) => {
      for (let i = 0; i < count; i++) {
        const d = i + 2 - v[2]!;
        out[i] = 1;
        out[count + i] = -1 / (d * d);
        out[2 * count + i] = (-2 * v[1]!) / d ** 3;
      }
    },
  };
}

const TRUTH = Float64Array.from([2.172, 0.092, 0.23]);
const START = Float64Array.from([2.17, 0.08, 0]);
const N = 10;
const SIGMAS = Float64Array.from({ length: N }, (_, i) => 3e-5 / (i + 1));

function exactData(): Float64Array {
  const out = new Float64Array(N);
  ladder(out, { sigmas: SIGMAS }).model(TRUTH, out);
  return out;
}

/** Neighbours correlated by 0.4^|i-j|. */
const COVARIANCE = Float64Array.from({ length: N * N }, (_, at) => {
  const i = Math.floor(at / N);
  const j = at % N;
  return SIGMAS[i]! * SIGMAS[j]! * 0.4 ** Math.abs(i - j);
});

function noisy(seed: number): Float64Array {
  const random = makeRandom(seed);
  const factor = choleskyFactor(COVARIANCE, N)!;
  const z = Float64Array.from({ length: N }, () => random.normal());
  return exactData().map((v, i) => {
    let sum = v;
    for (let j = 0; j <= i; j++) sum += factor[i * N + j]! * z[j]!;
    return sum;
  });
}

describe("law fits", () => {
  test("exact data give the generating parameters", () => {
    const fit = fitLaw(ladder(exactData(), { sigmas: SIGMAS }), START);
    expect(fit.stationary).toBe(true);
    // Derived: data without noise
    fit.values.forEach((v, j) => expect(v / TRUTH[j]!).toBeCloseTo(1, 9));
    expect(fit.degreesOfFreedom).toBe(7);
    expect(fit.rank).toBe(3);
  });

  test("a full covariance agrees with the sum over its inverse, worked out plainly", () => {
    const data = noisy(3);
    const fit = fitLaw(ladder(data, { covariance: COVARIANCE }), START);
    expect(fit.stationary).toBe(true);
    // Derived: the inverse of the correlation 0.4^|i-j| is tridiagonal: 1/(1-r^2) times 1, 1 + r^2 ..., off -r
    const r = 0.4;
    let chi2 = 0;
    for (let i = 0; i < N; i++) {
      const u = fit.residuals[i]! / SIGMAS[i]!;
      chi2 += (u * u * (i === 0 || i === N - 1 ? 1 : 1 + r * r)) / (1 - r * r);
      if (i > 0) chi2 -= (2 * r * u * fit.residuals[i - 1]!) / SIGMAS[i - 1]! / (1 - r * r);
    }
    expect(fit.chi2).toBeCloseTo(chi2, 7);
    expect(fit.p).toBeCloseTo(chiSquareSurvival(chi2, 7), 8);
  });

  test("a diagonal covariance is the same as sigmas", () => {
    const data = noisy(4);
    const diagonal = new Float64Array(N * N);
    for (let i = 0; i < N; i++) diagonal[i * N + i] = SIGMAS[i]! ** 2;
    const a = fitLaw(ladder(data, { covariance: diagonal }), START);
    const b = fitLaw(ladder(data, { sigmas: SIGMAS }), START);
    // Derived: the same weights
    for (let j = 0; j < 3; j++) {
      expect(Math.abs(a.values[j]! - b.values[j]!)).toBeLessThan(1e-5 * Math.sqrt(b.covariance[j * 4]!));
      expect(a.covariance[j * 4]! / b.covariance[j * 4]!).toBeCloseTo(1, 5);
    }
  });

  test("pulls with correlated data have width one", () => {
    const square = new Float64Array(3);
    const runs = 200;
    let polished = 0;
    for (let seed = 0; seed < runs; seed++) {
      const fit = fitLaw(ladder(noisy(500 + seed), { covariance: COVARIANCE }), START);
      expect(fit.stationary).toBe(true);
      if (fit.polished) polished++;
      for (let j = 0; j < 3; j++) {
        square[j] = square[j]! + (fit.values[j]! - TRUTH[j]!) ** 2 / fit.covariance[j * 4]! / runs;
      }
    }
    // Derived: mean square of 200 standard normal numbers is 1 +- 0.1
    for (let j = 0; j < 3; j++) expect(Math.abs(square[j]! - 1)).toBeLessThan(0.4);
    // The first search arrives by itself in most of these.
    expect(polished).toBeLessThan(runs / 2);
  });

  test("where the first search does not arrive, the room's own solver finishes and says so", () => {
    const problem = ladder(noisy(5), { covariance: COVARIANCE });
    const full = fitLaw(problem, START);
    const cut = fitLaw(problem, START, { searchIterations: 1 });
    expect(cut.polished).toBe(true);
    expect(cut.stationary).toBe(true);
    // Derived: the same minimum
    expect(cut.chi2 / full.chi2).toBeCloseTo(1, 9);
  });

  test("fixed parameters keep their start and have variance 0", () => {
    const start = Float64Array.from([2.17, 0.08, 0.23]);
    const fit = fitLaw(ladder(noisy(6), { covariance: COVARIANCE }), start, { fixed: [false, false, true] });
    expect(fit.values[2]).toBe(0.23);
    expect(fit.covariance[8]).toBe(0);
    expect(fit.degreesOfFreedom).toBe(8);
    expect(fit.activeBounds[2]).toBe(0);
    const all = fitLaw(ladder(exactData(), { sigmas: SIGMAS }), TRUTH, { fixed: [true, true, true] });
    expect(all.degreesOfFreedom).toBe(N);
    expect([...all.values]).toEqual([...TRUTH]);
  });

  test("an active bound is kept, flagged and agrees with the parameter fixed there", () => {
    const problem = ladder(noisy(7), { covariance: COVARIANCE });
    const upper = Float64Array.from([Infinity, Infinity, 0.2]);
    const bounded = fitLaw(problem, START, { upper });
    const fixed = fitLaw(problem, Float64Array.from([2.17, 0.08, 0.2]), { fixed: [false, false, true] });
    expect(bounded.stationary).toBe(true);
    expect(bounded.values[2]).toBe(0.2);
    expect([...bounded.activeBounds]).toEqual([0, 0, 1]);
    // Derived: the constrained minimum lies on the bound
    expect(bounded.chi2 / fixed.chi2).toBeCloseTo(1, 9);
    expect(bounded.covariance[0]! / fixed.covariance[0]!).toBeCloseTo(1, 5);
  });

  test("as many data as parameters leave no degree of freedom and no p", () => {
    const data = exactData().slice(0, 3);
    const fit = fitLaw(ladder(data, { sigmas: SIGMAS.slice(0, 3) }), START);
    expect(fit.degreesOfFreedom).toBe(0);
    expect(fit.p).toBe(null);
    expect(fit.stationary).toBe(true);
  });

  test("parameters in units far from one change nothing", () => {
    const data = noisy(8);
    const plain = fitLaw(ladder(data, { covariance: COVARIANCE }), START);
    const inner = ladder(
      data.map((v) => v * 1e6),
      { covariance: COVARIANCE.map((v) => v * 1e12) },
    );
    const units = [1e6, 1e-6, 1e3];
    const scaled = fitLaw(
      {
        ...inner,
        model: (v, out) => {
          inner.model(Float64Array.from([v[0]!, (v[1]! / units[1]!) * 1e6, v[2]! / units[2]!]), out);
        },
        jacobian: (v, out) => {
          inner.jacobian(Float64Array.from([v[0]!, (v[1]! / units[1]!) * 1e6, v[2]! / units[2]!]), out);
          for (let i = 0; i < N; i++) {
            out[N + i] = (out[N + i]! / units[1]!) * 1e6;
            out[2 * N + i] = out[2 * N + i]! / units[2]!;
          }
        },
      },
      START.map((v, j) => v * units[j]!),
    );
    for (let j = 0; j < 3; j++) {
      const sigma = Math.sqrt(plain.covariance[j * 4]!);
      // Derived: the same problem in other units
      expect(Math.abs(scaled.values[j]! / units[j]! - plain.values[j]!)).toBeLessThan(1e-4 * sigma);
      expect(Math.sqrt(scaled.covariance[j * 4]!) / units[j]! / sigma).toBeCloseTo(1, 4);
    }
  });

  test("agrees with the general solver on independent data", () => {
    const data = noisy(9);
    const problem = ladder(data, { sigmas: SIGMAS });
    const fit = fitLaw(problem, START);
    const solution = solveGeneral(
      {
        rows: N,
        parameters: 3,
        data,
        weights: SIGMAS.map((s) => 1 / s),
        model: problem.model,
        jacobian: problem.jacobian,
      },
      START,
    );
    // Derived: one problem, two ways
    expect(fit.chi2 / solution.chi2).toBeCloseTo(1, 9);
  });

  test("a covariance that is not positive definite is refused", () => {
    const bad = Float64Array.from(COVARIANCE);
    bad[1] = bad[N] = 2 * SIGMAS[0]! * SIGMAS[1]!;
    expect(() => fitLaw(ladder(exactData(), { covariance: bad }), START)).toThrow("positive definite");
  });
});
