import { NO_WATCH, type Watch } from "../base/index.ts";
import { LEVEL, levelLaw } from "../laws/index.ts";
import { solveSeparable, type SeparableSolution, type SolveOptions } from "../solve/index.ts";
import type { FitPoints, LevelValues, LineStart, ModelSpec, WidthValues } from "./model-spec.ts";
import { ASYMMETRY_BOUND, FACTOR_BOUND, WIDTH_BOUND_FACTOR } from "./bounds.ts";
import type { ConstrainedParts, ExtraFit, FittedValue } from "./describe-constrained.ts";
import { setUpFit } from "./set-up-fit.ts";
import { hasOddAreas, type SpectrumProblem } from "./spectrum-problem.ts";

/** Where the parameters of the lines stand in `LineParameters`. */
export interface LineParameters {
  readonly ns: readonly number[];
  readonly energy: Float64Array;
  readonly width: Float64Array;
  readonly area: Float64Array;
  /** One q per line (the same where it is shared). */
  readonly asymmetry: Float64Array;
  /** Covariance of [energies, widths, areas, asymmetries], each block in the order of ns: 4k x 4k, row-major. */
  readonly covariance: Float64Array;
}

export interface SpectrumFit {
  readonly problem: SpectrumProblem;
  readonly solution: SeparableSolution;
  readonly lines: LineParameters;
  readonly asymmetry: { readonly value: number; readonly sigma: number };
  readonly factor: { readonly value: number; readonly sigma: number; readonly atBound: boolean } | null;
  readonly laws: { readonly levels: LevelValues; readonly widths: WidthValues } | null;
  readonly background: readonly {
    readonly term: string;
    readonly name: string;
    readonly unit: string;
    readonly value: number;
    readonly sigma: number;
  }[];
  /** n of lines that ended at a bound of their energy or width. */
  readonly atBound: readonly number[];
  /** Present where the transmitted light was fitted: `problem` is then the signal, and not what the residuals belong to. */
  readonly light?: LightParts;
  /** Present where parameters were held, bounded, shared or tied line by line, or other series were fitted too. */
  readonly constrained?: ConstrainedParts;
  /** What was solved, where that is not `problem` itself. */
  readonly solved?: Solved;
}

/** What the transmitted light has beside its absorption; null where it was held or none was asked for. */
export interface LightParts {
  readonly fringes: {
    readonly visibility: FittedValue;
    readonly period: FittedValue;
    readonly phase: FittedValue;
  } | null;
  readonly stray: (FittedValue & { readonly atZero: boolean }) | null;
}

/** The problem behind a fit, for a covariance made anew. */
export interface Solved {
  /** 1/sigma of the rows (m). */
  readonly weights: Float64Array;
  /** (n x n, row-major) */
  readonly covariance: Float64Array;
  /** Derivatives of the model by the n parameters (m x n, column-major). */
  jacobian(): Float64Array;
  /** The same fit with this covariance. */
  describe(covariance: Float64Array): SpectrumFit;
}

export interface FitStart {
  readonly lines: readonly LineStart[];
  readonly asymmetry: number;
  readonly factor: number;
  /** Half width of the interval that each line's energy may move in (eV), by n. */
  readonly reach: ReadonlyMap<number, number>;
}

export interface FitControl {
  readonly maxIterations?: number;
  readonly gradientTolerance?: number;
  readonly costTolerance?: number;
  /** `condensed` for fits that only prepare others: fitted values and residuals then run with few rows. Default `exact`. */
  readonly answer?: SolveOptions["answer"];
  readonly watch?: Watch;
}

export { FACTOR_BOUND } from "./bounds.ts";

/** Fits one spectrum and returns the parameters of its lines with their full covariance. */
export function fitSpectrum(
  points: FitPoints,
  spec: ModelSpec,
  start: FitStart,
  control: FitControl = {},
): SpectrumFit {
  const setUp = setUpFit(points, spec, start);
  const { lower, upper } = setUp;
  const solution = solveSeparable(setUp.problem, setUp.start, {
    lower,
    upper,
    maxIterations: control.maxIterations ?? 100,
    gradientTolerance: control.gradientTolerance ?? 1e-7,
    costTolerance: control.costTolerance ?? 1e-11,
    answer: control.answer,
    // Whoever asks for the fit reports where the whole job is; the solver only hears whether to stop.
    watch: { ...(control.watch ?? NO_WATCH), report: () => undefined },
  });
  return setUp.describe(solution);
}

/** Bounds of theta about its start; the coefficients have none. */
export function parameterBounds(
  problem: SpectrumProblem,
  start: FitStart,
  theta: Float64Array,
): { lower: Float64Array; upper: Float64Array } {
  const { layout, spec } = problem;
  const lower = new Float64Array(layout.count).fill(-Infinity);
  const upper = new Float64Array(layout.count).fill(Infinity);
  spec.ns.forEach((n, j) => {
    const e = layout.energyAt[j]!;
    const reach = start.reach.get(n);
    if (e >= 0 && reach !== undefined) {
      lower[e] = theta[e]! - reach;
      upper[e] = theta[e]! + reach;
    }
    const w = layout.widthAt[j]!;
    lower[w] = theta[w]! / WIDTH_BOUND_FACTOR;
    upper[w] = theta[w]! * WIDTH_BOUND_FACTOR;
  });
  if (layout.asymmetryAt >= 0) {
    lower[layout.asymmetryAt] = -ASYMMETRY_BOUND;
    upper[layout.asymmetryAt] = ASYMMETRY_BOUND;
  }
  if (layout.factorAt >= 0) {
    lower[layout.factorAt] = 0;
    upper[layout.factorAt] = FACTOR_BOUND;
  }
  if (layout.lawCount > 1) lower[1] = 1e-9;
  return { lower, upper };
}

/** A solution as parameters of lines, laws and background. */
export function describeFit(problem: SpectrumProblem, solution: SeparableSolution): SpectrumFit {
  const { spec, layout } = problem;
  const { theta, coefficients, covariance } = solution;
  const k = spec.ns.length;
  const p = layout.count;
  const size = p + problem.linear;
  const odd = hasOddAreas(spec);
  const energy = Float64Array.from(spec.ns, (_, j) => problem.energyOf(j, theta));
  const width = Float64Array.from(spec.ns, (_, j) => theta[layout.widthAt[j]!]!);
  const area = coefficients.slice(0, k);
  const shared = problem.asymmetryOf(theta);
  const asymmetry = Float64Array.from(
    spec.ns,
    (_, j) => shared + (odd ? coefficients[k + j]! / area[j]! : 0),
  );
  const rows = lineRows(problem, theta, coefficients);
  const count = 4 * k;
  const lineCovariance = new Float64Array(count * count);
  for (let a = 0; a < count; a++) {
    for (let b = 0; b <= a; b++) {
      let sum = 0;
      for (const [i, fi] of rows[a]!)
        for (const [j, fj] of rows[b]!) sum += fi * fj * covariance[i * size + j]!;
      lineCovariance[a * count + b] = sum;
      lineCovariance[b * count + a] = sum;
    }
  }
  const sigmaAt = (i: number): number => Math.sqrt(covariance[i * size + i]!);
  const atBound = spec.ns.filter(
    (_, j) =>
      (layout.energyAt[j]! >= 0 && solution.activeBounds[layout.energyAt[j]!] !== 0) ||
      solution.activeBounds[layout.widthAt[j]!] !== 0,
  );
  return {
    problem,
    solution,
    lines: { ns: spec.ns, energy, width, area, asymmetry, covariance: lineCovariance },
    asymmetry: { value: shared, sigma: layout.asymmetryAt >= 0 ? sigmaAt(layout.asymmetryAt) : 0 },
    factor:
      spec.tail === null
        ? null
        : {
            value: problem.factorOf(theta),
            sigma: layout.factorAt >= 0 ? sigmaAt(layout.factorAt) : 0,
            atBound: layout.factorAt >= 0 && solution.activeBounds[layout.factorAt] !== 0,
          },
    laws: spec.tail === null ? null : problem.lawsAt(theta),
    background: spec.background.map((column, b) => ({
      term: column.term,
      name: column.name,
      unit: column.unit,
      value: coefficients[problem.backgroundAt + b]!,
      sigma: sigmaAt(p + problem.backgroundAt + b),
    })),
    atBound,
  };
}

/**
 * Rows of d(energies, widths, areas, asymmetries)/d(theta, c), each block in the order of the lines; sparse: place and
 * factor.
 */
export function lineRows(
  problem: SpectrumProblem,
  theta: Float64Array,
  coefficients: Float64Array,
): [number, number][][] {
  const { spec, layout } = problem;
  const k = spec.ns.length;
  const p = layout.count;
  const odd = hasOddAreas(spec);
  const rows: [number, number][][] = [];
  const law = new Float64Array(LEVEL.size);
  for (let j = 0; j < k; j++) {
    if (layout.energyAt[j]! >= 0) rows.push([[layout.energyAt[j]!, 1]]);
    else {
      levelLaw(spec.ns[j]!, problem.tiedLaw(theta), law);
      rows.push(Array.from({ length: layout.lawCount }, (_, i): [number, number] => [i, law[1 + i]!]));
    }
  }
  for (let j = 0; j < k; j++) rows.push([[layout.widthAt[j]!, 1]]);
  for (let j = 0; j < k; j++) rows.push([[p + j, 1]]);
  for (let j = 0; j < k; j++) {
    const area = coefficients[j]!;
    rows.push([
      ...(layout.asymmetryAt >= 0 ? [[layout.asymmetryAt, 1] as [number, number]] : []),
      ...(odd
        ? ([
            [p + k + j, 1 / area],
            [p + j, -coefficients[k + j]! / area ** 2],
          ] as [number, number][])
        : []),
    ]);
  }
  return rows;
}

/** The same fit with every variance multiplied: standard errors scaled by the residuals. */
export function withScaledErrors(fit: SpectrumFit, variance: number): SpectrumFit {
  const scale = Math.sqrt(variance);
  return {
    ...fit,
    lines: { ...fit.lines, covariance: fit.lines.covariance.map((value) => value * variance) },
    asymmetry: { ...fit.asymmetry, sigma: fit.asymmetry.sigma * scale },
    factor: fit.factor === null ? null : { ...fit.factor, sigma: fit.factor.sigma * scale },
    background: fit.background.map((column) => ({ ...column, sigma: column.sigma * scale })),
    ...(fit.light === undefined ? {} : { light: withScaledLight(fit.light, scale) }),
    ...(fit.constrained === undefined ? {} : { constrained: withScaledParts(fit.constrained, scale) }),
  };
}

function withScaledLight({ fringes, stray }: LightParts, scale: number): LightParts {
  const wider = <T extends FittedValue>(one: T): T => ({ ...one, sigma: one.sigma * scale });
  return {
    fringes:
      fringes === null
        ? null
        : {
            visibility: wider(fringes.visibility),
            period: wider(fringes.period),
            phase: wider(fringes.phase),
          },
    stray: stray === null ? null : wider(stray),
  };
}

function withScaledParts(parts: ConstrainedParts, scale: number): ConstrainedParts {
  const wider = <T extends FittedValue>(one: T): T => ({ ...one, sigma: one.sigma * scale });
  const { widthLaw, strengthLaw, asymmetryLaw } = parts;
  return {
    ...parts,
    widthLaw:
      widthLaw === null
        ? null
        : { ...widthLaw, covariance: widthLaw.covariance.map((value) => value * scale * scale) },
    strengthLaw:
      strengthLaw === null ? null : { ...strengthLaw, coefficient: wider(strengthLaw.coefficient) },
    asymmetryLaw:
      asymmetryLaw === null ? null : { limit: wider(asymmetryLaw.limit), slope: wider(asymmetryLaw.slope) },
    extra: parts.extra.map((one): ExtraFit => ({
      ...one,
      defect: wider(one.defect),
      lines: one.lines.map((line) => ({
        n: line.n,
        energy: wider(line.energy),
        width: wider(line.width),
        area: wider(line.area),
      })),
    })),
  };
}

/** The same fit with an error of the axis that differs from line to line, in quadrature to the energies. */
export function withAxisJitter(fit: SpectrumFit, jitter: number): SpectrumFit {
  if (!(jitter > 0)) return fit;
  const covariance = fit.lines.covariance.slice();
  const k = fit.lines.ns.length;
  const tied = fit.problem.spec.tiedLevels?.tiedNs ?? [];
  fit.lines.ns.forEach((n, j) => {
    // A line on the level law has the law's error; its own shift is carried to the law instead.
    const at = j * 4 * k + j;
    if (!tied.includes(n) && covariance[at]! > 0) covariance[at]! += jitter * jitter;
  });
  return { ...fit, lines: { ...fit.lines, covariance } };
}
