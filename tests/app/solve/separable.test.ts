import { describe, expect, test } from "vitest";
import { NO_WATCH } from "../../../app/base/index.ts";
import { solveGeneral, solveSeparable } from "../../../app/solve/index.ts";
import type { GeneralProblem, SeparableProblem, SeparableSolution } from "../../../app/solve/index.ts";
import { lineProblem, TWO_LINES } from "./lines.ts";

const START = Float64Array.from([-0.22, 0.2, 0.42, 0.14]);

function sigmas(solution: SeparableSolution): number[] {
  const n = solution.theta.length + solution.coefficients.length;
  return Array.from({ length: n }, (_, i) => Math.sqrt(solution.covariance[i * n + i]!));
}

function all(solution: SeparableSolution): number[] {
  return [...solution.theta, ...solution.coefficients];
}

/** The same problem with every parameter in the nonlinear vector. */
function general(problem: SeparableProblem): GeneralProblem {
  const { rows: m, nonlinear: p, linear: k } = problem;
  const phi = new Float64Array(m * k);
  return {
    rows: m,
    parameters: p + k,
    data: problem.data,
    weights: problem.weights,
    model: (t, out) => {
      problem.columns(t.subarray(0, p), phi);
      for (let i = 0; i < m; i++) {
        out[i] = 0;
        for (let j = 0; j < k; j++) out[i] = out[i]! + t[p + j]! * phi[j * m + i]!;
      }
    },
    jacobian: (t, out) => {
      problem.columns(t.subarray(0, p), phi);
      problem.derivatives(t.subarray(0, p), t.subarray(p), out.subarray(0, m * p));
      out.set(phi, m * p);
    },
  };
}

describe("separable least squares", () => {
  test("returns the generating parameters of data without noise", () => {
    const { problem, theta, c } = lineProblem(400, TWO_LINES, 0, 1);
    const solution = solveSeparable(problem, START);
    expect(solution.converged).toBe(true);
    // Derived: exact data, so the only error is rounding
    solution.theta.forEach((v, j) => expect(v).toBeCloseTo(theta[j]!, 11));
    solution.coefficients.forEach((v, j) => expect(v).toBeCloseTo(c[j]!, 11));
    expect(solution.degreesOfFreedom).toBe(400 - 9);
  });

  test("agrees with the general solver, in values, covariance and chi square", () => {
    const { problem } = lineProblem(400, TWO_LINES, 0.02, 2);
    const tight = { costTolerance: 0, gradientTolerance: 1e-12 };
    const separable = solveSeparable(problem, START, tight);
    const joint = solveGeneral(general(problem), Float64Array.from([...START, 1, 1, 0, 0, 0]), tight);
    expect(separable.converged && joint.converged).toBe(true);
    const s = sigmas(separable);
    // Derived: both minimise the same sum
    all(separable).forEach((v, i) => expect(Math.abs(v - joint.theta[i]!)).toBeLessThan(1e-8 * s[i]!));
    separable.covariance.forEach((v, i) =>
      expect(Math.abs(v - joint.covariance[i]!)).toBeLessThan(1e-7 * s[i % 9]! * s[Math.floor(i / 9)]!),
    );
    expect(separable.chi2 / joint.chi2).toBeCloseTo(1, 12);
  });

  test("normal equations, orthogonal steering and thinned steering end at the same point", () => {
    const { problem } = lineProblem(6000, TWO_LINES, 0.02, 3);
    const reference = solveSeparable(problem, START, { steering: "orthogonal" });
    const s = sigmas(reference);
    for (const options of [
      { steering: "normal" },
      { steering: "auto" },
      { stride: 5 },
      { stride: 40 },
    ] as const) {
      const solution = solveSeparable(problem, START, options);
      expect(solution.converged).toBe(true);
      // Derived: the matrix only steers, the gradient of every row decides
      all(solution).forEach((v, i) => expect(Math.abs(v - all(reference)[i]!)).toBeLessThan(1e-4 * s[i]!));
      sigmas(solution).forEach((v, i) => expect(v / s[i]!).toBeCloseTo(1, 4));
    }
  });

  test("fitted values and residuals belong to the reported parameters", () => {
    const { problem } = lineProblem(300, TWO_LINES, 0.02, 4);
    const weights = Float64Array.from(problem.weights, (w, i) => (i % 3 === 0 ? 0 : w));
    const solution = solveSeparable({ ...problem, weights }, START);
    const phi = new Float64Array(300 * 5);
    problem.columns(solution.theta, phi);
    let chi2 = 0;
    for (let i = 0; i < 300; i++) {
      let model = 0;
      for (let j = 0; j < 5; j++) model += solution.coefficients[j]! * phi[j * 300 + i]!;
      expect(solution.fitted[i]!).toBeCloseTo(model, 13);
      expect(solution.residuals[i]!).toBeCloseTo((problem.data[i]! - model) * weights[i]!, 9);
      chi2 += solution.residuals[i]! ** 2;
    }
    expect(solution.chi2).toBeCloseTo(chi2, 8);
    expect(solution.degreesOfFreedom).toBe(200 - 9);
  });

  test("a row with weight 0 may hold NaN in data, columns and derivatives", () => {
    const { problem } = lineProblem(300, TWO_LINES, 0.02, 5);
    const weights = Float64Array.from(problem.weights, (w, i) => (i < 20 ? 0 : w));
    const spoil = (inner: (out: Float64Array) => void, out: Float64Array): void => {
      inner(out);
      for (let at = 0; at < out.length; at++) if (at % 300 < 20) out[at] = NaN;
    };
    const broken: SeparableProblem = {
      ...problem,
      weights,
      data: problem.data.map((v, i) => (i < 20 ? NaN : v)),
      columns: (t, phi) => spoil((out) => problem.columns(t, out), phi),
      derivatives: (t, c, out) => spoil((inner) => problem.derivatives(t, c, inner), out),
    };
    const clean = solveSeparable({ ...problem, weights }, START);
    const solution = solveSeparable(broken, START);
    expect(solution.converged).toBe(true);
    expect([...solution.theta]).toEqual([...clean.theta]);
    expect(solution.residuals[3]).toBe(0);
  });

  test("neither the order of rows nor the unit of the data or of a parameter changes the answer", () => {
    const { problem, x } = lineProblem(300, TWO_LINES, 0.02, 6);
    const reference = solveSeparable(problem, START);
    const s = sigmas(reference);
    const turn = (out: Float64Array): void => {
      for (let from = 0; from < out.length; from += 300) out.subarray(from, from + 300).reverse();
    };
    const turned = solveSeparable(
      {
        ...problem,
        data: problem.data.slice().reverse(),
        columns: (t, phi) => {
          problem.columns(t, phi);
          turn(phi);
        },
        derivatives: (t, c, out) => {
          problem.derivatives(t, c, out);
          turn(out);
        },
      },
      START,
    );
    const unit = 1e6;
    const scaled = solveSeparable(
      {
        ...problem,
        data: problem.data.map((v) => v * 1e-9),
        weights: problem.weights.map((w) => w * 1e9),
        columns: (t, phi) =>
          problem.columns(
            t.map((v) => v / unit),
            phi,
          ),
        derivatives: (t, c, out) => {
          problem.derivatives(
            t.map((v) => v / unit),
            c,
            out,
          );
          for (let i = 0; i < out.length; i++) out[i] = out[i]! / unit;
        },
      },
      START.map((v) => v * unit),
    );
    expect(x.length).toBe(300);
    for (let j = 0; j < 4; j++) {
      // Derived: the same least-squares problem in other clothes
      expect(Math.abs(turned.theta[j]! - reference.theta[j]!)).toBeLessThan(1e-5 * s[j]!);
      expect(Math.abs(scaled.theta[j]! / unit - reference.theta[j]!)).toBeLessThan(1e-5 * s[j]!);
      expect(Math.sqrt(scaled.covariance[j * 9 + j]!) / unit / s[j]!).toBeCloseTo(1, 6);
    }
    expect(scaled.chi2 / reference.chi2).toBeCloseTo(1, 10);
  });

  test("pulls of seeded synthetic data have width one and chi square its expectation", () => {
    const runs = 300;
    const square = new Float64Array(9);
    const mean = new Float64Array(9);
    let chi2 = 0;
    for (let seed = 0; seed < runs; seed++) {
      const { problem, theta, c } = lineProblem(200, TWO_LINES, 0.03, 1000 + seed);
      const solution = solveSeparable(problem, theta);
      expect(solution.converged).toBe(true);
      const s = sigmas(solution);
      [...theta, ...c].forEach((v, i) => {
        const pull = (all(solution)[i]! - v) / s[i]!;
        square[i] = square[i]! + pull * pull;
        mean[i] = mean[i]! + pull;
      });
      chi2 += solution.chi2;
    }
    for (let i = 0; i < 9; i++) {
      // Derived: the width of 300 standard normal pulls is 1 +- 0.041, their mean 0 +- 0.058; four of each
      expect(Math.abs(Math.sqrt(square[i]! / runs) - 1)).toBeLessThan(0.165);
      expect(Math.abs(mean[i]! / runs)).toBeLessThan(0.235);
    }
    // Derived: mean of 300 chi squares of 191 degrees of freedom, 191 +- sqrt(2 191/300)
    expect(Math.abs(chi2 / runs - 191)).toBeLessThan(4 * Math.sqrt((2 * 191) / runs));
  });

  test("a model without nonlinear parameters is solved at once", () => {
    const m = 50;
    const solution = solveSeparable(
      {
        rows: m,
        nonlinear: 0,
        linear: 2,
        data: Float64Array.from({ length: m }, (_, i) => 3 - 2 * i),
        weights: new Float64Array(m).fill(1),
        columns: (_t, phi) => {
          for (let i = 0; i < m; i++) {
            phi[i] = 1;
            phi[m + i] = i;
          }
        },
        derivatives: () => undefined,
      },
      new Float64Array(0),
    );
    expect(solution.termination).toBe("gradient");
    // Derived: the data are exactly 3 - 2 i
    expect(solution.coefficients[0]!).toBeCloseTo(3, 12);
    expect(solution.coefficients[1]!).toBeCloseTo(-2, 12);
  });
});

describe("bounds", () => {
  const { problem } = lineProblem(300, TWO_LINES, 0.02, 7);

  test("an active bound is the constrained minimum, flagged, with its parameter taken out of the covariance", () => {
    const lower = Float64Array.from([-Infinity, 0.01, -Infinity, 0.01]);
    const upper = Float64Array.from([Infinity, 0.1, Infinity, Infinity]);
    const solution = solveSeparable(problem, Float64Array.from([-0.25, 0.05, 0.4, 0.1]), { lower, upper });
    // The same fit with the width simply not a parameter.
    const held = solveSeparable(
      {
        ...problem,
        nonlinear: 3,
        columns: (t, phi) => problem.columns(Float64Array.from([t[0]!, 0.1, t[1]!, t[2]!]), phi),
        derivatives: (t, c, out) => {
          const four = new Float64Array(300 * 4);
          problem.derivatives(Float64Array.from([t[0]!, 0.1, t[1]!, t[2]!]), c, four);
          out.set(four.subarray(0, 300));
          out.set(four.subarray(600), 300);
        },
      },
      Float64Array.from([-0.25, 0.4, 0.1]),
    );
    expect(solution.converged).toBe(true);
    expect([...solution.activeBounds]).toEqual([0, 1, 0, 0]);
    expect(solution.theta[1]).toBe(0.1);
    expect(solution.chi2 / held.chi2).toBeCloseTo(1, 10);
    expect(solution.degreesOfFreedom).toBe(held.degreesOfFreedom);
    expect(solution.covariance[1 * 9 + 1]).toBe(0);
    expect(solution.covariance[0]! / held.covariance[0]!).toBeCloseTo(1, 6);
  });

  test("a bound that is met on the way but not wanted is left again", () => {
    const lower = Float64Array.from([-0.6, 0.02, 0.0, 0.02]);
    const upper = Float64Array.from([-0.2, 0.3, 0.45, 0.3]);
    const free = solveSeparable(problem, START);
    const solution = solveSeparable(problem, Float64Array.from([-0.2, 0.3, 0.45, 0.3]), { lower, upper });
    expect(solution.converged).toBe(true);
    expect([...solution.activeBounds]).toEqual([0, 0, 0, 0]);
    expect(solution.chi2 / free.chi2).toBeCloseTo(1, 10);
  });

  test("a start outside the bounds is moved onto them, equal bounds hold a parameter", () => {
    const lower = Float64Array.from([-Infinity, 0.15, -Infinity, -Infinity]);
    const upper = Float64Array.from([Infinity, 0.15, Infinity, Infinity]);
    const solution = solveSeparable(problem, START, { lower, upper });
    expect(solution.converged).toBe(true);
    expect(solution.theta[1]).toBe(0.15);
    expect(solution.activeBounds[1]).toBe(-1);
  });

  test("several bounds in a linear problem give the minimum that a search over all active sets gives", () => {
    // min |y - A t|, 0 <= t <= 1: worked out by trying all 3^4 sets of held parameters.
    const m = 12;
    const a = (i: number, j: number): number =>
      Math.cos((i + 1) * (j + 1) * 0.7) + 0.8 * Math.sin(i + 0.3 * j);
    const data = Float64Array.from({ length: m }, (_, i) => Math.sin(3 * i) * 2 + 0.5);
    const linear: GeneralProblem = {
      rows: m,
      parameters: 4,
      data,
      weights: new Float64Array(m).fill(1),
      model: (t, out) => {
        for (let i = 0; i < m; i++)
          out[i] = a(i, 0) * t[0]! + a(i, 1) * t[1]! + a(i, 2) * t[2]! + a(i, 3) * t[3]!;
      },
      jacobian: (_t, out) => {
        for (let j = 0; j < 4; j++) for (let i = 0; i < m; i++) out[j * m + i] = a(i, j);
      },
    };
    const box = { lower: new Float64Array(4), upper: new Float64Array(4).fill(1) };
    let best = Infinity;
    for (let set = 0; set < 81; set++) {
      const state = [0, 1, 2, 3].map((j) => Math.floor(set / 3 ** j) % 3);
      const lower = Float64Array.from(state, (s) => (s === 0 ? 0 : s === 1 ? 1 : -Infinity));
      const upper = Float64Array.from(state, (s) => (s === 0 ? 0 : s === 1 ? 1 : Infinity));
      const trial = solveGeneral(linear, new Float64Array(4).fill(0.5), { lower, upper });
      if (trial.theta.every((v) => v >= -1e-12 && v <= 1 + 1e-12)) best = Math.min(best, trial.chi2);
    }
    const solution = solveGeneral(linear, new Float64Array(4).fill(0.5), box);
    expect(solution.converged).toBe(true);
    expect(solution.activeBounds.some((b) => b !== 0)).toBe(true);
    expect(solution.chi2 / best).toBeCloseTo(1, 10);
  });
});

describe("trouble", () => {
  const { problem } = lineProblem(300, TWO_LINES, 0.02, 8);

  test("a start with centres a width off and widths twice too large still arrives", () => {
    const near = solveSeparable(problem, START);
    const far = solveSeparable(problem, Float64Array.from([-0.4, 0.25, 0.45, 0.2]));
    expect(far.converged).toBe(true);
    expect(far.chi2 / near.chi2).toBeCloseTo(1, 9);
  });

  test("lines that run into one another end soon, and a verdict of convergence is true of the values reached", () => {
    // From these starts the lines merge or leave the window: other minima, or none.
    for (const start of [
      [-0.5, 0.25, 0.5, 0.2],
      [-0.6, 0.4, 0.5, 0.4],
      [-0.15, 0.3, 0.5, 0.02],
      [-0.5, 0.2, 0.2, 0.2],
    ]) {
      const solution = solveSeparable(problem, Float64Array.from(start));
      expect(solution.evaluations).toBeLessThan(400);
      const { reached, tolerances, termination } = solution;
      if (termination === "cost") expect(reached.cost).toBeLessThan(1e-11);
      if (termination === "step") expect(reached.step).toBeLessThanOrEqual(tolerances.step);
      if (termination === "gradient") expect(reached.gradient).toBeLessThanOrEqual(tolerances.gradient);
    }
  });

  test("a column given twice lowers the rank and flags just its coefficients", () => {
    const twice: SeparableProblem = {
      ...problem,
      linear: 6,
      columns: (t, phi) => {
        problem.columns(t, phi.subarray(0, 1500));
        phi.copyWithin(1500, 600, 900);
      },
    };
    const clean = solveSeparable(problem, START);
    const solution = solveSeparable(twice, START);
    expect(solution.converged).toBe(true);
    expect(solution.rank).toBe(9);
    expect(solution.condition).toBe(Infinity);
    expect([...solution.undetermined]).toEqual([0, 0, 0, 0, 0, 0, 1, 0, 0, 1]);
    expect(Number.isNaN(solution.covariance[6 * 10 + 6]!)).toBe(true);
    expect(solution.covariance[0]! / clean.covariance[0]!).toBeCloseTo(1, 6);
    expect(solution.chi2 / clean.chi2).toBeCloseTo(1, 10);
  });

  test("a parameter without influence is undetermined and stops nothing", () => {
    const idle: SeparableProblem = {
      ...problem,
      nonlinear: 5,
      columns: (t, phi) => problem.columns(t.subarray(0, 4), phi),
      derivatives: (t, c, out) => {
        problem.derivatives(t.subarray(0, 4), c, out.subarray(0, 1200));
        out.fill(0, 1200);
      },
    };
    for (const steering of ["auto", "normal"] as const) {
      const solution = solveSeparable(idle, Float64Array.from([...START, 7]), { steering });
      expect(solution.converged).toBe(true);
      expect(solution.theta[4]).toBe(7);
      expect(solution.undetermined[4]).toBe(1);
      expect(solution.rank).toBe(9);
    }
  });

  test("a model that is not finite at the start says so; on the way it is only a refused step", () => {
    const nan = solveSeparable({ ...problem, columns: (_t, phi) => void phi.fill(NaN) }, START);
    expect(nan.termination).toBe("notFinite");
    expect(nan.converged).toBe(false);
    let refused = 0;
    const fragile: SeparableProblem = {
      ...problem,
      columns: (t, phi) => {
        problem.columns(t, phi);
        if (t[1]! > 0.25) {
          refused++;
          phi.fill(NaN);
        }
      },
    };
    const solution = solveSeparable(fragile, Float64Array.from([-0.21, 0.205, 0.42, 0.14]));
    expect(solution.converged).toBe(true);
    expect(refused).toBeGreaterThan(0);
    expect(solution.chi2 / solveSeparable(problem, START).chi2).toBeCloseTo(1, 9);
  });

  test("derivatives that are not finite end the fit as notFinite, with the best point so far", () => {
    const solution = solveSeparable({ ...problem, derivatives: (_t, _c, out) => void out.fill(NaN) }, START);
    expect(solution.termination).toBe("notFinite");
    expect(Number.isFinite(solution.chi2)).toBe(true);
    expect(solution.covariance.every(Number.isNaN)).toBe(true);
  });

  test("a watch can cancel between trials and hears of iterations", () => {
    let asked = 0;
    const told: number[] = [];
    const watch = { ...NO_WATCH, cancelled: () => ++asked > 5, report: (f: number) => void told.push(f) };
    const solution = solveSeparable(problem, START, { watch });
    expect(solution.termination).toBe("cancelled");
    expect(solution.converged).toBe(false);
    expect(told.length).toBeGreaterThan(0);
  });

  test("running out of iterations is not convergence", () => {
    const solution = solveSeparable(problem, START, { maxIterations: 2 });
    expect(solution.termination).toBe("iterationLimit");
    expect(solution.converged).toBe(false);
    expect(solution.iterations).toBe(2);
  });

  test("derivatives of the wrong sign never end in convergence", () => {
    const solution = solveSeparable(
      {
        ...problem,
        derivatives: (t, c, out) => {
          problem.derivatives(t, c, out);
          for (let i = 0; i < out.length; i++) out[i] = -out[i]!;
        },
      },
      START,
    );
    expect(solution.converged).toBe(false);
    expect(solution.termination).toBe("iterationLimit");
  });

  test("a parameter that ran off to where it has no influence is not called converged", () => {
    // Exponential saturation from a start where the rate is so large that every datum is at the ceiling.
    const x = [1, 2, 3, 5, 7, 10];
    const solution = solveGeneral(
      {
        rows: 6,
        parameters: 2,
        data: Float64Array.from([109, 149, 149, 191, 213, 224]),
        weights: new Float64Array(6).fill(1),
        model: (t, out) => x.forEach((v, i) => (out[i] = -t[0]! * Math.expm1(-t[1]! * v))),
        jacobian: (t, out) =>
          x.forEach((v, i) => {
            out[i] = -Math.expm1(-t[1]! * v);
            out[6 + i] = t[0]! * v * Math.exp(-t[1]! * v);
          }),
      },
      Float64Array.from([172.5, 111]),
    );
    expect(solution.converged).toBe(false);
  });

  test("the reported distance to the minimum is in standard errors", () => {
    const solution = solveSeparable(problem, START);
    const s = sigmas(solution);
    const moved = solution.theta.map((v, j) => (j === 0 ? v + 0.01 * s[0]! : v));
    const shifted = solveSeparable(problem, moved, { maxIterations: 0 });
    // Derived: one hundredth of a standard error in one parameter, the others free: chi square rises by between
    // 1e-4 (the others follow) and 1e-4/(1 - r^2), r its multiple correlation with them
    expect(shifted.remaining).toBeGreaterThan(0.0099);
    expect(shifted.remaining).toBeLessThan(0.05);
    expect(solution.remaining).toBeLessThan(1e-4);
  });
});
