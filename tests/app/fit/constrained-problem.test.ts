import { describe, expect, test } from "vitest";
import {
  ConstrainedProblem,
  fitSpectrum,
  levelLink,
  SpectrumProblem,
  strengthShare,
  widthLink,
  withCorrelatedErrors,
  type ConstraintSpec,
  type FitPoints,
  type LineRules,
  type ModelSpec,
  type Rule,
} from "../../../app/fit/index.ts";
import { makeRandom } from "../../../app/base/index.ts";
import { solveSeparable } from "../../../app/solve/index.ts";

/**
 * Six lines of a series (gap 1, Rydberg energy 0.05, defect 0.1) on a straight background, without a tail, made with a plain
 * loop; widths 2e-5 + 0.012/n^3, areas 0.004/n^3, q = -0.15 + 0.8/n^2 or one q.
 */
const NS = [2, 3, 4, 5, 6, 7];
const GAP = 1;
const RYDBERG = 0.05;
const DEFECT = 0.1;
const energyOf = (n: number, defect = DEFECT): number => GAP - RYDBERG / (n - defect) ** 2;
const widthOf = (n: number): number => 2e-5 + 0.012 / n ** 3;
const areaOf = (n: number): number => 0.004 / n ** 3;
const FREE: Rule = { kind: "free" };

interface Truth {
  readonly q?: (n: number) => number;
  readonly extra?: readonly { n: number; defect: number; area: number }[];
}

function makePoints(truth: Truth, sigma: number, seed: number): FitPoints {
  const random = makeRandom(seed);
  const energy = Float64Array.from({ length: 1500 }, (_, i) => {
    const u = i / 1499;
    return 0.978 + 0.0215 * (1 - (1 - u) ** 1.5);
  });
  const signal = energy.map((e) => {
    let sum = 2 + 20 * (e - 0.99);
    const add = (center: number, width: number, area: number, q: number): void => {
      const x = e - center;
      const g = width / 2;
      sum += ((area / Math.PI) * (g + 2 * q * x)) / (x * x + g * g);
    };
    for (const n of NS) add(energyOf(n), widthOf(n), areaOf(n), truth.q?.(n) ?? -0.15);
    for (const one of truth.extra ?? [])
      add(energyOf(one.n, one.defect), widthOf(one.n), one.area, truth.q?.(one.n) ?? -0.15);
    return sum + sigma * random.normal();
  });
  return { energy, signal, sigma: energy.map(() => sigma || 1e-3) };
}

interface Asked {
  readonly rules?: Partial<Record<keyof LineRules, Readonly<Record<number, Rule>>>>;
  readonly all?: Partial<Record<keyof LineRules, Rule>>;
  readonly asymmetryLaw?: boolean;
  readonly asymmetry?: ModelSpec["asymmetry"];
  readonly from?: "own" | "others";
  readonly extra?: ConstraintSpec["extra"];
  readonly tied?: boolean;
}

function makeModel(points: FitPoints, asked: Asked) {
  const random = makeRandom(5);
  const start = {
    lines: NS.map((n) => ({
      n,
      energy: energyOf(n) + 0.05 * widthOf(n) * random.normal(),
      width: widthOf(n) * (1 + 0.05 * random.normal()),
    })),
    asymmetry: -0.1,
    factor: 1,
    reach: new Map(NS.map((n) => [n, 2 * widthOf(n)])),
  };
  const list = (parameter: keyof LineRules): Rule[] =>
    NS.map((n) => asked.rules?.[parameter]?.[n] ?? asked.all?.[parameter] ?? FREE);
  const rules: LineRules = {
    energy: list("energy"),
    width: list("width"),
    area: list("area"),
    asymmetry: list("asymmetry"),
  };
  const sigma = Float64Array.from(NS, (n) => 0.05 * widthOf(n));
  const without = (rule: readonly Rule[]): boolean[] => rule.map(({ kind }) => kind === "free");
  const levels = levelLink(
    { ns: NS, value: Float64Array.from(start.lines, (l) => l.energy), sigma, include: without(rules.energy) },
    { gap: GAP, rydberg: RYDBERG, defect0: DEFECT, defect2: 0 },
    3,
  );
  const own = asked.from !== "others";
  const widths = widthLink(
    {
      ns: NS,
      value: Float64Array.from(start.lines, (l) => l.width),
      sigma,
      include: own ? NS.map(() => true) : without(rules.width),
    },
    { floor: 1e-5, coefficient: 0.012, exponent: 3, base: "n", floorKind: "lorentzian" },
    { floor: true, exponent: false },
    DEFECT,
  );
  const strength = { law: "cubic", base: "n" } as const;
  const constraints: ConstraintSpec = {
    rules,
    links: {
      levels: levels.values,
      levelLink: levels.link,
      widths: widths.values,
      widthLink: widths.link,
      strengthShare: strengthShare(
        { ns: NS, value: sigma, sigma, include: own ? NS.map(() => true) : without(rules.area) },
        strength,
        DEFECT,
      ),
      strength,
    },
    widthLaw: { from: own ? "own" : "others", floorFree: true, exponentFree: own },
    strengthLaw: own ? "own" : "others",
    asymmetryLaw: asked.asymmetryLaw ?? false,
    extra: asked.extra ?? [],
  };
  const spec: ModelSpec = {
    ns: NS,
    gaussStd: 0,
    asymmetry: asked.asymmetry ?? "shared",
    tiedLevels: asked.tied === true ? { values: levels.values, count: 3, tiedNs: NS } : null,
    tail: null,
    background: [
      { term: "polynomial", name: "legendre0", unit: "1", values: points.energy.map(() => 1) },
      { term: "polynomial", name: "legendre1", unit: "1", values: points.energy.map((e) => e - 0.99) },
    ],
    constraints,
  };
  return { spec, start };
}

const EXTRA: ConstraintSpec["extra"] = [
  {
    name: "F",
    ns: [4, 5],
    defect: 0.35,
    defectHeld: false,
    width: "law",
    ownAsymmetry: true,
    startWidth: new Float64Array(2),
  },
  {
    name: "S",
    ns: [4],
    defect: 0.6,
    defectHeld: true,
    width: "free",
    ownAsymmetry: false,
    startWidth: Float64Array.from([2e-4]),
  },
];

const CASES: readonly (readonly [string, Asked])[] = [
  [
    "an energy held, one bounded, one tied",
    {
      rules: {
        energy: {
          3: { kind: "held", value: energyOf(3) },
          4: { kind: "bounded", low: 0.98, high: 1 },
          6: { kind: "law" },
        },
      },
    },
  ],
  [
    "a width held, one bounded, two shared",
    {
      rules: {
        width: {
          3: { kind: "held", value: 4e-4 },
          4: { kind: "bounded", low: 1e-4, high: 1e-3 },
          5: { kind: "shared", group: 0 },
          6: { kind: "shared", group: 0 },
        },
      },
    },
  ],
  ["a width tied to those of the others", { rules: { width: { 6: { kind: "law" } } }, from: "others" }],
  ["all widths on their law", { all: { width: { kind: "law" } } }],
  [
    "an area held, one bounded, two shared",
    {
      rules: {
        area: {
          3: { kind: "held", value: 1e-4 },
          4: { kind: "bounded", low: 0, high: 1e-4 },
          5: { kind: "shared", group: 1 },
          6: { kind: "shared", group: 1 },
        },
      },
    },
  ],
  [
    "an area tied to those of the others, one of them bounded",
    {
      rules: { area: { 6: { kind: "law" }, 4: { kind: "bounded", low: 0, high: 1e-4 } } },
      from: "others",
    },
  ],
  ["all areas on their law", { all: { area: { kind: "law" } } }],
  [
    "an asymmetry held, one bounded, two shared, beside the common one",
    {
      asymmetry: "each",
      rules: {
        asymmetry: {
          2: { kind: "held", value: 0.1 },
          3: { kind: "bounded", low: -1, high: 1 },
          4: { kind: "shared", group: 0 },
          5: { kind: "shared", group: 0 },
        },
      },
    },
  ],
  [
    "asymmetries free but one",
    { asymmetry: "free", rules: { asymmetry: { 3: { kind: "held", value: 0.1 } } } },
  ],
  ["asymmetries on a smooth law", { asymmetry: "each", asymmetryLaw: true }],
  ["two other series", { extra: EXTRA }],
  ["two other series, levels and widths tied", { extra: EXTRA, tied: true, all: { width: { kind: "law" } } }],
];

describe("derivatives of the constrained model agree with differences for", () => {
  test.each(CASES)("%s", (_, asked) => {
    const points = makePoints({}, 0, 1);
    const { spec, start } = makeModel(points, asked);
    const inner = new SpectrumProblem(points, spec);
    const theta = inner.startFrom(start.lines, start.asymmetry, 1);
    const problem = new ConstrainedProblem(points, inner, spec.constraints!, theta);
    const u = problem.startWith(Float64Array.from({ length: inner.linear }, () => 9e-5));
    const random = makeRandom(8);
    const c = Float64Array.from({ length: problem.linear }, () => 1e-4 * (1 + random.uniform()));
    const m = problem.rows;
    const modelAt = (at: Float64Array): Float64Array => {
      const phi = new Float64Array(m * problem.linear);
      problem.columns(at, phi);
      const out = new Float64Array(m);
      problem.offset(at, out);
      for (let j = 0; j < problem.linear; j++) for (let i = 0; i < m; i++) out[i]! += c[j]! * phi[j * m + i]!;
      return out;
    };
    const out = new Float64Array(m * problem.nonlinear);
    problem.derivatives(u, c, out);
    for (let p = 0; p < problem.nonlinear; p++) {
      const column = out.subarray(p * m, (p + 1) * m);
      const largest = Math.max(...column.map(Math.abs));
      const size = Math.max(...modelAt(u).map(Math.abs));
      // A step that changes the model by a part in ten thousand.
      const step = (1e-4 * size) / largest;
      const at = (k: number): Float64Array =>
        modelAt(u.map((value, i) => (i === p ? value + k * step : value)));
      const [a1, b1, a2, b2] = [at(1), at(-1), at(2), at(-2)];
      let worst = 0;
      for (let i = 0; i < m; i++) {
        const slope = ((2 / 3) * (a1[i]! - b1[i]!) - (1 / 12) * (a2[i]! - b2[i]!)) / step;
        worst = Math.max(worst, Math.abs(slope - column[i]!) / largest);
      }
      // Derived: error of the fourth-order difference for a change of a part in 10^4, and rounding over it.
      expect(worst, `parameter ${p}`).toBeLessThan(1e-6);
    }
  });
});

test("a held parameter has neither variance nor covariance, exactly, in every block", () => {
  const points = makePoints({ q: (n) => (n === 5 ? 0.1 : -0.15) }, 0.02, 3);
  const { spec, start } = makeModel(points, {
    asymmetry: "each",
    rules: {
      energy: { 3: { kind: "held", value: energyOf(3) } },
      width: { 4: { kind: "held", value: widthOf(4) } },
      area: { 6: { kind: "held", value: areaOf(6) } },
      asymmetry: { 5: { kind: "held", value: 0.1 } },
    },
  });
  const { lines, solution } = fitSpectrum(points, spec, start);
  expect(solution.converged).toBe(true);
  const k = NS.length;
  const size = 4 * k;
  for (const i of [0 * k + 1, 1 * k + 2, 2 * k + 4, 3 * k + 3])
    for (let j = 0; j < size; j++) {
      // Derived: what is held is a constant.
      expect(Math.abs(lines.covariance[i * size + j]!)).toBeLessThan(Number.MIN_VALUE);
    }
  for (let j = 0; j < size; j++) {
    const value = [lines.energy, lines.width, lines.area, lines.asymmetry][Math.floor(j / k)]![j % k]!;
    const n = NS[j % k]!;
    const truth = [energyOf(n), widthOf(n), areaOf(n), n === 5 ? 0.1 : -0.15][Math.floor(j / k)]!;
    const sigma = Math.sqrt(lines.covariance[j * size + j]!);
    // Derived: 4.5 standard errors for each of 20 free numbers.
    expect(Math.abs(value - truth)).toBeLessThan(4.5 * sigma + 1e-12);
  }
});

test.each(CASES)("the few condensed rows give the answer of every row for %s", (_, asked) => {
  const points = makePoints({}, 0.02, 6);
  const { spec, start } = makeModel(points, asked);
  const few = fitSpectrum(points, spec, start);
  class Whole extends ConstrainedProblem {
    override condense(): null {
      return null;
    }
  }
  const inner = new SpectrumProblem(points, spec);
  const theta = inner.startFrom(start.lines, start.asymmetry, 1);
  const whole = new Whole(points, inner, spec.constraints!, theta);
  const condensed = new ConstrainedProblem(points, inner, spec.constraints!, theta).condense(whole.start())!;
  // Derived: lines 50 and more points wide leave panels of many points, which their nodes replace.
  expect(condensed.problem.rows).toBeLessThan(0.6 * points.energy.length);
  // Derived: at the answer every row gives the chi square that the few rows and what they lost give together.
  const {
    theta: u,
    chi2,
    coefficients,
  } = solveSeparable(whole, whole.startWith(few.solution.coefficients), {
    ...whole.narrowed(
      new Float64Array(inner.nonlinear).fill(-Infinity),
      new Float64Array(inner.nonlinear).fill(Infinity),
    ),
  });
  expect(Math.abs(few.solution.chi2 / chi2 - 1)).toBeLessThan(1e-9);
  const { problem } = condensed;
  const phi = new Float64Array(problem.rows * problem.linear);
  problem.columns(u, phi);
  const offset = new Float64Array(problem.rows);
  problem.offset!(u, offset);
  let sum = condensed.lost;
  for (let i = 0; i < problem.rows; i++) {
    let model = offset[i]!;
    for (let j = 0; j < problem.linear; j++) model += coefficients[j]! * phi[j * problem.rows + i]!;
    sum += ((problem.data[i]! - model) * problem.weights[i]!) ** 2;
  }
  // Derived: the panels are made so that columns are polynomials on them to 6e-9, and their squares to rounding.
  expect(Math.abs(sum / chi2 - 1)).toBeLessThan(1e-9);
});

test("correlated noise widens the errors of a fit with harmless bounds as it does without", () => {
  const random = makeRandom(11);
  const clean = makePoints({}, 0, 1);
  let last = random.normal();
  const signal = clean.signal.map((value) => {
    last = 0.7 * last + Math.sqrt(0.51) * random.normal();
    return value + 0.02 * last;
  });
  const points: FitPoints = { energy: clean.energy, signal, sigma: clean.energy.map(() => 0.02) };
  const sigmas = (asked: Asked): Float64Array => {
    const { spec, start } = makeModel(points, asked);
    const { lines } = withCorrelatedErrors(fitSpectrum(points, spec, start));
    return Float64Array.from({ length: 3 * NS.length }, (_, i) =>
      Math.sqrt(lines.covariance[i * (4 * NS.length + 1)]!),
    );
  };
  const plain = sigmas({});
  const bounded = sigmas({
    rules: {
      energy: { 3: { kind: "bounded", low: 0.9, high: 1.1 } },
      width: { 5: { kind: "bounded", low: 1e-6, high: 1e-2 } },
      area: { 4: { kind: "bounded", low: -1, high: 1 } },
    },
  });
  plain.forEach((sigma, i) => {
    // Derived: the same model in other parameters, the same covariance by the chain rule; the minimum is found to 1e-6 sigma.
    expect(Math.abs(bounded[i]! / sigma - 1)).toBeLessThan(1e-4);
  });
});
