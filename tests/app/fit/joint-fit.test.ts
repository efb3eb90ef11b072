import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  fitJointly,
  fitSpectrum,
  jointCovariance,
  levelLink,
  parameterBounds,
  SpectrumProblem,
  strengthShare,
  widthLink,
  withCorrelatedJoint,
  type JointMember,
  type ModelSpec,
} from "../../../app/fit/index.ts";
import { levelEnergy } from "../../../app/laws/index.ts";
import {
  autocorrelation,
  correlationTime,
  solveSeparable,
  type SeparableProblem,
} from "../../../app/solve/index.ts";

const LEVELS = { gap: 2.172, rydberg: 0.0912, defect0: 0.21, defect2: 0 };
const NS = [3, 4, 5, 6, 7, 8];
const TIED = [4, 5, 6, 7, 8];
const EXACT = { gradientTolerance: 1e-11, costTolerance: 1e-15 };

/** One spectrum at this bleaching (0: none), on a grid of its own; the higher lines bleach first. */
function member(bleaching: number, seed: number): JointMember {
  const random = makeRandom(seed);
  const m = 300 + 7 * seed;
  const energy = Float64Array.from(
    { length: m },
    (_, i) => 2.155 + (0.0185 * (i + 0.3 * random.uniform())) / m,
  );
  const widths = {
    floor: 60e-6,
    coefficient: 0.016 * (1 + 0.2 * bleaching),
    exponent: 3,
    base: "n" as const,
    floorKind: "lorentzian" as const,
  };
  const lines = NS.map((n) => ({
    n,
    energy: levelEnergy(n, LEVELS.gap, LEVELS.rydberg, LEVELS.defect0, 0) - (n === 3 ? 4e-4 : 0),
    width: widths.floor + widths.coefficient / n ** 3,
  }));
  const include = NS.map((n) => TIED.includes(n));
  const sigma = Float64Array.from(lines, (line) => 0.1 * line.width);
  const level = levelLink(
    { ns: NS, value: Float64Array.from(lines, (line) => line.energy), sigma, include },
    LEVELS,
    3,
  );
  const width = widthLink(
    { ns: NS, value: Float64Array.from(lines, (line) => line.width), sigma, include },
    widths,
    { floor: true, exponent: false },
    LEVELS.defect0,
  );
  const spec: ModelSpec = {
    ns: NS,
    gaussStd: 0,
    asymmetry: "shared",
    tiedLevels: { values: LEVELS, count: 3, tiedNs: TIED },
    tail: {
      fromN: 9,
      toN: 12,
      band: true,
      below: [],
      levels: LEVELS,
      levelLink: level.link,
      widths: width.values,
      widthLink: width.link,
      strengthShare: strengthShare(
        { ns: NS, value: sigma, sigma, include },
        { law: "cubic", base: "n" },
        LEVELS.defect0,
      ),
      strength: { law: "cubic", base: "n" },
      envelope: "allowed-3d",
      continuumOdd: true,
      factorFree: true,
      factor: 0.9,
    },
    background: [
      { term: "polynomial", name: "legendre0", unit: "1/cm", values: energy.map(() => 1) },
      { term: "polynomial", name: "legendre1", unit: "1/cm", values: energy.map((e) => (e - 2.164) / 0.01) },
    ],
  };
  const noise = 0.4;
  const blank = { energy, signal: energy.map(() => 0), sigma: energy.map(() => noise) };
  const problem = new SpectrumProblem(blank, spec);
  const theta = problem.startFrom(lines, -0.15, 0.9);
  const phi = new Float64Array(m * problem.linear);
  problem.columns(theta, phi);
  const c = [...NS.map((n) => 12 / n ** 3 / (1 + bleaching * (n / 8) ** 3)), 60, 3];
  const signal = energy.map((_, i) =>
    c.reduce((sum, one, j) => sum + one * phi[j * m + i]!, noise * random.normal()),
  );
  const reach = new Map(lines.map((line) => [line.n, 0.3 * line.width]));
  return {
    points: { ...blank, signal },
    spec,
    start: {
      lines: lines.map((line) => ({ ...line, width: line.width * 1.1 })),
      asymmetry: 0,
      factor: 0.8,
      reach,
    },
  };
}

const MEMBERS = [member(0, 1), member(0.5, 2), member(2, 3)];

/** All spectra as one dense problem; `at[a]` says where each parameter of spectrum a stands in the long theta. */
function stack(problems: readonly SpectrumProblem[], at: readonly (readonly number[])[]): SeparableProblem {
  const rows = problems.reduce((sum, problem) => sum + problem.rows, 0);
  const linear = problems.reduce((sum, problem) => sum + problem.linear, 0);
  const before = (a: number, of: "rows" | "linear"): number =>
    problems.slice(0, a).reduce((sum, problem) => sum + problem[of], 0);
  const put = (
    small: Float64Array,
    count: number,
    a: number,
    column: (j: number) => number,
    out: Float64Array,
  ): void => {
    const m = problems[a]!.rows;
    for (let j = 0; j < count; j++)
      out.set(small.subarray(j * m, (j + 1) * m), column(j) * rows + before(a, "rows"));
  };
  const local = (theta: Float64Array, a: number): Float64Array =>
    Float64Array.from(at[a]!, (place) => theta[place]!);
  return {
    rows,
    linear,
    nonlinear: Math.max(...at.flat()) + 1,
    data: Float64Array.from(problems.flatMap((problem) => [...problem.data])),
    weights: Float64Array.from(problems.flatMap((problem) => [...problem.weights])),
    columns: (theta, phi) => {
      phi.fill(0);
      problems.forEach((problem, a) => {
        const small = new Float64Array(problem.rows * problem.linear);
        problem.columns(local(theta, a), small);
        put(small, problem.linear, a, (j) => before(a, "linear") + j, phi);
      });
    },
    derivatives: (theta, c, out) => {
      out.fill(0);
      problems.forEach((problem, a) => {
        const small = new Float64Array(problem.rows * problem.nonlinear);
        const from = before(a, "linear");
        problem.derivatives(local(theta, a), c.subarray(from, from + problem.linear), small);
        put(small, problem.nonlinear, a, (j) => at[a]![j]!, out);
      });
    },
  };
}

describe("several spectra in one fit", () => {
  const joint = fitJointly(MEMBERS, { gap: false, rydberg: false, defect: false }, EXACT);
  const problems = MEMBERS.map(({ points, spec }) => new SpectrumProblem(points, spec));
  // Shared first: the law, then the asymmetry; then each spectrum's own.
  let next = 4;
  const at = problems.map(({ layout }) =>
    Array.from({ length: layout.count }, (_, j) => (j < 3 ? j : j === layout.asymmetryAt ? 3 : next++)),
  );
  const dense = stack(problems, at);
  const lower = new Float64Array(next).fill(-Infinity);
  const upper = new Float64Array(next).fill(Infinity);
  const start = new Float64Array(next);
  problems.forEach((problem, a) => {
    const one = MEMBERS[a]!.start;
    const theta = problem.startFrom(one.lines, one.asymmetry, one.factor);
    const bounds = parameterBounds(problem, one, theta);
    at[a]!.forEach((place, j) => {
      start[place] = theta[j]!;
      lower[place] = bounds.lower[j]!;
      upper[place] = bounds.upper[j]!;
    });
  });
  const whole = solveSeparable(dense, start, { lower, upper, ...EXACT });
  const size = dense.nonlinear + dense.linear;
  const sigma = (i: number): number => Math.sqrt(whole.covariance[i * size + i]!);

  it("is the one dense fit of all their points: values, errors, degrees of freedom", () => {
    expect(joint.solution.converged).toBe(true);
    expect(whole.converged).toBe(true);
    expect(joint.names).toEqual(["gap", "rydberg", "defect0", "asymmetry"]);
    // Derived: the same sum of squares.
    expect(Math.abs(joint.solution.chi2 / whole.chi2 - 1)).toBeLessThan(1e-11);
    // Derived: the same rank.
    expect(joint.solution.degreesOfFreedom).toBe(whole.degreesOfFreedom);
    joint.fits.forEach(({ solution }, a) => {
      solution.theta.forEach((value, j) => {
        const place = at[a]![j]!;
        // Derived: the same minimum, in units of the standard error.
        expect(Math.abs(value - whole.theta[place]!)).toBeLessThan(1e-7 * sigma(place));
      });
    });
    for (let g = 0; g < 4; g++)
      for (let h = 0; h < 4; h++) {
        const difference = joint.solution.sharedCovariance[g * 4 + h]! - whole.covariance[g * size + h]!;
        // Derived: the inverse of the same normal matrix.
        expect(Math.abs(difference) / (sigma(g) * sigma(h))).toBeLessThan(1e-8);
      }
  });

  it("has the covariance of areas and widths between powers, through what they share", () => {
    const k = NS.length;
    for (const [a, b] of [
      [0, 0],
      [0, 2],
      [2, 1],
    ] as const) {
      const block = jointCovariance(joint, a, b);
      const before = (one: number): number =>
        problems.slice(0, one).reduce((sum, problem) => sum + problem.linear, 0);
      for (let i = 0; i < k; i++)
        for (let j = 0; j < k; j++) {
          const area = dense.nonlinear + before(a) + i;
          const other = dense.nonlinear + before(b) + j;
          const width = at[b]![problems[b]!.layout.widthAt[j]!]!;
          const close = (found: number, row: number, column: number): void => {
            const difference = found - whole.covariance[row * size + column]!;
            // Derived: the inverse of the same normal matrix.
            expect(Math.abs(difference) / (sigma(row) * sigma(column))).toBeLessThan(1e-8);
          };
          close(block[(2 * k + i) * 4 * k + 2 * k + j]!, area, other);
          close(block[(2 * k + i) * 4 * k + k + j]!, area, width);
        }
    }
  });

  it("has the errors of the dense fit under noise that neighbours share, each spectrum its own", () => {
    const allowed = [true, false, true];
    const wider = withCorrelatedJoint(joint, allowed);
    const rows = dense.rows;
    const jacobian = new Float64Array(size * rows);
    dense.columns(whole.theta, jacobian.subarray(dense.nonlinear * rows));
    dense.derivatives(whole.theta, whole.coefficients, jacobian.subarray(0, dense.nonlinear * rows));
    for (let i = 0; i < jacobian.length; i++) jacobian[i] = jacobian[i]! * dense.weights[i % rows]!;
    // S J, spectrum by spectrum.
    const filtered = new Float64Array(size * rows);
    let top = 0;
    joint.fits.forEach(({ problem, solution }, a) => {
      const { residuals, chi2, degreesOfFreedom } = solution;
      const { lags } = correlationTime(residuals);
      const rho = autocorrelation(residuals, lags);
      for (let j = 0; j < size; j++)
        for (let r = 0; r < problem.rows; r++) {
          let sum = 0;
          for (let s = 0; s < problem.rows; s++) {
            const lag = Math.abs(r - s);
            const share = lag > lags ? 0 : (1 - lag / (lags + 1)) * rho[lag]!;
            const weight = allowed[a]! ? (chi2 / degreesOfFreedom) * share : Number(lag === 0);
            if (weight !== 0) sum += weight * jacobian[j * rows + top + s]!;
          }
          filtered[j * rows + top + r] = sum;
        }
      top += problem.rows;
    });
    // Columns C J' and C J' S J C of single parameters.
    const influence = (i: number): Float64Array =>
      Float64Array.from({ length: rows }, (_, r) => {
        let sum = 0;
        for (let j = 0; j < size; j++) sum += whole.covariance[i * size + j]! * jacobian[j * rows + r]!;
        return sum;
      });
    const smoothed = (i: number): Float64Array =>
      Float64Array.from({ length: rows }, (_, r) => {
        let sum = 0;
        for (let j = 0; j < size; j++) sum += whole.covariance[i * size + j]! * filtered[j * rows + r]!;
        return sum;
      });
    const expected = (i: number, j: number): number => {
      const right = smoothed(j);
      return influence(i).reduce((sum, one, r) => sum + one * right[r]!, 0);
    };
    const near = (found: number, i: number, j: number): void => {
      const error = Math.sqrt(expected(i, i) * expected(j, j));
      // Derived: the same sandwich, eliminated in blocks; the two fits stand 1e-7 standard errors apart.
      expect(Math.abs(found - expected(i, j)) / error).toBeLessThan(1e-5);
    };
    for (let g = 0; g < 4; g++) near(wider.solution.sharedCovariance[g * 4 + 1]!, g, 1);
    const k = NS.length;
    const areaAt = (a: number, j: number): number =>
      dense.nonlinear + problems.slice(0, a).reduce((sum, problem) => sum + problem.linear, 0) + j;
    for (const [a, b] of [
      [0, 0],
      [1, 1],
      [0, 1],
      [2, 0],
    ] as const) {
      const block = jointCovariance(wider, a, b);
      for (const [i, j] of [
        [1, 1],
        [5, 4],
      ] as const) {
        const width = at[b]![problems[b]!.layout.widthAt[j]!]!;
        near(block[(2 * k + i) * 4 * k + 2 * k + j]!, areaAt(a, i), areaAt(b, j));
        near(block[(2 * k + i) * 4 * k + k + j]!, areaAt(a, i), width);
      }
    }
    expect(withCorrelatedJoint(joint, [false, false, false])).toBe(joint);
  });

  it("is the tied fit of one spectrum where there is one alone", () => {
    const [first] = MEMBERS;
    const alone = fitJointly([first!], { gap: false, rydberg: false, defect: false }, EXACT);
    const tied = fitSpectrum(first!.points, first!.spec, first!.start, EXACT);
    const p = tied.solution.theta.length + tied.solution.coefficients.length;
    alone.fits[0]!.solution.theta.forEach((value, j) => {
      const error = Math.sqrt(tied.solution.covariance[j * p + j]!);
      // Derived: the same problem.
      expect(Math.abs(value - tied.solution.theta[j]!)).toBeLessThanOrEqual(1e-7 * error);
      // Derived: the same normal matrix.
      expect(Math.sqrt(alone.fits[0]!.solution.covariance[j * p + j]!)).toBeCloseTo(error, 8);
    });
  });

  it("gives every spectrum its own gap where that is asked for, and finds the same one within errors", () => {
    const freed = fitJointly(MEMBERS, { gap: true, rydberg: false, defect: false });
    expect(freed.names).toEqual(["rydberg", "defect0", "asymmetry"]);
    expect(freed.solution.converged).toBe(true);
    freed.fits.forEach(({ solution }) => {
      const p = solution.theta.length + solution.coefficients.length;
      expect(solution.covariance[0]).toBeGreaterThan(0);
      // Derived: made with one gap; four standard errors.
      expect(Math.abs(solution.theta[0]! - LEVELS.gap)).toBeLessThan(4 * Math.sqrt(solution.covariance[0]!));
      expect(p).toBe(problems[0]!.nonlinear + problems[0]!.linear);
    });
  });

  it("holds a width where it is told to, without calling the line one at a bound", () => {
    const held = fitJointly(
      MEMBERS.map((one, a) => (a === 2 ? { ...one, heldWidths: [8] } : one)),
      { gap: false, rydberg: false, defect: false },
    );
    const last = held.fits[2]!;
    const j = NS.indexOf(8);
    expect(last.lines.width[j]).toBe(MEMBERS[2]!.start.lines[j]!.width);
    expect(last.lines.covariance[(NS.length + j) * 4 * NS.length + NS.length + j]).toBe(0);
    expect(last.atBound).toEqual([]);
    expect(last.lines.covariance[(2 * NS.length + j) * 4 * NS.length + 2 * NS.length + j]).toBeGreaterThan(0);
  });
});
