import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  backgroundColumns,
  levelLink,
  SpectrumProblem,
  strengthShare,
  widthLink,
  type FitPoints,
  type ModelSpec,
  type WidthValues,
} from "../../../app/fit/index.ts";
import { levelEnergy } from "../../../app/laws/index.ts";
import { solveSeparable, type SeparableProblem, type SeparableSolution } from "../../../app/solve/index.ts";
import { makeEngineProblem } from "../../bench/engine-problem.ts";

const EXACT = { gradientTolerance: 1e-9, costTolerance: 1e-13 };

/** The same problem without its few rows. */
function everyRow(problem: SpectrumProblem): SeparableProblem {
  const { rows, nonlinear, linear, data, weights } = problem;
  return {
    rows,
    nonlinear,
    linear,
    data,
    weights,
    columns: problem.columns.bind(problem),
    derivatives: problem.derivatives.bind(problem),
  };
}

function sigmas(solution: SeparableSolution): Float64Array {
  const n = solution.theta.length + solution.coefficients.length;
  return Float64Array.from({ length: n }, (_, i) => Math.sqrt(solution.covariance[i * n + i]!));
}

/** Parameters to `part` of their errors, the covariance to 1e-8 of its diagonal, the rest as the same fit must have it. */
function expectSameAnswer(few: SeparableSolution, every: SeparableSolution, part: number): void {
  expect(few.converged).toBe(true);
  expect(every.converged).toBe(true);
  expect(Math.abs(few.chi2 / every.chi2 - 1)).toBeLessThan(1e-10);
  const sigma = sigmas(every);
  const values = (one: SeparableSolution): number[] => [...one.theta, ...one.coefficients];
  values(few).forEach((value, i) =>
    expect(Math.abs(value - values(every)[i]!), `parameter ${i}`).toBeLessThanOrEqual(part * sigma[i]!),
  );
  const n = sigma.length;
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++)
      expect(Math.abs(few.covariance[i * n + j]! - every.covariance[i * n + j]!)).toBeLessThanOrEqual(
        1e-8 * sigma[i]! * sigma[j]! + part * sigma[i]! * sigma[j]!,
      );
  expect(few.degreesOfFreedom).toBe(every.degreesOfFreedom);
  expect(Array.from(few.activeBounds)).toEqual(Array.from(every.activeBounds));
  expect(few.condition / every.condition).toBeCloseTo(1, 3);
}

describe("a fit that goes its way on condensed rows ends where the one on every row ends", () => {
  test.each([
    ["plain lines", 12, 0, "crowded"],
    ["a ladder of narrowing lines", 10, 0, "ladder"],
    ["a Gaussian instrument", 8, 30e-6, "crowded"],
  ] as const)("%s", (_, lines, std, layout) => {
    const { problem, theta } = makeEngineProblem(lines, 6000, std, layout);
    const rows = problem.condense(theta)!.problem.rows;
    expect(rows).toBeLessThan(0.4 * problem.rows);
    const few = solveSeparable(problem, theta, EXACT);
    const every = solveSeparable(everyRow(problem), theta, EXACT);
    expectSameAnswer(few, every, 1e-6);
    // The gradient that is reported is that of every row.
    const again = solveSeparable(everyRow(problem), few.theta, { ...EXACT, maxIterations: 0 });
    expect(again.reached.gradient).toBeLessThan(1e-7);
    expect(Math.abs(again.chi2 / few.chi2 - 1)).toBeLessThan(1e-12);
    expect(few.fitted.length).toBe(problem.rows);
    few.residuals.forEach((value, i) => expect(Math.abs(value - again.residuals[i]!)).toBeLessThan(1e-7));
  });

  test("from a start far away, so that the rows have to be made anew", () => {
    const { problem, theta } = makeEngineProblem(6, 6000, 0, "crowded");
    const far = theta.map((value, j) => (j < 6 ? value : 2.5 * value));
    expect(problem.condense(far)!.serves(theta.map((value, j) => (j < 6 ? value : 0.8 * value)))).toBe(false);
    expectSameAnswer(
      solveSeparable(problem, far, EXACT),
      solveSeparable(everyRow(problem), far, EXACT),
      1e-6,
    );
  });

  test("with parameters at their bounds", () => {
    const { problem, theta } = makeEngineProblem(6, 6000, 0, "crowded");
    const lower = theta.map((value, j) => (j === 6 ? 1.4 * value : -Infinity));
    const upper = theta.map((value, j) => (j === 2 ? value - 0.1 * theta[8]! : Infinity));
    const options = { ...EXACT, lower, upper };
    const few = solveSeparable(problem, theta, options);
    expect(few.activeBounds[6]).toBe(-1);
    // The residual is large at these bounds, and the gradient is judged beside it.
    expectSameAnswer(few, solveSeparable(everyRow(problem), theta, options), 1e-5);
  });

  test("with tail, band and continuum, whose columns are close to dependent", () => {
    const { problem, theta } = ladderWithTail();
    expect(problem.condense(theta)).not.toBeNull();
    const few = solveSeparable(problem, theta, EXACT);
    expect(few.condition).toBeGreaterThan(1e3);
    expectSameAnswer(few, solveSeparable(everyRow(problem), theta, EXACT), 1e-4);
  });
});

describe("condensed rows", () => {
  test("give chi square, parameters and errors of every row by themselves, for fits that prepare others", () => {
    const { problem, theta } = makeEngineProblem(8, 6000, 0, "crowded");
    const rough = solveSeparable(problem, theta, { ...EXACT, answer: "condensed" });
    const every = solveSeparable(everyRow(problem), theta, EXACT);
    // The nodes hold lines of 300 standard errors to about 1e-7 of their height: what is beyond counts as noise.
    expect(Math.abs(rough.chi2 / every.chi2 - 1)).toBeLessThan(2e-6);
    expect(rough.degreesOfFreedom).toBe(every.degreesOfFreedom);
    const sigma = sigmas(every);
    sigmas(rough).forEach((value, i) => expect(Math.abs(value / sigma[i]! - 1)).toBeLessThan(1e-6));
    rough.theta.forEach((value, i) =>
      expect(Math.abs(value - every.theta[i]!)).toBeLessThan(1e-4 * sigma[i]!),
    );
  });

  test("are not made of few points, nor under a background with a structure of its own", () => {
    const { problem, theta, points, spec } = makeEngineProblem(6, 6000, 0, "crowded");
    expect(makeEngineProblem(6, 400, 0, "crowded").problem.condense(theta)).toBeNull();
    const random = makeRandom(3);
    const rough = points.energy.map(() => random.normal());
    const measured = { term: "measured", name: "measured", unit: "1", values: rough };
    const other = new SpectrumProblem(points, { ...spec, background: [...spec.background, measured] });
    expect(other.condense(theta)).toBeNull();
    expect(problem.condense(theta)).not.toBeNull();
  });
});

test("blocks of rows hold what the whole columns and derivatives hold", () => {
  for (const { problem, theta } of [ladderWithTail(), makeEngineProblem(4, 700, 20e-6, "ladder")]) {
    const { rows: m, nonlinear: p, linear: k } = problem;
    const coefficients = Float64Array.from({ length: k }, (_, j) => 1e-4 * (1 + Math.cos(j)));
    const phi = new Float64Array(m * k);
    const derivatives = new Float64Array(m * p);
    problem.columns(theta, phi);
    problem.derivatives(theta, coefficients, derivatives);
    const write = problem.blocks(theta, coefficients);
    let apart = 0;
    const compare = (part: Float64Array, whole: Float64Array, columns: number, first: number): void => {
      const height = part.length / columns;
      for (let j = 0; j < columns; j++) {
        const column = whole.subarray(j * m, (j + 1) * m);
        const largest = column.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
        for (let i = 0; i < height; i++)
          apart = Math.max(apart, Math.abs(part[j * height + i]! - column[first + i]!) / largest);
      }
    };
    for (const [first, end] of [
      [0, 300],
      [300, 301],
      [301, m],
    ] as const) {
      const partPhi = new Float64Array((end - first) * k).fill(NaN);
      const part = new Float64Array((end - first) * p).fill(NaN);
      write(first, end, partPhi, part);
      compare(partPhi, phi, k, first);
      compare(part, derivatives, p, first);
    }
    // Derived: the pair of a block comes from the loop that makes derivatives too, which rounds differently
    expect(apart).toBeLessThan(1e-14);
  }
});

function ladderWithTail(): { problem: SpectrumProblem; theta: Float64Array } {
  const random = makeRandom(91);
  const m = 5000;
  const levels = { gap: 2.172, rydberg: 0.0912, defect0: 0.21, defect2: 0 };
  const widths: WidthValues = {
    floor: 60e-6,
    coefficient: 0.016,
    exponent: 3,
    base: "n",
    floorKind: "lorentzian",
  };
  const ns = [3, 4, 5, 6, 7, 8];
  const energy = Float64Array.from({ length: m }, (_, i) => 2.15 + (0.023 * i) / m);
  const place = (n: number): number => levelEnergy(n, levels.gap, levels.rydberg, levels.defect0, 0);
  const lines = ns.map((n) => ({ n, energy: place(n), width: widths.floor + widths.coefficient / n ** 3 }));
  const include = ns.map(() => true);
  const sigma = Float64Array.from(lines, (line) => 0.05 * line.width);
  const level = levelLink(
    { ns, value: Float64Array.from(lines, (line) => line.energy), sigma, include },
    levels,
    3,
  );
  const width = widthLink(
    { ns, value: Float64Array.from(lines, (line) => line.width), sigma, include },
    widths,
    { floor: true, exponent: false },
    levels.defect0,
  );
  const strength = { law: "cubic", base: "n" } as const;
  const spec: ModelSpec = {
    ns,
    gaussStd: 0,
    asymmetry: "shared",
    tiedLevels: null,
    tail: {
      fromN: 9,
      toN: 14,
      band: true,
      below: [2],
      levels: level.values,
      levelLink: level.link,
      widths: width.values,
      widthLink: width.link,
      strengthShare: strengthShare({ ns, value: sigma, sigma, include }, strength, levels.defect0),
      strength,
      envelope: "allowed-3d",
      continuumOdd: true,
      factorFree: true,
      factor: 0.9,
    },
    background: backgroundColumns(
      [
        { term: "polynomial", order: 2 },
        { term: "square-root", onset_eV: 2.0464 },
      ],
      energy,
      "1/cm",
      levels.gap,
    ),
  };
  const blank: FitPoints = { energy, signal: new Float64Array(m), sigma: new Float64Array(m).fill(1) };
  const truth = new SpectrumProblem(blank, spec);
  const theta = truth.startFrom(lines, -0.15, 0.9);
  const phi = new Float64Array(m * truth.linear);
  truth.columns(theta, phi);
  const signal = Float64Array.from({ length: m }, () => random.normal());
  for (let j = 0; j < truth.linear; j++) {
    const c = j < ns.length ? 12 / ns[j]! ** 3 : 100 / (j + 1);
    for (let i = 0; i < m; i++) signal[i]! += c * phi[j * m + i]!;
  }
  const start = theta.slice();
  ns.forEach((_, j) => {
    start[truth.layout.energyAt[j]!]! += 0.03 * lines[j]!.width;
    start[truth.layout.widthAt[j]!]! *= 1.05;
  });
  return { problem: new SpectrumProblem({ ...blank, signal }, spec), theta: start };
}
