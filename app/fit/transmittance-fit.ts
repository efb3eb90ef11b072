import { NO_WATCH } from "../base/index.ts";
import { WIDTH, widthLaw } from "../laws/index.ts";
import { solveGeneral, type SeparableSolution } from "../solve/index.ts";
import { depthFromTransmittance, transmittanceSlope } from "../units/index.ts";
import type { FittedValue } from "./describe-constrained.ts";
import type { FitControl, FitStart, LightParts, SpectrumFit } from "./fit-spectrum.ts";
import type { BackgroundColumn, FitPoints, ModelSpec } from "./model-spec.ts";
import { setUpFit, type FitSetUp } from "./set-up-fit.ts";
import { hasOddAreas, type SpectrumProblem } from "./spectrum-problem.ts";
import { makeSlitGrid, type Feature } from "./transmittance-grid.ts";
import { TransmittanceProblem, type AbsorptionModel, type MeasuredLight } from "./transmittance-problem.ts";

export interface TransmittanceFit extends LightParts {
  /**
   * As a fit of the signal, so that all that follows is the same: `residuals` are in standard deviations of T, `fitted`
   * is the signal that belongs to the fitted T (as the measured signal belongs to the measured T).
   */
  readonly fit: SpectrumFit;
  /**
   * The measured T linearised about the fit: signal = model with the slit acting on the signal + (T - T_fit)/(dT/d signal),
   * sigma = sigma_T/|dT/d signal|. A fit of these is one Gauss-Newton step of the fit of T, and T <= 0 is no exception.
   */
  readonly linearised: FitPoints;
}

const FAR_N = 1e6;
/** Below this slope a reading says nothing about the signal; its standard deviation stays finite. */
const LEAST_SLOPE = 1e-200;

/**
 * What      Fits transmitted light: start from a fit of the signal (`from`), end in the measured domain.
 * Shapes    spec: the model on the points of `light` (its `gaussStd` is not used: the slit acts on the light);
 *           background: the same columns on any energies.
 * Units     those of SpectrumProblem and MeasuredLight.
 * Accuracy  tests/app/fit/transmittance-fit.test.ts.
 */
export function fitTransmittance(
  light: MeasuredLight,
  spec: ModelSpec,
  background: (energy: Float64Array) => readonly BackgroundColumn[],
  start: FitStart,
  from: SpectrumFit,
  control: FitControl = {},
): TransmittanceFit {
  const { lineStds: _, ...own } = spec;
  const sharp: ModelSpec = { ...own, gaussStd: 0 };
  const points: FitPoints = { energy: light.energy, signal: light.value, sigma: light.sigma };
  const outer = setUpFit(points, sharp, start);
  const grid = makeSlitGrid(
    light.energy,
    light.slitStd,
    featuresOf(sharp, start),
    coarsest(light, sharp),
    light.slitReference ?? null,
  );
  const { nodes } = grid;
  const inner = grid.identity
    ? outer
    : setUpFit(
        // Only the energies matter there: nothing is measured on the nodes.
        {
          energy: nodes,
          signal: new Float64Array(nodes.length),
          sigma: new Float64Array(nodes.length).fill(1),
        },
        { ...sharp, background: background(nodes) },
        start,
      );
  const problem = new TransmittanceProblem(
    light,
    inner.problem,
    grid,
    partnerOf(light, nodes, sharp, background, start),
  );
  const p = outer.problem.nonlinear;
  const lower = new Float64Array(problem.parameters).fill(-Infinity);
  const upper = new Float64Array(problem.parameters).fill(Infinity);
  lower.set(outer.lower);
  upper.set(outer.upper);
  const first = new Float64Array(problem.parameters);
  const coefficients = startCoefficients(outer.inner, from);
  first.set(outer.startWith(coefficients));
  first.set(outer.reduce(coefficients), p);
  const { fringes, stray } = light;
  if (problem.fringesAt >= 0) {
    const { visibility, period, phase } = fringes!.start;
    first.set([visibility, period, phase], problem.fringesAt);
    lower.set([0, period * (1 - PERIOD_REACH)], problem.fringesAt);
    upper.set([1, period * (1 + PERIOD_REACH)], problem.fringesAt);
  }
  if (problem.strayAt >= 0) {
    first[problem.strayAt] = stray!.value;
    lower[problem.strayAt] = 0;
    upper[problem.strayAt] = MOST_STRAY;
  }
  const solution = solveGeneral(problem, first, {
    lower,
    upper,
    maxIterations: control.maxIterations ?? 100,
    gradientTolerance: control.gradientTolerance ?? 1e-7,
    costTolerance: control.costTolerance ?? 1e-11,
    watch: { ...(control.watch ?? NO_WATCH), report: () => undefined },
  });
  return asSignal(light, outer, problem, spec, start, solution);
}

/** The same model of the index on the nodes, where the phase of fringes needs it: its background has none. */
function partnerOf(
  light: MeasuredLight,
  nodes: Float64Array,
  sharp: ModelSpec,
  background: (energy: Float64Array) => readonly BackgroundColumn[],
  start: FitStart,
): AbsorptionModel | null {
  if (light.fringes?.dispersion !== true) return null;
  const nothing = new Float64Array(nodes.length);
  const none = background(nodes).map((column) => ({ ...column, values: nothing }));
  const points: FitPoints = { energy: nodes, signal: nothing, sigma: nothing.map(() => 1) };
  return setUpFit(points, { ...sharp, background: none, partner: true }, start).problem;
}

/** A fit may change the period of fringes by this part; beyond lies another fringe order over the window. */
const PERIOD_REACH = 0.2;
/** More stray light than light is no measurement. */
const MOST_STRAY = 1;

function startCoefficients(problem: SpectrumProblem, from: SpectrumFit): Float64Array {
  const { spec } = problem;
  const k = spec.ns.length;
  const out = new Float64Array(problem.linear);
  spec.ns.forEach((n, j) => {
    const place = from.lines.ns.indexOf(n);
    const area = place < 0 ? 0 : from.lines.area[place]!;
    out[j] = area;
    if (hasOddAreas(spec))
      out[k + j] = place < 0 ? 0 : area * (from.lines.asymmetry[place]! - from.asymmetry.value);
  });
  spec.background.forEach((column, b) => {
    const known = from.background.find((one) => one.term === column.term && one.name === column.name);
    out[problem.backgroundAt + b] = known?.value ?? 0;
  });
  return out;
}

/** Free lines, tied lines, lines below the window, and the edges of band and continuum. */
function featuresOf(spec: ModelSpec, start: FitStart): Feature[] {
  const features: Feature[] = start.lines
    .filter((line) => spec.ns.includes(line.n))
    .map(({ energy, width }) => ({ energy, width: width + (spec.instrumentLorentz ?? 0) }));
  const { tail } = spec;
  if (tail === null) return features;
  const { gap, rydberg, defect0, defect2 } = tail.levels;
  const out = new Float64Array(WIDTH.size);
  const widthOf = (n: number): number => {
    widthLaw(n, defect0, tail.widths, out);
    return Math.max(0, out[WIDTH.width]!) + (spec.instrumentLorentz ?? 0);
  };
  const energyOf = (n: number): number => gap - rydberg / (n - defect0 - defect2 / (n - defect0) ** 2) ** 2;
  for (const n of tail.below) features.push({ energy: energyOf(n), width: widthOf(n) });
  for (let n = tail.fromN; n <= tail.toN; n++) features.push({ energy: energyOf(n), width: widthOf(n) });
  features.push({ energy: energyOf(tail.toN + 0.5), width: widthOf(tail.toN + 0.5) });
  features.push({ energy: gap, width: widthOf(FAR_N) });
  return features;
}

/** A measured background is known from point to point and may be anything in between. */
function coarsest(light: MeasuredLight, spec: ModelSpec): number {
  if (!spec.background.some((column) => column.term === "measured")) return Infinity;
  const m = light.energy.length;
  return (light.energy[m - 1]! - light.energy[0]!) / Math.max(1, m - 1);
}

function asSignal(
  light: MeasuredLight,
  outer: FitSetUp,
  problem: TransmittanceProblem,
  spec: ModelSpec,
  start: FitStart,
  solution: SeparableSolution,
): TransmittanceFit {
  const { depthPerSignal, reflectance, surface } = light;
  const p = outer.problem.nonlinear;
  const count = p + outer.problem.linear;
  const theta = solution.theta.slice(0, p);
  const coefficients = solution.theta.slice(p, count);
  const fitted = solution.fitted.map((T) => depthFromTransmittance(T, reflectance, surface) / depthPerSignal);
  const size = problem.parameters;
  const parts: SeparableSolution = {
    ...solution,
    theta,
    coefficients,
    fitted,
    activeBounds: solution.activeBounds.slice(0, p),
    undetermined: solution.undetermined.slice(0, count),
    covariance: Float64Array.from(
      { length: count * count },
      (_, i) => solution.covariance[Math.floor(i / count) * size + (i % count)]!,
    ),
  };
  const m = light.energy.length;
  const signal = signalModel(light, outer, spec, start, theta, coefficients);
  const sigma = new Float64Array(m);
  const plain = problem.fringesAt < 0 && (light.stray ?? null) === null;
  for (let i = 0; i < m; i++) {
    const slope = plain
      ? depthPerSignal * transmittanceSlope(fitted[i]! * depthPerSignal, reflectance, surface)
      : problem.slopeAt(solution.theta, light.energy[i]!, signal[i]!);
    sigma[i] = light.sigma[i]! / Math.max(LEAST_SLOPE, Math.abs(slope));
    // T falls where the signal rises.
    signal[i]! -= solution.residuals[i]! * sigma[i]!;
  }
  const valueAt = (at: number): FittedValue => ({
    value: solution.theta[at]!,
    sigma: Math.sqrt(solution.covariance[at * size + at]!),
  });
  const at = problem.fringesAt;
  const own: LightParts = {
    fringes: at < 0 ? null : { visibility: valueAt(at), period: valueAt(at + 1), phase: valueAt(at + 2) },
    stray:
      problem.strayAt < 0
        ? null
        : { ...valueAt(problem.strayAt), atZero: solution.activeBounds[problem.strayAt] !== 0 },
  };
  return {
    fit: {
      ...outer.describe(parts),
      light: own,
      solved: {
        weights: problem.weights,
        covariance: solution.covariance,
        jacobian: () => {
          const out = new Float64Array(m * size);
          problem.model(solution.theta, new Float64Array(m));
          problem.jacobian(solution.theta, out);
          return out;
        },
        describe: (covariance) =>
          asSignal(light, outer, problem, spec, start, { ...solution, covariance }).fit,
      },
    },
    linearised: { energy: light.energy, signal, sigma },
    ...own,
  };
}

/** The signal at these parameters with the slit acting on the signal, as a fit of the signal would have it. */
function signalModel(
  light: MeasuredLight,
  outer: FitSetUp,
  spec: ModelSpec,
  start: FitStart,
  own: Float64Array,
  coefficients: Float64Array,
): Float64Array {
  const m = light.energy.length;
  const points: FitPoints = { energy: light.energy, signal: light.value, sigma: light.sigma };
  const { slitStd } = light;
  const reference = light.slitReference ?? null;
  const theta = outer.thetaOf(own);
  const lineStds = Float64Array.from(spec.ns, (_, j) =>
    reference === null ? slitStd : slitStd * (outer.inner.energyOf(j, theta) / reference) ** 2,
  );
  const { problem } = slitStd > 0 ? setUpFit(points, { ...spec, gaussStd: slitStd, lineStds }, start) : outer;
  const phi = new Float64Array(m * problem.linear);
  problem.columns(own, phi);
  const out = new Float64Array(m);
  problem.offset?.(own, out);
  for (let j = 0; j < problem.linear; j++)
    for (let i = 0; i < m; i++) out[i]! += coefficients[j]! * phi[j * m + i]!;
  return out;
}
