import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  levelLink,
  SpectrumProblem,
  strengthShare,
  widthLink,
  type FitPoints,
  type LevelValues,
  type ModelSpec,
  type TailSpec,
  type WidthValues,
} from "../../../app/fit/index.ts";
import { levelEnergy } from "../../../app/laws/index.ts";
import { derivative } from "../lines/differences.ts";

const LEVELS: LevelValues = { gap: 2.172, rydberg: 0.0912, defect0: 0.21, defect2: 0 };
const WIDTHS: WidthValues = {
  floor: 60e-6,
  coefficient: 0.016,
  exponent: 3,
  base: "n",
  floorKind: "lorentzian",
};

interface Case {
  readonly title: string;
  readonly ns?: readonly number[];
  readonly asymmetry?: ModelSpec["asymmetry"];
  readonly gaussStd?: number;
  /** null: levels free; else free law parameters and the lines on the law. */
  readonly tied?: { readonly count: number; readonly ns: readonly number[] };
  readonly tail?: boolean;
  readonly factorFree?: boolean;
  readonly continuumOdd?: boolean;
  readonly below?: readonly number[];
  readonly levelCount?: number;
  readonly defect2?: number;
  readonly widths?: Partial<WidthValues>;
  readonly widthFree?: { readonly floor: boolean; readonly exponent: boolean };
  readonly strength?: TailSpec["strength"];
  readonly envelope?: TailSpec["envelope"];
}

const CASES: readonly Case[] = [
  { title: "free levels, shared asymmetry, no tail", tail: false },
  { title: "free levels, free asymmetry, no tail", tail: false, asymmetry: "free" },
  { title: "free levels, no asymmetry, no tail", tail: false, asymmetry: "zero" },
  { title: "a Gaussian instrument, no tail", tail: false, gaussStd: 80e-6 },
  { title: "tied levels, no tail", tail: false, tied: { count: 3, ns: [5, 6, 7, 8] } },
  { title: "free levels with the tail" },
  { title: "the tail with two law parameters", levelCount: 2 },
  { title: "the tail with a Ritz term", levelCount: 4, defect2: 0.05 },
  { title: "tied levels with the tail", tied: { count: 3, ns: [4, 5, 6, 7, 8] } },
  { title: "tied levels with the defect held", tied: { count: 2, ns: [4, 5, 6, 7, 8] } },
  { title: "tied levels with a Ritz term", tied: { count: 4, ns: [4, 5, 6, 7, 8] }, defect2: 0.05 },
  { title: "every line tied", tied: { count: 3, ns: [3, 4, 5, 6, 7, 8] } },
  { title: "the tail without asymmetry", asymmetry: "zero" },
  { title: "the tail under free asymmetries", asymmetry: "free" },
  { title: "the tail with its factor held", factorFree: false },
  { title: "a continuum without odd part", continuumOdd: false },
  { title: "the tail under a Gaussian instrument", gaussStd: 70e-6 },
  { title: "lines below the window", ns: [5, 6, 7, 8, 9], below: [2, 3, 4] },
  {
    title: "lines below the window, tied levels",
    ns: [5, 6, 7, 8, 9],
    below: [2, 3, 4],
    tied: { count: 3, ns: [5, 6, 7, 8, 9] },
  },
  { title: "a missing line", ns: [3, 4, 6, 7, 8, 9] },
  { title: "widths with a free exponent", widthFree: { floor: true, exponent: true } },
  { title: "widths without a floor", widths: { floor: 0 }, widthFree: { floor: false, exponent: true } },
  { title: "widths on n - delta", widths: { base: "n-delta" } },
  {
    title: "widths on the p envelope",
    widths: { base: "p-envelope" },
    widthFree: { floor: true, exponent: true },
  },
  { title: "widths with a Gaussian floor", widths: { floorKind: "gaussian", floor: 90e-6 } },
  {
    title: "widths on n - delta with a Gaussian floor and a free exponent",
    widths: { base: "n-delta", floorKind: "gaussian", floor: 90e-6 },
    widthFree: { floor: true, exponent: true },
  },
  {
    title: "the p envelope of strengths",
    strength: { law: "p-envelope", base: "n" },
    envelope: "forbidden-3d",
  },
  { title: "strengths on n - delta", strength: { law: "cubic", base: "n-delta" } },
  { title: "a sheet", strength: { law: "sheet", base: "n" }, envelope: "allowed-2d" },
];

function makeProblem(
  one: Case,
  seed: number,
): { problem: SpectrumProblem; theta: Float64Array; c: Float64Array } {
  const random = makeRandom(seed);
  const ns = one.ns ?? [3, 4, 5, 6, 7, 8];
  const energy = Float64Array.from(
    { length: 260 },
    (_, i) => 2.155 + (0.0185 * (i + 0.3 * random.uniform())) / 260,
  );
  const points: FitPoints = {
    energy,
    signal: energy.map(() => 100 + random.normal()),
    sigma: energy.map(() => 0.5 + random.uniform()),
  };
  const levels = { ...LEVELS, defect2: one.defect2 ?? 0 };
  const widths = { ...WIDTHS, ...one.widths };
  const lines = ns.map((n) => ({
    n,
    energy:
      levelEnergy(n, levels.gap, levels.rydberg, levels.defect0, levels.defect2) +
      (0.1 * random.normal() * widths.coefficient) / n ** 3,
    width: (widths.floor + widths.coefficient / n ** 3) * (1 + 0.02 * random.normal()),
  }));
  const include = ns.map((n) => n !== ns[0]);
  const sigma = Float64Array.from(lines, (line) => line.width * (0.05 + 0.1 * random.uniform()));
  const level = levelLink(
    { ns, value: Float64Array.from(lines, (line) => line.energy), sigma, include },
    levels,
    one.levelCount ?? one.tied?.count ?? 3,
  );
  const width = widthLink(
    { ns, value: Float64Array.from(lines, (line) => line.width), sigma, include },
    widths,
    one.widthFree ?? { floor: true, exponent: false },
    levels.defect0,
  );
  const strength = one.strength ?? { law: "cubic", base: "n" };
  const toN = ns[ns.length - 1]! + 3;
  const spec: ModelSpec = {
    ns,
    gaussStd: one.gaussStd ?? 0,
    asymmetry: one.asymmetry ?? "shared",
    tiedLevels:
      one.tied === undefined ? null : { values: level.values, count: one.tied.count, tiedNs: one.tied.ns },
    tail:
      one.tail === false
        ? null
        : {
            fromN: ns[ns.length - 1]! + 1,
            toN,
            band: true,
            below: one.below ?? [],
            levels: level.values,
            levelLink: level.link,
            widths: width.values,
            widthLink: width.link,
            strengthShare: strengthShare({ ns, value: sigma, sigma, include }, strength, levels.defect0),
            strength,
            envelope: one.envelope ?? "allowed-3d",
            continuumOdd: one.continuumOdd ?? true,
            factorFree: one.factorFree ?? true,
            factor: 0.9,
          },
    background: [
      { term: "polynomial", name: "legendre0", unit: "1/cm", values: energy.map(() => 1) },
      { term: "polynomial", name: "legendre1", unit: "1/cm", values: energy.map((e) => (e - 2.164) / 0.01) },
    ],
  };
  const problem = new SpectrumProblem(points, spec);
  const theta = problem.startFrom(lines, -0.2 + 0.1 * random.normal(), 0.85 + 0.1 * random.uniform());
  const c = Float64Array.from({ length: problem.linear }, (_, j) =>
    j < ns.length ? (12 / ns[j]! ** 3) * (1 + 0.1 * random.normal()) : 0.05 * (1 + random.uniform()),
  );
  return { problem, theta, c };
}

/** The model from its columns: no derivative code takes part. */
function modelAt(problem: SpectrumProblem, theta: Float64Array, c: Float64Array): Float64Array {
  const m = problem.rows;
  const phi = new Float64Array(m * problem.linear);
  problem.columns(theta, phi);
  const sum = new Float64Array(m);
  for (let j = 0; j < problem.linear; j++) for (let i = 0; i < m; i++) sum[i]! += c[j]! * phi[j * m + i]!;
  return sum;
}

describe("the derivatives of the spectrum model agree with differences for", () => {
  test.each(CASES.map((one, i) => [one.title, one, 100 + i] as const))("%s", (_, one, seed) => {
    const { problem, theta, c } = makeProblem(one, seed);
    const m = problem.rows;
    const out = new Float64Array(m * problem.nonlinear);
    problem.derivatives(theta, c, out);
    const narrowest = Math.min(...Array.from(problem.layout.widthAt, (at) => theta[at]!));
    const { lawCount, factorAt, asymmetryAt } = problem.layout;
    for (let p = 0; p < problem.nonlinear; p++) {
      const column = out.subarray(p * m, (p + 1) * m);
      // A hundredth of what the model bends on: widths for energies, their images for the law's parameters.
      const scale =
        p === asymmetryAt || p === factorAt
          ? 1
          : p < lawCount
            ? [1, 100, 50, 2500][p]! * (p < 2 ? narrowest : narrowest / 0.0912)
            : narrowest;
      const step = 0.01 * scale;
      // Every point at once; the eighth-order formula needs eight models.
      const models = new Map<number, Float64Array>();
      const at = (x: number): Float64Array => {
        const moved = Float64Array.from(theta);
        moved[p] = x;
        const model = models.get(x) ?? modelAt(problem, moved, c);
        models.set(x, model);
        return model;
      };
      const largest = Math.max(...column.map(Math.abs));
      expect(largest, `parameter ${p} matters`).toBeGreaterThan(0);
      const worstBy = (h: number): number => {
        models.clear();
        let worst = 0;
        for (let i = 0; i < m; i++)
          worst = Math.max(worst, Math.abs(derivative((x) => at(x)[i]!, theta[p]!, h) - column[i]!));
        return worst;
      };
      // An energy can move the gap, and a width the exponent, many times as far as itself: shorter steps then tell more.
      const worst = Math.min(...[1, 1 / 8, 1 / 64].map((part) => worstBy(part * step)));
      // Derived: differences of a signal of order 100 over steps of a hundredth of a width keep eight digits or more.
      expect(worst / largest, `parameter ${p} of ${problem.nonlinear}`).toBeLessThan(1e-7);
    }
  });
});

test("the model of tied levels equals that of free levels with the energies put on the law", () => {
  const tied = makeProblem({ title: "", tied: { count: 3, ns: [3, 4, 5, 6, 7, 8] } }, 7);
  const free = makeProblem({ title: "" }, 7);
  const { layout } = free.problem;
  const theta = new Float64Array(free.problem.nonlinear);
  layout.energyAt.forEach((at, j) => (theta[at] = tied.problem.energyOf(j, tied.theta)));
  layout.widthAt.forEach((at, j) => (theta[at] = tied.theta[tied.problem.layout.widthAt[j]!]!));
  theta[layout.asymmetryAt] = tied.theta[tied.problem.layout.asymmetryAt]!;
  theta[layout.factorAt] = tied.theta[tied.problem.layout.factorAt]!;
  // Derived: the link of the free model's tail is linear in the energies about its own start; from energies that lie on
  // the law of that start it gives that law back, up to the linearisation.
  const a = modelAt(tied.problem, tied.theta, tied.c);
  const b = modelAt(free.problem, theta, tied.c);
  const largest = Math.max(...a);
  a.forEach((value, i) => expect(Math.abs(value - b[i]!) / largest).toBeLessThan(1e-5));
});
