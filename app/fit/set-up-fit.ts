import { linearLeastSquares, type SeparableProblem, type SeparableSolution } from "../solve/index.ts";
import { ConstrainedProblem } from "./constrained-problem.ts";
import { isConstrained } from "./constraint-spec.ts";
import { expandSolution } from "./describe-constrained.ts";
import { describeFit, parameterBounds, type FitStart, type SpectrumFit } from "./fit-spectrum.ts";
import type { FitPoints, ModelSpec } from "./model-spec.ts";
import { SpectrumProblem } from "./spectrum-problem.ts";

/** A model ready to be solved: plain, or with its constraints. */
export interface FitSetUp {
  readonly problem: SeparableProblem;
  /** The plain model behind it. */
  readonly inner: SpectrumProblem;
  readonly start: Float64Array;
  /** The start where the plain coefficients are known. */
  startWith(coefficients: Float64Array): Float64Array;
  readonly lower: Float64Array;
  readonly upper: Float64Array;
  /** Plain parameters (theta) at the problem's own. */
  thetaOf(own: Float64Array): Float64Array;
  /** The problem's linear coefficients for plain ones. */
  reduce(coefficients: Float64Array): Float64Array;
  describe(solution: SeparableSolution): SpectrumFit;
}

export function setUpFit(points: FitPoints, spec: ModelSpec, start: FitStart): FitSetUp {
  const inner = new SpectrumProblem(points, spec);
  const theta = inner.startFrom(start.lines, start.asymmetry, start.factor);
  const bounds = parameterBounds(inner, start, theta);
  for (let i = 0; i < theta.length; i++)
    theta[i] = Math.min(bounds.upper[i]!, Math.max(bounds.lower[i]!, theta[i]!));
  if (spec.constraints === undefined || !isConstrained(spec.constraints)) {
    return {
      problem: inner,
      inner,
      start: theta,
      startWith: () => theta,
      ...bounds,
      thetaOf: (own) => own,
      reduce: (coefficients) => coefficients,
      describe: (solution) => describeFit(inner, solution),
    };
  }
  const problem = new ConstrainedProblem(points, inner, spec.constraints, theta);
  return {
    problem,
    inner,
    start: spec.constraints.rules.area.some((rule) => rule.kind === "bounded")
      ? problem.startWith(plainCoefficients(inner, theta))
      : problem.start(),
    startWith: (coefficients) => problem.startWith(coefficients),
    ...problem.narrowed(bounds.lower, bounds.upper),
    thetaOf: (own) => problem.thetaOf(own).slice(0, inner.nonlinear),
    reduce: (coefficients) => problem.reduce(coefficients),
    describe: (solution) => describeConstrained(problem, solution),
  };
}

function describeConstrained(problem: ConstrainedProblem, solution: SeparableSolution): SpectrumFit {
  const { solution: wide, parts } = expandSolution(problem, solution);
  const fit: SpectrumFit = {
    ...describeFit(problem.inner, wide),
    constrained: parts,
    solved: {
      weights: problem.weights,
      covariance: solution.covariance,
      jacobian: () => separableJacobian(problem, solution),
      describe: (covariance) => describeConstrained(problem, { ...solution, covariance }),
    },
  };
  return withoutHeldVariance(fit);
}

/** Derivatives by theta, then by the coefficients (m x (p + k), column-major). */
export function separableJacobian(
  problem: SeparableProblem,
  { theta, coefficients }: Pick<SeparableSolution, "theta" | "coefficients">,
): Float64Array {
  const split = problem.nonlinear * problem.rows;
  const out = new Float64Array(split + problem.linear * problem.rows);
  problem.columns(theta, out.subarray(split));
  problem.derivatives(theta, coefficients, out.subarray(0, split));
  return out;
}

/** An asymmetry is a ratio of areas, so that one that is held would keep the rounding of their covariance. */
function withoutHeldVariance(fit: SpectrumFit): SpectrumFit {
  const held = fit.constrained?.held.asymmetry ?? [];
  if (held.length === 0) return fit;
  const { lines } = fit;
  const k = lines.ns.length;
  const size = 4 * k;
  const covariance = lines.covariance.slice();
  for (const n of held) {
    const i = 3 * k + lines.ns.indexOf(n);
    for (let j = 0; j < size; j++) {
      covariance[i * size + j] = 0;
      covariance[j * size + i] = 0;
    }
  }
  return { ...fit, lines: { ...lines, covariance } };
}

/** The linear coefficients of the plain model at its start. */
function plainCoefficients(problem: SpectrumProblem, theta: Float64Array): Float64Array {
  const columns = new Float64Array(problem.rows * problem.linear);
  problem.columns(theta, columns);
  return linearLeastSquares(columns, problem.rows, problem.linear, problem.data, problem.weights)
    .coefficients;
}
