import { describe, expect, it } from "vitest";
import {
  backgroundColumns,
  makeSlitGrid,
  SpectrumProblem,
  TransmittanceProblem,
  type MeasuredLight,
  type ModelSpec,
  type TailSpec,
} from "../../../app/fit/index.ts";
import { fiveLines, transmitted, unevenEnergies, type PlainLight } from "./plain-light.ts";

const LINES = fiveLines(1.5);
const ENERGY = unevenEnergies(0.975, 1.001, 160);
const FRAME = [ENERGY[0]!, ENERGY[ENERGY.length - 1]!] as const;

function link(parameters: number): TailSpec["levelLink"] {
  const k = LINES.length;
  const gain = new Float64Array(parameters * k);
  for (let p = 0; p < parameters; p++) for (let j = 0; j < k; j++) gain[p * k + j] = 0.1 * (1 + p + j);
  return { gain, at: Float64Array.from(LINES, (line) => line.energy), parameters };
}

const TAIL: TailSpec = {
  fromN: 7,
  toN: 12,
  band: true,
  below: [],
  levels: { gap: 1, rydberg: 0.05, defect0: 0.1, defect2: 0 },
  levelLink: link(3),
  widths: { floor: 1e-5, coefficient: 0.012, exponent: 3, base: "n", floorKind: "lorentzian" },
  widthLink: { ...link(2), at: Float64Array.from(LINES, (line) => line.width) },
  strengthShare: Float64Array.from([1, 2, 3, 2, 1]),
  strength: { law: "cubic", base: "n" },
  envelope: "allowed-3d",
  continuumOdd: true,
  factorFree: true,
  factor: 0.9,
};

interface Case {
  readonly name: string;
  readonly light: Partial<MeasuredLight>;
  readonly spec: Partial<ModelSpec>;
}

const FRINGES: NonNullable<MeasuredLight["fringes"]> = {
  reflectance: 0.24,
  reference: 0.99,
  dispersion: false,
  start: { visibility: 0.6, period: 0.0021, phase: 0.7 },
};

const CASES: Case[] = [
  { name: "plain light without a slit", light: { slitStd: 0 }, spec: {} },
  { name: "a slit", light: {}, spec: {} },
  { name: "a slit and all reflections", light: { surface: "all", reflectance: 0.24 }, spec: {} },
  { name: "a slit and a single pass", light: { surface: "single", reflectance: 0.24 }, spec: {} },
  { name: "a slit and asymmetries line by line", light: {}, spec: { asymmetry: "free" } },
  { name: "a slit and the tail", light: {}, spec: { tail: TAIL } },
  { name: "alpha with a thickness", light: { depthPerSignal: 0.0034 }, spec: {} },
  {
    name: "fringes under a slit",
    light: { fringes: FRINGES, reflectance: 0.24, surface: "single" },
    spec: {},
  },
  { name: "fringes without surfaces and slit", light: { fringes: FRINGES, slitStd: 0 }, spec: {} },
  ...[{}, { asymmetry: "free" as const }, { tail: TAIL }].map((spec): Case => ({
    name: `fringes whose phase the lines turn, ${Object.keys(spec)[0] ?? "plain"}`,
    light: { fringes: { ...FRINGES, dispersion: true }, surface: "single", reflectance: 0.24 },
    spec,
  })),
  { name: "stray light that is known", light: { stray: { value: 0.05, free: false } }, spec: {} },
  { name: "stray light as a parameter", light: { stray: { value: 0.05, free: true } }, spec: {} },
  {
    name: "stray light and fringes, alpha with a thickness",
    light: { stray: { value: 0.05, free: true }, fringes: FRINGES, depthPerSignal: 0.0034 },
    spec: {},
  },
];

function build({ light, spec }: Case): { problem: TransmittanceProblem; parameters: Float64Array } {
  const background = (energy: Float64Array): ReturnType<typeof backgroundColumns> =>
    backgroundColumns([{ term: "polynomial", order: 2 }], energy, "1", 1, FRAME);
  const full: ModelSpec = {
    ns: LINES.map((line) => line.n),
    gaussStd: 0,
    asymmetry: "shared",
    tiedLevels: null,
    tail: null,
    background: [],
    ...spec,
  };
  const measured: MeasuredLight = {
    energy: ENERGY,
    value: new Float64Array(ENERGY.length),
    sigma: new Float64Array(ENERGY.length).fill(0.01),
    surface: "none",
    reflectance: 0,
    depthPerSignal: 1,
    slitStd: 30e-6,
    ...light,
  };
  const grid = makeSlitGrid(ENERGY, measured.slitStd, LINES);
  const nothing = new Float64Array(grid.nodes.length);
  const inner = new SpectrumProblem(
    { energy: grid.nodes, signal: nothing, sigma: nothing.map(() => 1) },
    { ...full, background: background(grid.nodes) },
  );
  const none = background(grid.nodes).map((column) => ({ ...column, values: nothing }));
  const partner =
    measured.fringes?.dispersion === true
      ? new SpectrumProblem(
          { energy: grid.nodes, signal: nothing, sigma: nothing.map(() => 1) },
          { ...full, background: none, partner: true },
        )
      : null;
  const theta = inner.startFrom(LINES, -0.2, 0.9);
  const perSignal = 1 / measured.depthPerSignal;
  const areas = LINES.map((line) => line.area * perSignal);
  const odd = full.asymmetry === "free" ? areas.map((area) => -0.2 * area) : [];
  const parameters = Float64Array.from([
    ...theta,
    ...areas,
    ...odd,
    0.3 * perSignal,
    0.05 * perSignal,
    -0.02 * perSignal,
    ...((measured.fringes ?? null) === null ? [] : Object.values(measured.fringes!.start)),
    ...(measured.stray?.free === true ? [measured.stray.value] : []),
  ]);
  return { problem: new TransmittanceProblem(measured, inner, grid, partner), parameters };
}

describe("transmitted light as a function of lines and background", () => {
  it.each(CASES)("has the derivatives of its own model: $name", (one) => {
    const { problem, parameters } = build(one);
    const m = problem.rows;
    const jacobian = new Float64Array(m * problem.parameters);
    const up = new Float64Array(m);
    const down = new Float64Array(m);
    problem.model(parameters, up);
    problem.jacobian(parameters, jacobian);
    for (let j = 0; j < problem.parameters; j++) {
      const column = jacobian.subarray(j * m, (j + 1) * m);
      const largest = column.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
      // A change that moves T by about 1e-4 somewhere.
      const step = 1e-4 / largest;
      const moved = (by: number): Float64Array =>
        parameters.map((value, i) => (i === j ? value + by : value));
      const slope = (by: number): Float64Array => {
        problem.model(moved(by), up);
        problem.model(moved(-by), down);
        return up.map((value, i) => (value - down[i]!) / (2 * by));
      };
      const once = slope(step);
      const twice = slope(2 * step);
      for (let i = 0; i < m; i++) {
        const difference = (4 * once[i]! - twice[i]!) / 3;
        // Derived: central differences with Richardson's correction: the fifth derivative times (step/width)^4 = 1e-12 at the
        // narrowest line, and the rounding of 1 eV, 2e-16/(width/derivative) over the change of 1e-4.
        expect(Math.abs(difference - column[i]!), `parameter ${j}, point ${i}`).toBeLessThan(3e-7 * largest);
      }
    }
  });

  it("is right at other parameters than those of the last model", () => {
    const { problem, parameters } = build(CASES[1]!);
    const m = problem.rows;
    const fresh = new Float64Array(m * problem.parameters);
    const later = new Float64Array(m * problem.parameters);
    const out = new Float64Array(m);
    problem.model(parameters, out);
    problem.jacobian(parameters, fresh);
    problem.model(
      parameters.map((value) => value * 1.0001),
      out,
    );
    problem.jacobian(parameters, later);
    expect(Array.from(later)).toEqual(Array.from(fresh));
  });

  it.each(["none", "single", "all"] as const)("is the light of plain loops, surfaces: %s", (model) => {
    const reflectance = model === "none" ? 0 : 0.24;
    const { problem, parameters } = build({ name: "", light: { surface: model, reflectance }, spec: {} });
    // The background of this light is 0.3 at the middle of the window and straight.
    const straight = parameters.slice();
    straight[straight.length - 2] = 0;
    straight[straight.length - 1] = 0;
    const light: PlainLight = {
      lines: LINES,
      asymmetry: -0.2,
      background: [0.3, 0],
      slitFwhm: 30e-6 * Math.sqrt(8 * Math.log(2)),
      surface: { model, reflectance },
    };
    const out = new Float64Array(ENERGY.length);
    problem.model(straight, out);
    // Derived: brute-force quadrature over the slit; the grid's claim is 1.2e-6 of T.
    ENERGY.forEach((e, i) => expect(Math.abs(out[i]! - transmitted(light, e))).toBeLessThan(1.5e-6));
  });
});
