import { NO_WATCH } from "../base/index.ts";
import { Companion } from "./companion.ts";
import { analyseJacobian, type JacobianAnalysis } from "./covariance.ts";
import { scaledNorm, StepFinder } from "./dampedStep.ts";
import type { Steering } from "./dampedStep.ts";
import { passEveryRow } from "./everyRow.ts";
import { gather, weigh } from "./gather.ts";
import { sumOfSquares, transposedTimes } from "./gram.ts";
import { LinearStage } from "./linearStage.ts";
import { SteeringBuilder } from "./steering.ts";
import type {
  CondensedProblem,
  SeparableProblem,
  SeparableSolution,
  SolveOptions,
  Termination,
} from "./types.ts";
import { agree, imageSquares, weakDirections, type Directions } from "./weakDirections.ts";

const EPSILON = 2 ** -52;

/**
 * A stop by `step` or `cost` is believed only when the undamped step, too, promises less than this part of the cost:
 * a radius that has collapsed for another reason is not convergence.
 */
const HONEST_PROMISE = 1e-10;

/**
 * What      Separable least squares, min over theta and c of |W (y - offset(theta) - Phi(theta) c)|^2, by variable
 *           projection: c is solved exactly for every theta, and the Levenberg-Marquardt step in theta uses the
 *           projected derivative J = P D, P the projection off the columns of Phi (Kaufman's form). Where the problem can
 *           be condensed the search runs on the few rows first, and ends on every row.
 * Shapes    SeparableProblem in types.ts; start (p).
 * Units     those of the problem; weights are 1/sigma, so that chi2 and covariance need no further scale.
 * Domain    a start outside the bounds is moved onto them; a model that is not finite at a trial counts as a refused
 *           step, at the start as `notFinite`.
 * Accuracy  tests/reference/strd.test.ts (certified problems), tests/app/solve/separable.test.ts (pulls).
 * Source    Golub and Pereyra, SIAM J. Numer. Anal. 10, 413 (1973); Kaufman, BIT 15, 49 (1975); More (1978) for
 *           scaling, radius and gain; the tests for stopping are More's with the step without limit added.
 */
export function solveSeparable(
  problem: SeparableProblem,
  start: Float64Array,
  options: SolveOptions = {},
): SeparableSolution {
  const steering = options.steering ?? "auto";
  if (problem.condense === undefined || steering !== "auto") return new Search(problem, start, options).run();
  return solveCondensed(problem, problem.condense.bind(problem), start, options);
}

/** New condensed rows are made this often at most while the parameters move away from those they were made for. */
const MOST_ROUNDS = 4;
/** Steps on every row after a search that converged on few: one as a rule, a few where the rows served badly. */
const LEAST_FULL_STEPS = 4;

function solveCondensed(
  problem: SeparableProblem,
  condense: (theta: Float64Array) => CondensedProblem | null,
  start: Float64Array,
  options: SolveOptions,
): SeparableSolution {
  const most = options.maxIterations ?? 200;
  let condensed = condense(start);
  let theta = start;
  let iterations = 0;
  let evaluations = 0;
  let converged = false;
  let coefficients: Float64Array = new Float64Array(problem.linear);
  for (let round = 0; round < MOST_ROUNDS && condensed !== null; round++) {
    const rough = options.answer === "condensed";
    const inner = { ...options, maxIterations: most - iterations, stride: 1 };
    const search = new Search(condensed.problem, theta, inner, { covariance: rough });
    const solution = search.run();
    // A model that is not finite on the nodes may be so on the points too, but it is those that count.
    if (solution.termination === "notFinite") break;
    theta = solution.theta;
    coefficients = solution.coefficients;
    iterations += solution.iterations;
    evaluations += solution.evaluations;
    converged = solution.converged;
    const serves = condensed.serves(theta);
    if (solution.termination === "cancelled" || serves || iterations >= most) {
      if (rough) return withEveryRow(solution, problem, condensed, iterations, evaluations);
      if (converged && serves) {
        const sure = confirmed(problem, search.conclude(solution.termination), search);
        if (sure !== null) {
          iterations += sure.iterations;
          evaluations += sure.evaluations;
          return { ...sure, iterations, evaluations };
        }
      }
      break;
    }
    condensed = condense(theta);
  }
  const left = Math.max(most - iterations, converged ? LEAST_FULL_STEPS : 0);
  const full = new Search(problem, theta, { ...options, maxIterations: left }, { condensed, coefficients });
  const solution = full.run();
  return {
    ...solution,
    iterations: solution.iterations + iterations,
    evaluations: solution.evaluations + evaluations,
  };
}

/** Passes over every row: one shows that nothing is left to do, or gives the step after which the next one shows it. */
const MOST_PASSES = 3;

/**
 * The answer of condensed rows under every row: their matrix with the gradient of every row gives the steps that are left,
 * mostly none or one, until the linearised minimum of all parameters lies within the tolerance (which no single cosine of the
 * gradient then exceeds), bounds hold and leave go as they did, and the worst determined directions are as long. Null where
 * that does not come about.
 */
function confirmed(
  problem: SeparableProblem,
  first: SeparableSolution,
  search: Search,
): SeparableSolution | null {
  const { nonlinear: p, linear: k, rows, data, weights } = problem;
  const n = p + k;
  let few = first;
  let { coefficients } = first;
  let before = Infinity;
  for (let pass = 0; pass < MOST_PASSES; pass++) {
    const { theta, covariance, rank, activeBounds, tolerances } = few;
    let free = k;
    for (let j = 0; j < p; j++) if (activeBounds[j] === 0) free++;
    if (!few.converged || rank < free) return null;
    const directions = weakDirections(covariance, n);
    const every = passEveryRow(problem, theta, coefficients, directions);
    if (every === null) return null;
    const { residuals, chi2, gradient } = every;
    for (let j = 0; j < p; j++) if (search.boundHeld(j, gradient[j]!) !== activeBounds[j]) return null;
    const step = new Float64Array(n);
    let promise = 0;
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) step[i] = step[i]! + covariance[i * n + j]! * gradient[j]!;
      promise += step[i]! * gradient[i]!;
    }
    promise = Math.max(0, promise);
    const largest = chi2 > 0 ? Math.sqrt(promise / chi2) : 0;
    if (largest <= tolerances.gradient) {
      if (!agree(search.imageSquares(directions), every.squares)) return null;
      return {
        ...few,
        coefficients,
        fitted: data.map((value, i) => value - residuals[i]! / weights[i]!),
        residuals,
        chi2,
        degreesOfFreedom: rows - rank,
        termination: "gradient",
        iterations: pass,
        evaluations: pass + 1,
        reached: { ...few.reached, gradient: largest },
        remaining: Math.sqrt(promise),
      };
    }
    if (!(promise < 0.01 * before)) return null;
    before = promise;
    const next = search.concludeAt(theta.map((value, j) => value + step[j]!));
    if (next === null) return null;
    few = next;
    coefficients = coefficients.map((value, j) => value + step[p + j]!);
  }
  return null;
}

/** Chi square and degrees of freedom of every row; fitted values and residuals stay those of the condensed rows. */
function withEveryRow(
  solution: SeparableSolution,
  { weights }: SeparableProblem,
  { lost }: CondensedProblem,
  iterations: number,
  evaluations: number,
): SeparableSolution {
  const used = weights.reduce((sum, weight) => sum + (weight === 0 ? 0 : 1), 0);
  const chi2 = solution.chi2 + lost;
  return { ...solution, chi2, degreesOfFreedom: used - solution.rank, iterations, evaluations };
}

interface Surroundings {
  /** Rows that give the matrices. */
  readonly condensed?: CondensedProblem | null;
  /** Coefficients at the start, as the condensed rows have them. */
  readonly coefficients?: Float64Array;
  /** Whether the covariance is wanted. Default true. */
  readonly covariance?: boolean;
}

class Search {
  private readonly problem: SeparableProblem;
  private readonly p: number;
  private readonly k: number;
  /** rows in use, and the leading dimension of every weighted matrix */
  private readonly m: number;
  private readonly used: Int32Array;
  private readonly weight: Float64Array;
  private readonly weightedData: Float64Array;
  private readonly lower: Float64Array;
  private readonly upper: Float64Array;
  private readonly options: SolveOptions;
  private readonly maxIterations: number;
  private readonly tolerance: { gradient: number; step: number; cost: number };

  /** Columns or derivatives as the problem writes them, before they are weighted. */
  private readonly raw: Float64Array;
  private readonly rawOffset: Float64Array;
  private readonly derivative: Float64Array;
  private phi: Float64Array;
  private trialPhi: Float64Array;
  private target: Float64Array;
  private trialTarget: Float64Array;
  private readonly stage: LinearStage;
  private readonly builder: SteeringBuilder;
  private readonly wanted: boolean;
  private companion: Companion | null;
  private readonly fullGradient: Float64Array;
  private readonly finder: StepFinder;

  private theta: Float64Array;
  private trial: Float64Array;
  private coefficients: Float64Array;
  private trialCoefficients: Float64Array;
  private residual: Float64Array;
  private trialResidual: Float64Array;
  private cost = Infinity;
  private evaluations = 0;
  private iterations = 0;
  /** derivatives at theta are in `derivative` */
  private haveDerivatives = false;
  /** the raw columns are those at theta, not at a refused trial */
  private rawIsCurrent = false;
  /** largest length that each projected derivative has had */
  private readonly longest: Float64Array;
  private reachedGradient = Infinity;
  private reachedStep = Infinity;
  private reachedCost = Infinity;

  constructor(
    problem: SeparableProblem,
    start: Float64Array,
    options: SolveOptions,
    surroundings: Surroundings = {},
  ) {
    const { rows, nonlinear: p, linear: k } = problem;
    if (problem.data.length !== rows || problem.weights.length !== rows)
      throw new Error("data and weights need one entry a row");
    if (start.length !== p) throw new Error("start needs one entry a nonlinear parameter");
    this.problem = problem;
    this.options = options;
    this.p = p;
    this.k = k;
    this.maxIterations = options.maxIterations ?? 200;
    this.tolerance = {
      gradient: options.gradientTolerance ?? 1e-9,
      step: options.stepTolerance ?? 1e-12,
      cost: options.costTolerance ?? 1e-13,
    };
    let m = 0;
    for (let i = 0; i < rows; i++) if (problem.weights[i] !== 0) m++;
    this.m = m;
    this.used = new Int32Array(m);
    this.weight = new Float64Array(m);
    this.weightedData = new Float64Array(m);
    for (let i = 0, at = 0; i < rows; i++) {
      const w = problem.weights[i]!;
      if (w === 0) continue;
      if (!(w > 0)) throw new Error("weights must not be negative or NaN");
      this.used[at] = i;
      this.weight[at] = w;
      this.weightedData[at++] = problem.data[i]! * w;
    }
    this.lower = options.lower ?? new Float64Array(p).fill(-Infinity);
    this.upper = options.upper ?? new Float64Array(p).fill(Infinity);
    for (let j = 0; j < p; j++) {
      if (!(this.lower[j]! <= this.upper[j]!)) throw new Error("a lower bound lies above its upper bound");
    }
    this.raw = new Float64Array(m === rows ? 0 : rows * Math.max(k, p));
    this.rawOffset = new Float64Array(problem.offset === undefined ? 0 : rows);
    this.phi = new Float64Array(0);
    this.derivative = new Float64Array(m * p);
    this.trialPhi = new Float64Array(m * k);
    this.target = new Float64Array(m);
    this.trialTarget = new Float64Array(m);
    const orthogonal = options.steering === "orthogonal";
    this.stage = new LinearStage(m, k, m, orthogonal);
    this.builder = new SteeringBuilder(m, p, k, options.steering ?? "auto", options.stride ?? 1);
    this.finder = new StepFinder(p);
    this.wanted = surroundings.covariance ?? true;
    const { condensed = null } = surroundings;
    this.companion = condensed === null || p === 0 ? null : new Companion(condensed.problem);
    this.fullGradient = new Float64Array(p);
    this.theta = new Float64Array(p);
    for (let j = 0; j < p; j++) this.theta[j] = clamp(start[j]!, this.lower[j]!, this.upper[j]!);
    this.longest = new Float64Array(p);
    this.trial = new Float64Array(p);
    this.coefficients = surroundings.coefficients?.slice() ?? new Float64Array(k);
    this.trialCoefficients = new Float64Array(k);
    this.residual = new Float64Array(m);
    this.trialResidual = new Float64Array(m);
  }

  run(): SeparableSolution {
    const { p, finder, tolerance, options } = this;
    const watch = options.watch ?? NO_WATCH;
    const scale = new Float64Array(p);
    const low = new Float64Array(p);
    const high = new Float64Array(p);
    const delta = new Float64Array(p);
    // What a sum of squares can resolve when its terms come from subtracting numbers of the size of the data.
    const dataSquare = sumOfSquares(this.weightedData, this.m);
    const floor = 16 * EPSILON * EPSILON * dataSquare;

    this.trial.set(this.theta);
    this.cost = this.evaluateTrial();
    if (!Number.isFinite(this.cost)) return this.finish("notFinite");
    this.acceptTrial();

    let radius = 0;
    let damping = 0;
    let leastPromise = Infinity;
    let stalled = 0;
    let refusedBlind = false;
    const allowance = 10 * this.maxIterations + 20;
    for (;;) {
      if (watch.cancelled()) return this.finish("cancelled");
      if (!this.takeDerivatives()) return this.finish("notFinite");
      let steering = this.steer();
      this.updateScale(scale);
      this.roomWithin(low, high);
      this.reachedGradient = this.largestCosine(steering, low, high);
      if (this.reachedGradient <= tolerance.gradient || this.cost === 0) return this.finish("gradient");
      if (this.iterations >= this.maxIterations) return this.finish("iterationLimit");
      if (this.iterations === 0) radius = this.firstRadius(scale);

      for (;;) {
        if (watch.cancelled()) return this.finish("cancelled");
        if (this.evaluations > allowance) return this.finish("iterationLimit");
        // Rounding error of the cost itself: a smaller fall cannot be seen in it.
        const noise = 64 * EPSILON * (this.cost + Math.sqrt((dataSquare * this.cost) / this.m)) + floor;
        let step = finder.find(steering, scale, low, high, radius, damping, delta);
        // Where even the full step promises less than that, the gradient alone leads, by full steps, for as long as
        // the promise keeps falling.
        const blind: boolean = !refusedBlind && step.predictedFree <= noise;
        if (blind) {
          const seen = Math.max(step.predictedFree, this.reachedCost * this.cost);
          if (step.predictedFree > 0.9 * leastPromise && seen <= 8 * noise && ++stalled === 2) {
            return this.finish("cost");
          }
          leastPromise = Math.min(leastPromise, step.predictedFree);
          if (step.damping > 0) step = finder.find(steering, scale, low, high, Infinity, 0, delta);
        }
        damping = step.damping;
        let moved = false;
        for (let j = 0; j < p; j++) {
          this.trial[j] = clamp(this.theta[j]! + delta[j]!, this.lower[j]!, this.upper[j]!);
          if (this.trial[j] !== this.theta[j]) moved = true;
        }
        if (!moved) {
          this.reachedStep = 0;
          const honest = step.predictedFree <= HONEST_PROMISE * this.cost + floor;
          return this.finish(honest ? "step" : "iterationLimit");
        }
        if (this.iterations === 0) radius = Math.min(radius, step.length);
        const cost = this.evaluateTrial();
        if (!Number.isFinite(cost)) {
          refusedBlind = true;
          radius = 0.25 * Math.min(radius, step.length);
          damping *= 4;
          continue;
        }
        const actual = this.cost - cost;
        const gain = step.predicted > 0 ? actual / step.predicted : -1;
        if (gain <= 0.25) {
          // The minimum of the parabola through both costs and the slope at the start, within a tenth and a half.
          let part = actual >= 0 ? 0.5 : (0.5 * step.slope) / (step.slope - 0.5 * actual);
          if (!(part >= 0.1) || cost >= 100 * this.cost) part = 0.1;
          radius = part * Math.min(radius, 10 * step.length);
          damping /= part;
        } else if (damping === 0 || gain >= 0.75) {
          radius = 2 * step.length;
          damping *= 0.5;
        }
        const accepted: boolean = gain >= 1e-4 || (blind && actual >= -4 * noise);
        refusedBlind = !accepted && (blind || refusedBlind);
        if (blind && accepted) radius = Math.max(radius, 2 * step.length);
        const size = scaledNorm(accepted ? this.trial : this.theta, scale);
        this.reachedStep = size > 0 ? step.length / size : Infinity;
        this.reachedCost = Math.max(Math.abs(actual), step.predicted) / this.cost;
        const honest = step.predictedFree <= HONEST_PROMISE * this.cost + floor;
        const resolved = tolerance.cost * this.cost + floor;
        const costDone = honest && Math.abs(actual) <= resolved && step.predicted <= resolved && gain <= 2;
        const stepDone = honest && step.length <= tolerance.step * size;
        if (accepted) {
          this.cost = cost;
          this.acceptTrial();
          this.iterations++;
          watch.report(this.iterations / this.maxIterations, `least squares, iteration ${this.iterations}`);
        }
        if (costDone || stepDone) return this.finish(costDone ? "cost" : "step");
        if (accepted) break;
        if (this.companion !== null) {
          // Close to the end every step should hold: where one does not, the condensed rows are not trusted.
          this.leaveCompanion();
          steering = this.steer();
          this.updateScale(scale);
        }
        if (this.builder.thinned) {
          // A refused step may be the thinning's fault: from here on every row steers.
          this.builder.useEveryRow();
          this.stage.solve(this.phi, this.target, this.trialCoefficients, this.trialResidual);
          this.builder.build(this.stage, this.phi, this.derivative, this.residual);
          this.updateScale(scale);
        }
      }
    }
  }

  /** Columns, coefficients and residual at `trial`; the cost there, NaN or Infinity where the model is not finite. */
  private evaluateTrial(): number {
    const { problem, m, k, used, weight, trialTarget, raw, rawOffset } = this;
    if (this.trialPhi.length < m * k) this.trialPhi = new Float64Array(m * k);
    const { trialPhi } = this;
    this.evaluations++;
    this.rawIsCurrent = false;
    // Where every row counts the problem writes straight into the matrix.
    const every = m === problem.rows;
    if (k > 0) problem.columns(this.trial, every ? trialPhi : raw);
    const finite = every ? weigh(trialPhi, k, weight) : gather(raw, problem.rows, k, used, weight, trialPhi);
    if (!finite) return NaN;
    if (problem.offset === undefined) {
      trialTarget.set(this.weightedData);
    } else {
      problem.offset(this.trial, rawOffset);
      for (let r = 0; r < m; r++) trialTarget[r] = this.weightedData[r]! - rawOffset[used[r]!]! * weight[r]!;
    }
    if (this.companion !== null && !this.companion.takeColumns(this.trial, this.stage)) this.companion = null;
    const { trialCoefficients, trialResidual } = this;
    if (this.companion !== null) {
      trialCoefficients.set(this.coefficients);
      return this.stage.solveWith(trialPhi, trialTarget, trialCoefficients, trialResidual);
    }
    return this.stage.solve(trialPhi, trialTarget, trialCoefficients, trialResidual);
  }

  /** The matrix and gradient at theta, whose columns and derivatives are at hand. */
  private steer(): Steering {
    if (this.companion !== null) {
      transposedTimes(this.derivative, this.p, this.m, this.m, this.residual, this.fullGradient);
      const steering = this.companion.steer(this.fullGradient);
      if (steering !== null) return steering;
      this.leaveCompanion();
    }
    return this.builder.build(this.stage, this.phi, this.derivative, this.residual);
  }

  /** From here on every row gives the matrices. */
  private leaveCompanion(): void {
    this.companion = null;
    this.stage.solve(this.phi, this.target, this.trialCoefficients, this.trialResidual);
  }

  private acceptTrial(): void {
    [this.theta, this.trial] = [this.trial, this.theta];
    [this.phi, this.trialPhi] = [this.trialPhi, this.phi];
    [this.target, this.trialTarget] = [this.trialTarget, this.target];
    [this.coefficients, this.trialCoefficients] = [this.trialCoefficients, this.coefficients];
    [this.residual, this.trialResidual] = [this.trialResidual, this.residual];
    this.haveDerivatives = false;
    this.rawIsCurrent = true;
  }

  private takeDerivatives(): boolean {
    const { problem, p, m, used, weight, raw, derivative } = this;
    const every = m === problem.rows;
    if (p > 0) problem.derivatives(this.theta, this.coefficients, every ? derivative : raw);
    this.haveDerivatives = every
      ? weigh(derivative, p, weight)
      : gather(raw, problem.rows, p, used, weight, derivative);
    if (this.companion !== null && !this.companion.takeDerivatives(this.theta, this.coefficients))
      this.leaveCompanion();
    return this.haveDerivatives;
  }

  private updateScale(scale: Float64Array): void {
    const { projected } = this.companion?.builder ?? this.builder;
    for (let j = 0; j < this.p; j++) {
      this.longest[j] = Math.max(this.longest[j]!, projected[j]!);
      if (this.options.scale !== undefined) scale[j] = 1 / this.options.scale[j]!;
      else scale[j] = this.longest[j]! > 0 ? this.longest[j]! : 1 / (Math.abs(this.theta[j]!) || 1);
    }
  }

  private firstRadius(scale: Float64Array): number {
    if (this.options.scale !== undefined) return 10 * Math.sqrt(this.p);
    return scaledNorm(this.theta, scale) || 1;
  }

  private roomWithin(low: Float64Array, high: Float64Array): void {
    for (let j = 0; j < this.p; j++) {
      low[j] = this.lower[j]! - this.theta[j]!;
      high[j] = this.upper[j]! - this.theta[j]!;
    }
  }

  /** Largest cosine between the residual and a projected derivative along which the parameter may still move. */
  private largestCosine(steering: Steering, low: Float64Array, high: Float64Array): number {
    const { projected, plain } = this.companion?.builder ?? this.builder;
    const length = Math.sqrt(this.cost);
    if (length === 0) return 0;
    let largest = 0;
    for (let j = 0; j < this.p; j++) {
      const g = steering.gradient[j]!;
      if ((g <= 0 && low[j] === 0) || (g >= 0 && high[j] === 0)) continue;
      // A derivative within the span of the linear columns has no direction of its own.
      if (!(projected[j]! > 1e-12 * plain[j]!)) continue;
      largest = Math.max(largest, Math.abs(g) / (projected[j]! * length));
    }
    return largest;
  }

  private finish(termination: Termination): SeparableSolution {
    return this.conclude(termination, this.wanted);
  }

  /** The answer at theta, with its covariance. */
  conclude(termination: Termination, wanted = true): SeparableSolution {
    const { problem, p, k, m } = this;
    const n = p + k;
    const finite = Number.isFinite(this.cost);
    if (!this.rawIsCurrent && finite) {
      if (k > 0) problem.columns(this.theta, this.spare());
      problem.offset?.(this.theta, this.rawOffset);
    }
    const activeBounds = new Int8Array(p);
    const undetermined = new Uint8Array(n);
    const covariance = new Float64Array(n * n).fill(NaN);
    let rank = 0;
    let condition = NaN;
    let remaining = NaN;
    let reached = termination;
    const open = termination !== "cancelled" && termination !== "notFinite";
    if (finite && open && wanted && !this.haveDerivatives) {
      // The last step was accepted: what is reported about the gradient is that of the final point.
      if (this.takeDerivatives()) {
        const steering = this.steer();
        const low = new Float64Array(p);
        const high = new Float64Array(p);
        this.roomWithin(low, high);
        this.reachedGradient = this.largestCosine(steering, low, high);
      } else {
        reached = "notFinite";
      }
    }
    if (this.haveDerivatives && wanted) {
      const free: number[] = [];
      for (let j = 0; j < p; j++) {
        activeBounds[j] = this.boundHeld(j, this.slopeAlong(j));
        if (activeBounds[j] === 0) free.push(j);
      }
      const analysis = this.analyse(free);
      ({ rank, condition, remaining } = analysis);
      const place = [...free, ...Array.from({ length: k }, (_, j) => p + j)];
      covariance.fill(0);
      place.forEach((i, a) => {
        undetermined[i] = analysis.undetermined[a]!;
        place.forEach((j, b) => (covariance[i * n + j] = analysis.covariance[a * place.length + b]!));
      });
    }
    const residuals = new Float64Array(problem.rows);
    const fitted = this.fittedValues(finite);
    for (let r = 0; r < m; r++) residuals[this.used[r]!] = this.residual[r]!;
    return {
      theta: this.theta,
      coefficients: this.coefficients,
      fitted,
      residuals,
      chi2: this.cost,
      degreesOfFreedom: m - rank,
      termination: reached,
      converged: reached === "gradient" || reached === "step" || reached === "cost",
      iterations: this.iterations,
      evaluations: this.evaluations,
      reached: { gradient: this.reachedGradient, step: this.reachedStep, cost: this.reachedCost },
      tolerances: { ...this.tolerance },
      remaining,
      rank,
      condition,
      activeBounds,
      undetermined,
      covariance,
    };
  }

  /** Room for raw columns that are looked at once. */
  private spare(): Float64Array {
    const { problem, m, k, raw } = this;
    if (m < problem.rows) return raw;
    if (this.trialPhi.length < m * k) this.trialPhi = new Float64Array(m * k);
    return this.trialPhi;
  }

  /** The model at every row; by the columns only where a row was left out, or where there is nothing else. */
  private fittedValues(finite: boolean): Float64Array {
    const { problem, k, m, used, weight, residual } = this;
    const { rows, data } = problem;
    const fitted = new Float64Array(rows);
    if (m < rows || !finite) {
      const raw = this.spare();
      if (k > 0) problem.columns(this.theta, raw);
      for (let i = 0; i < rows; i++) {
        let sum = problem.offset === undefined ? 0 : this.rawOffset[i]!;
        for (let j = 0; j < k; j++) sum += this.coefficients[j]! * raw[j * rows + i]!;
        fitted[i] = sum;
      }
    }
    if (finite) for (let r = 0; r < m; r++) fitted[used[r]!] = data[used[r]!]! - residual[r]! / weight[r]!;
    return fitted;
  }

  /** Covariance of the free parameters, from the condensed rows where those agree with every row. */
  private analyse(free: readonly number[]): JacobianAnalysis {
    const { k, m, companion, residual } = this;
    const pick = (derivative: Float64Array, rows: number): Float64Array => {
      if (free.length === this.p) return derivative;
      const columns = new Float64Array(rows * free.length);
      free.forEach((j, at) => columns.set(derivative.subarray(j * rows, (j + 1) * rows), at * rows));
      return columns;
    };
    const all = [pick(this.derivative, m), this.phi];
    const counts = [free.length, k];
    if (companion !== null && (this.rawIsCurrent || companion.takeColumns(this.theta, this.stage))) {
      const { rows } = companion;
      const few = [pick(companion.derivative, rows), companion.phi];
      const gradient = new Float64Array(free.length + k);
      // The gradient along the coefficients is nothing: they are solved for.
      free.forEach((j, at) => (gradient[at] = this.fullGradient[j]!));
      const analysis = analyseJacobian(few, counts, rows, rows, { gradient });
      if (analysis.rank === free.length + k) {
        const directions = weakDirections(analysis.covariance, analysis.rank);
        const squares = imageSquares(few, counts, rows, directions);
        if (agree(squares, imageSquares(all, counts, m, directions))) return analysis;
      }
    }
    return analyseJacobian(all, counts, m, m, { residual }, this.options.answer !== "condensed");
  }

  /** -1 or 1 where the parameter stands at a bound and the cost would fall beyond it (or the bounds coincide). */
  boundHeld(j: number, slope: number): -1 | 0 | 1 {
    const atLower = this.theta[j] === this.lower[j];
    const atUpper = this.theta[j] === this.upper[j];
    if (atLower && (slope <= 0 || atUpper)) return -1;
    return atUpper && slope >= 0 ? 1 : 0;
  }

  private slopeAlong(j: number): number {
    const { m, derivative, residual } = this;
    let g = 0;
    for (let r = 0; r < m; r++) g += derivative[j * m + r]! * residual[r]!;
    return g;
  }

  /** The same at another theta, as near as no step has to be asked for; null outside the bounds or where it is not finite. */
  concludeAt(theta: Float64Array): SeparableSolution | null {
    for (let j = 0; j < this.p; j++)
      if (!(theta[j]! >= this.lower[j]! && theta[j]! <= this.upper[j]!)) return null;
    this.trial.set(theta);
    this.cost = this.evaluateTrial();
    if (!Number.isFinite(this.cost)) return null;
    this.acceptTrial();
    return this.conclude("gradient");
  }

  /** |[D | Phi] v|^2 at theta, whose derivatives must be at hand. */
  imageSquares(directions: Directions): Float64Array {
    return imageSquares([this.derivative, this.phi], [this.p, this.k], this.m, directions);
  }
}

function clamp(value: number, low: number, high: number): number {
  return Math.min(Math.max(value, low), high);
}
