import { makeRandom } from "../../app/base/index.ts";
import { backgroundColumns, SpectrumProblem, type FitPoints, type ModelSpec } from "../../app/fit/index.ts";

/** One spectrum with a start for it: what both sides of the bench are given. */
export interface EngineProblem {
  readonly name: string;
  readonly lines: number;
  readonly points: FitPoints;
  readonly spec: ModelSpec;
  readonly problem: SpectrumProblem;
  /** energies, then widths */
  readonly theta: Float64Array;
  /** Start of areas, odd areas and background: the engine solves for them, a general solver needs them. */
  readonly coefficients: Float64Array;
}

export type Layout = "crowded" | "ladder";

const LOW_eV = 2.14;
const SPAN_eV = 0.033;
const NOISE = 0.002;
const ORDER = 2;

/**
 * Lines free in energy, width, area and asymmetry on a parabola, evenly sampled, with white noise. `crowded`: each spacing
 * is 0.94 of the one below it, each width a fifth of the spacing. `ladder`: energies as -1/n^2 and widths as 1/n^3, at least
 * four points wide.
 */
export function makeEngineProblem(lines: number, m: number, gaussStd: number, layout: Layout): EngineProblem {
  const energy = Float64Array.from({ length: m }, (_, i) => LOW_eV + (SPAN_eV * i) / (m - 1));
  const { centres, widths } = layout === "crowded" ? crowded(lines) : ladder(lines, (4 * SPAN_eV) / m);
  const background = backgroundColumns([{ term: "polynomial", order: ORDER }], energy, "1", 0);
  const spec: ModelSpec = {
    ns: centres.map((_, j) => j + 2),
    gaussStd,
    asymmetry: "free",
    tiedLevels: null,
    tail: null,
    background,
  };
  const sigma = new Float64Array(m).fill(NOISE);
  const truth = Float64Array.from([...centres, ...widths]);
  const area = Float64Array.from(widths, (width, j) => (Math.PI / 2) * width * (0.5 + 0.4 * Math.cos(j)));
  const odd = area.map((value, j) => value * 0.15 * Math.sin(1 + 2 * j));
  const level = Float64Array.from([0.6, 0.2, -0.1]);
  const coefficients = Float64Array.from([...area, ...odd, ...level]);
  const blank = new SpectrumProblem({ energy, signal: new Float64Array(m), sigma }, spec);
  const phi = new Float64Array(m * blank.linear);
  blank.columns(truth, phi);
  const random = makeRandom(20260 + lines);
  const signal = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    let sum = NOISE * random.normal();
    for (let j = 0; j < blank.linear; j++) sum += coefficients[j]! * phi[j * m + i]!;
    signal[i] = sum;
  }
  const points: FitPoints = { energy, signal, sigma };
  const theta = Float64Array.from([
    ...centres.map((value, j) => value + widths[j]! * (j % 2 === 0 ? 0.15 : -0.15)),
    ...widths.map((value, j) => value * (j % 3 === 0 ? 0.8 : 1.25)),
  ]);
  return {
    name: `${lines} lines x ${m} points, ${layout}${gaussStd > 0 ? ", Gaussian instrument" : ""}`,
    lines,
    points,
    spec,
    problem: new SpectrumProblem(points, spec),
    theta,
    coefficients: Float64Array.from([...area.map((value) => 0.8 * value), ...odd.map(() => 0), ...level]),
  };
}

function crowded(lines: number): { centres: number[]; widths: number[] } {
  const ratio = 0.94;
  const steps = Array.from({ length: lines + 1 }, (_, j) => ratio ** j);
  const unit = SPAN_eV / steps.reduce((sum, step) => sum + step, 0);
  const centres: number[] = [];
  let at = LOW_eV;
  for (let j = 0; j < lines; j++) centres.push((at += unit * steps[j]!));
  return { centres, widths: centres.map((_, j) => 0.2 * unit * steps[j]!) };
}

function ladder(lines: number, least: number): { centres: number[]; widths: number[] } {
  const gap = LOW_eV + 0.98 * SPAN_eV;
  const rydberg = 4 * 0.9 * SPAN_eV;
  const ns = Array.from({ length: lines }, (_, j) => j + 2);
  return {
    centres: ns.map((n) => gap - rydberg / n ** 2),
    widths: ns.map((n) => Math.max(least, (0.15 * rydberg) / n ** 3)),
  };
}
