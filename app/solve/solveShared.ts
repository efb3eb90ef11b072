import { NO_WATCH } from "../base/index.ts";
import { analyseShared, reduceMember, type MemberColumns } from "./sharedCovariance.ts";
import { ArrowStep, type ArrowBlock, type ArrowResult } from "./arrowStep.ts";
import { LinearStage } from "./linearStage.ts";
import { SteeringBuilder } from "./steering.ts";
import type {
  CondensedProblem,
  SeparableProblem,
  SeparableSolution,
  SolveOptions,
  Termination,
  Tolerances,
} from "./types.ts";

const EPSILON = 2 ** -52;
/** As in solveSeparable.ts: a stop by step or cost is believed only where the undamped step promises less. */
const HONEST_PROMISE = 1e-10;
/** Damping, relative to the largest length each column had, that a refused undamped step is followed by. */
const FIRST_DAMPING = 1e-3;
/** Below this, damping changes nothing any more and is dropped. */
const LEAST_DAMPING = 1e-8;

/** One of several problems that are solved together. */
export interface SharedMember {
  readonly problem: SeparableProblem;
  /** Start of its theta; the places of shared parameters are overwritten by the common start. */
  readonly start: Float64Array;
  readonly lower?: Float64Array | undefined;
  readonly upper?: Float64Array | undefined;
  /** Place in theta of each shared parameter, -1 where this member does not depend on it. */
  readonly sharedAt: Int32Array;
}

export interface SharedOptions {
  /** Bounds of the shared parameters (q). */
  readonly lower?: Float64Array | undefined;
  readonly upper?: Float64Array | undefined;
  /** These as in SolveOptions, with the same defaults. */
  readonly maxIterations?: number | undefined;
  readonly costTolerance?: number | undefined;
  readonly gradientTolerance?: number | undefined;
  readonly stepTolerance?: number | undefined;
  readonly watch?: SolveOptions["watch"];
  readonly answer?: SolveOptions["answer"];
}

export interface SharedSolution {
  /** (q) and their covariance (q x q, row-major). */
  readonly shared: Float64Array;
  readonly sharedCovariance: Float64Array;
  /**
   * One solution a member. Its covariance holds the shared parameters at their places, everything else marginal over
   * them; its degrees of freedom count its own parameters only.
   */
  readonly members: readonly SeparableSolution[];
  /**
   * d(theta, c)/d(shared) of each member when everything of its own is refitted ((p + k) x q, row-major). The covariance
   * of a parameter i of member a with j of another member b is sum_gh S_a(i,g) C(g,h) S_b(j,h).
   */
  readonly sensitivity: readonly Float64Array[];
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly termination: Termination;
  readonly converged: boolean;
  readonly iterations: number;
  readonly evaluations: number;
  readonly reached: Tolerances;
  readonly tolerances: Tolerances;
  readonly remaining: number;
  /** -1 held by the lower bound, 1 by the upper, 0 free (q). */
  readonly activeBounds: Int8Array;
}

/** What one sweep over one member's data leaves behind. */
interface MemberState {
  readonly coefficients: Float64Array;
  readonly cost: number;
  /** (p x p) projected normal matrix, (p) gradient and (p) lengths of the projected derivatives. */
  readonly normal: Float64Array;
  readonly gradient: Float64Array;
  readonly projected: Float64Array;
  readonly plain: Float64Array;
}

/**
 * What      Several separable problems in one least-squares fit, some of their nonlinear parameters shared:
 *           min over s, theta_a, c_a of sum_a |W_a (y_a - Phi_a(theta_a, s) c_a)|^2. The linear coefficients go by
 *           variable projection; the normal matrix of the rest is an arrow (a block for each member, coupled through
 *           the shared parameters only), so that each step eliminates the members one by one and solves a small
 *           system in s. Cost and memory grow linearly with the number of members.
 * Shapes    members (N), shared (q); see the interfaces.
 * Units     those of the problems; weights are 1/sigma.
 * Domain    as solveSeparable; a member may lack a shared parameter.
 * Accuracy  tests/app/solve/shared.test.ts: the same solution and covariance as one dense fit.
 * Source    Golub and Pereyra, SIAM J. Numer. Anal. 10, 413 (1973); block-arrow elimination: Bjorck, Numerical Methods
 *           for Least Squares Problems (1996), 6.3; damping after Nielsen, IMM-REP-1999-05 (1999); scaling and tests for
 *           stopping as in solveSeparable.ts.
 */
export function solveShared(
  members: readonly SharedMember[],
  start: Float64Array,
  options: SharedOptions = {},
): SharedSolution {
  if (members.every(({ problem }) => problem.condense === undefined))
    return new SharedSearch(members, start, options).run();
  return solveCondensed(members, start, options);
}

/** As in solveSeparable.ts. */
const MOST_ROUNDS = 4;
const LEAST_FULL_STEPS = 4;

/** Most of the way on the condensed rows of those members that have them, the end on every row. */
function solveCondensed(
  members: readonly SharedMember[],
  start: Float64Array,
  options: SharedOptions,
): SharedSolution {
  const most = options.maxIterations ?? 200;
  const placed = members.map((member) => new Member(member, start.length));
  for (const member of placed) member.place(start);
  let thetas: readonly Float64Array[] = placed.map(({ theta }) => theta);
  let shared = start;
  let condensed = members.map(({ problem }, a) => problem.condense?.(thetas[a]!) ?? null);
  let iterations = 0;
  let evaluations = 0;
  let converged = false;
  for (let round = 0; round < MOST_ROUNDS && condensed.some((one) => one !== null); round++) {
    const few = members.map((member, a): SharedMember => ({
      ...member,
      problem: condensed[a]?.problem ?? member.problem,
      start: thetas[a]!,
    }));
    const search = new SharedSearch(few, shared, { ...options, maxIterations: most - iterations });
    const solution = search.run(options.answer === "condensed");
    // A model that is not finite on the nodes may be so on the points too, but it is those that count.
    if (solution.termination === "notFinite") break;
    thetas = solution.members.map(({ theta }) => theta);
    shared = solution.shared;
    iterations += solution.iterations;
    evaluations += solution.evaluations;
    converged = solution.converged;
    const serve = condensed.every((one, a) => one === null || one.serves(thetas[a]!));
    if (solution.termination === "cancelled" || serve || iterations >= most) {
      if (options.answer === "condensed")
        return withEveryRow(solution, members, condensed, iterations, evaluations);
      break;
    }
    condensed = members.map(({ problem }, a) => problem.condense?.(thetas[a]!) ?? null);
  }
  const all = members.map((member, a): SharedMember => ({ ...member, start: thetas[a]! }));
  const left = Math.max(most - iterations, converged ? LEAST_FULL_STEPS : 0);
  const solution = new SharedSearch(all, shared, { ...options, maxIterations: left }).run();
  return {
    ...solution,
    iterations: solution.iterations + iterations,
    evaluations: solution.evaluations + evaluations,
  };
}

/** Chi square and degrees of freedom of every row; fitted values and residuals stay those of the condensed rows. */
function withEveryRow(
  solution: SharedSolution,
  members: readonly SharedMember[],
  condensed: readonly (CondensedProblem | null)[],
  iterations: number,
  evaluations: number,
): SharedSolution {
  const used = ({ weights }: SeparableProblem): number =>
    weights.reduce((sum, weight) => sum + (weight === 0 ? 0 : 1), 0);
  let lost = 0;
  let left = 0;
  const parts = solution.members.map((member, a): SeparableSolution => {
    const few = condensed[a];
    if (few === null || few === undefined) return member;
    lost += few.lost;
    const more = used(members[a]!.problem) - used(few.problem);
    left += more;
    return {
      ...member,
      chi2: member.chi2 + few.lost,
      degreesOfFreedom: member.degreesOfFreedom + more,
    };
  });
  return {
    ...solution,
    members: parts,
    chi2: solution.chi2 + lost,
    degreesOfFreedom: solution.degreesOfFreedom + left,
    iterations,
    evaluations,
  };
}

class SharedSearch {
  private readonly members: readonly Member[];
  private readonly q: number;
  private readonly options: SharedOptions;
  private readonly maxIterations: number;
  private readonly tolerance: { gradient: number; step: number; cost: number };
  private readonly lower: Float64Array;
  private readonly upper: Float64Array;
  private readonly arrow: ArrowStep;
  private readonly desks = new Map<string, Desk>();
  private readonly longestShared: Float64Array;
  private readonly dataSquare: number;
  private readonly rows: number;
  private shared: Float64Array;
  private states: readonly MemberState[] = [];
  private cost = Infinity;
  private iterations = 0;
  private evaluations = 0;
  private covariance = true;
  private readonly reached = { gradient: Infinity, step: Infinity, cost: Infinity };

  constructor(members: readonly SharedMember[], start: Float64Array, options: SharedOptions) {
    const q = start.length;
    this.q = q;
    this.options = options;
    this.maxIterations = options.maxIterations ?? 200;
    this.tolerance = {
      gradient: options.gradientTolerance ?? 1e-9,
      step: options.stepTolerance ?? 1e-12,
      cost: options.costTolerance ?? 1e-13,
    };
    this.lower = options.lower ?? new Float64Array(q).fill(-Infinity);
    this.upper = options.upper ?? new Float64Array(q).fill(Infinity);
    this.shared = start.map((value, g) => clamp(value, this.lower[g]!, this.upper[g]!));
    this.members = members.map((one) => new Member(one, q));
    this.arrow = new ArrowStep(q);
    this.longestShared = new Float64Array(q);
    let dataSquare = 0;
    let rows = 0;
    for (const member of this.members) {
      member.place(this.shared);
      dataSquare += member.dataSquare();
      rows += member.used.length;
    }
    this.dataSquare = dataSquare;
    this.rows = rows;
  }

  /** `covariance` false where only the place matters. */
  run(covariance = true): SharedSolution {
    this.covariance = covariance;
    const { tolerance, options } = this;
    const watch = options.watch ?? NO_WATCH;
    const floor = 16 * EPSILON * EPSILON * this.dataSquare;
    const first = this.evaluate(this.members.map((member) => member.theta));
    if (first === null) return this.finish("cancelled");
    this.cost = costOf(first);
    if (!Number.isFinite(this.cost)) return this.finish("notFinite");
    this.states = first;

    let damping = 0;
    let leastPromise = Infinity;
    let stalled = 0;
    let refusedBlind = false;
    const allowance = 10 * this.maxIterations + 20;
    for (;;) {
      if (watch.cancelled()) return this.finish("cancelled");
      const { blocks, sharedScale } = this.blocks();
      this.reached.gradient = this.largestCosine(blocks);
      if (this.reached.gradient <= tolerance.gradient || this.cost === 0) return this.finish("gradient");
      if (this.iterations >= this.maxIterations) return this.finish("iterationLimit");

      for (let growth = 4; ; growth *= 2) {
        if (watch.cancelled()) return this.finish("cancelled");
        if (this.evaluations > allowance) return this.finish("iterationLimit");
        const noise =
          64 * EPSILON * (this.cost + Math.sqrt((this.dataSquare * this.cost) / this.rows)) + floor;
        const low = this.lower.map((bound, g) => bound - this.shared[g]!);
        const high = this.upper.map((bound, g) => bound - this.shared[g]!);
        const free = this.arrow.find(blocks, sharedScale, low, high, 0);
        const predictedFree = free.predicted;
        const blind: boolean = !refusedBlind && predictedFree <= noise;
        if (blind) {
          const seen = Math.max(predictedFree, this.reached.cost * this.cost);
          if (predictedFree > 0.9 * leastPromise && seen <= 8 * noise && ++stalled === 2)
            return this.finish("cost");
          leastPromise = Math.min(leastPromise, predictedFree);
        }
        const step: ArrowResult =
          blind || damping === 0 ? free : this.arrow.find(blocks, sharedScale, low, high, damping);
        const trialShared = this.shared.map((value, g) =>
          clamp(value + step.shared[g]!, this.lower[g]!, this.upper[g]!),
        );
        const trial = this.members.map((member, a) => member.moved(step.own[a]!, trialShared));
        const moved =
          trialShared.some((value, g) => value !== this.shared[g]!) ||
          trial.some((theta, a) => theta.some((value, j) => value !== this.members[a]!.theta[j]!));
        const honest = predictedFree <= HONEST_PROMISE * this.cost + floor;
        if (!moved) {
          this.reached.step = 0;
          return this.finish(honest ? "step" : "iterationLimit");
        }
        const states = this.evaluate(trial);
        if (states === null) return this.finish("cancelled");
        const cost = costOf(states);
        if (!Number.isFinite(cost)) {
          refusedBlind = true;
          damping = Math.max(10 * damping, FIRST_DAMPING);
          continue;
        }
        const actual = this.cost - cost;
        const gain: number = step.predicted > 0 ? actual / step.predicted : -1;
        const accepted: boolean = gain >= 1e-4 || (blind && actual >= -4 * noise);
        refusedBlind = !accepted && (blind || refusedBlind);
        if (!accepted) damping = Math.max(growth * damping, FIRST_DAMPING);
        else if (gain < 0.25 && !blind) damping = Math.max(2 * damping, FIRST_DAMPING);
        else if (gain > 0.75) damping = damping / 10 < LEAST_DAMPING ? 0 : damping / 10;

        this.reached.step = step.size > 0 ? step.length / step.size : Infinity;
        this.reached.cost = Math.max(Math.abs(actual), step.predicted) / this.cost;
        const resolved = tolerance.cost * this.cost + floor;
        const costDone = honest && Math.abs(actual) <= resolved && step.predicted <= resolved && gain <= 2;
        const stepDone = honest && this.reached.step <= tolerance.step;
        if (accepted) {
          this.cost = cost;
          this.states = states;
          this.shared = trialShared;
          this.members.forEach((member, a) => (member.theta = trial[a]!));
          this.iterations++;
          watch.report(this.iterations / this.maxIterations, `least squares, iteration ${this.iterations}`);
        }
        if (costDone || stepDone) return this.finish(costDone ? "cost" : "step");
        if (accepted) break;
      }
    }
  }

  /** One sweep over every member's data; null when cancelled on the way. */
  private evaluate(thetas: readonly Float64Array[]): MemberState[] | null {
    this.evaluations++;
    const watch = this.options.watch ?? NO_WATCH;
    const states: MemberState[] = [];
    for (const [a, member] of this.members.entries()) {
      if (watch.cancelled()) return null;
      const state = this.deskOf(member).evaluate(member, thetas[a]!);
      states.push(state);
      if (!Number.isFinite(state.cost)) break;
    }
    return states;
  }

  /** Members of one size share their working memory. */
  private deskOf(member: Member): Desk {
    const { rows, nonlinear, linear } = member.problem;
    const key = `${rows}/${member.used.length}/${nonlinear}/${linear}`;
    let desk = this.desks.get(key);
    if (desk === undefined) {
      desk = new Desk(rows, member.used.length, nonlinear, linear);
      this.desks.set(key, desk);
    }
    return desk;
  }

  private blocks(): { blocks: ArrowBlock[]; sharedScale: Float64Array } {
    const lengths = new Float64Array(this.q);
    const blocks = this.members.map((member, a): ArrowBlock => {
      const state = this.states[a]!;
      for (let j = 0; j < member.longest.length; j++)
        member.longest[j] = Math.max(member.longest[j]!, state.projected[j]!);
      for (let g = 0; g < this.q; g++) {
        const at = member.sharedAt[g]!;
        if (at >= 0) lengths[g]! += state.projected[at]! ** 2;
      }
      return {
        normal: state.normal,
        gradient: state.gradient,
        scale: member.scale(),
        low: member.lower.map((bound, j) => bound - member.theta[j]!),
        high: member.upper.map((bound, j) => bound - member.theta[j]!),
        theta: member.theta,
        sharedAt: member.sharedAt,
        isShared: member.isShared,
      };
    });
    const sharedScale = new Float64Array(this.q);
    for (let g = 0; g < this.q; g++) {
      this.longestShared[g] = Math.max(this.longestShared[g]!, Math.sqrt(lengths[g]!));
      sharedScale[g] =
        this.longestShared[g]! > 0 ? this.longestShared[g]! : 1 / (Math.abs(this.shared[g]!) || 1);
    }
    return { blocks, sharedScale };
  }

  /** Largest cosine between the whole residual and a derivative along which its parameter may still move. */
  private largestCosine(blocks: readonly ArrowBlock[]): number {
    const length = Math.sqrt(this.cost);
    if (length === 0) return 0;
    let largest = 0;
    const sharedGradient = new Float64Array(this.q);
    const sharedSquare = new Float64Array(this.q);
    const sharedPlain = new Float64Array(this.q);
    blocks.forEach((block, a) => {
      const { projected, plain, gradient } = this.states[a]!;
      for (let j = 0; j < gradient.length; j++) {
        if (block.isShared[j] === 1) continue;
        const g = gradient[j]!;
        if ((g <= 0 && block.low[j] === 0) || (g >= 0 && block.high[j] === 0)) continue;
        if (!(projected[j]! > 1e-12 * plain[j]!)) continue;
        largest = Math.max(largest, Math.abs(g) / (projected[j]! * length));
      }
      for (let g = 0; g < this.q; g++) {
        const at = block.sharedAt[g]!;
        if (at < 0) continue;
        sharedGradient[g]! += gradient[at]!;
        sharedSquare[g]! += projected[at]! ** 2;
        sharedPlain[g]! += plain[at]! ** 2;
      }
    });
    for (let g = 0; g < this.q; g++) {
      const value = sharedGradient[g]!;
      if (value <= 0 && this.shared[g] === this.lower[g]) continue;
      if (value >= 0 && this.shared[g] === this.upper[g]) continue;
      if (!(sharedSquare[g]! > 1e-24 * sharedPlain[g]!)) continue;
      largest = Math.max(largest, Math.abs(value) / (Math.sqrt(sharedSquare[g]!) * length));
    }
    return largest;
  }

  private finish(termination: Termination): SharedSolution {
    const { q } = this;
    const known =
      this.covariance &&
      Number.isFinite(this.cost) &&
      termination !== "cancelled" &&
      termination !== "notFinite";
    if (known) this.reached.gradient = this.largestCosine(this.blocks().blocks);
    const activeBounds = new Int8Array(q);
    for (let g = 0; g < q; g++) {
      let gradient = 0;
      this.members.forEach((member, a) => {
        const at = member.sharedAt[g]!;
        if (at >= 0) gradient += this.states[a]?.gradient[at] ?? 0;
      });
      activeBounds[g] = heldBy(this.shared[g]!, this.lower[g]!, this.upper[g]!, gradient);
    }
    const parts = this.members.map((member, a) =>
      describeMember(member, this.deskOf(member), this.states[a], known, activeBounds),
    );
    const analysis = analyseShared(
      parts.map((part) => part.columns),
      q,
      Int32Array.from({ length: q }, (_, g) => g).filter((g) => activeBounds[g] === 0),
    );
    const converged = termination === "gradient" || termination === "step" || termination === "cost";
    let rank = analysis.sharedRank;
    const members = parts.map((part, a): SeparableSolution => {
      const own = analysis.members[a]!;
      rank += own.rank;
      return {
        theta: this.members[a]!.theta,
        coefficients: part.coefficients,
        fitted: part.fitted,
        residuals: part.residuals,
        chi2: part.chi2,
        degreesOfFreedom: this.members[a]!.used.length - own.rank,
        termination,
        converged,
        iterations: this.iterations,
        evaluations: this.evaluations,
        reached: { ...this.reached },
        tolerances: { ...this.tolerance },
        remaining: analysis.remaining,
        rank: own.rank,
        condition: own.condition,
        activeBounds: part.activeBounds,
        undetermined: own.undetermined,
        covariance: own.covariance,
      };
    });
    return {
      shared: this.shared,
      sharedCovariance: analysis.sharedCovariance,
      members,
      sensitivity: analysis.members.map((one) => one.sensitivity),
      chi2: this.cost,
      degreesOfFreedom: this.rows - rank,
      termination,
      converged,
      iterations: this.iterations,
      evaluations: this.evaluations,
      reached: { ...this.reached },
      tolerances: { ...this.tolerance },
      remaining: analysis.remaining,
      activeBounds,
    };
  }
}

/** One problem with what the search keeps of it. */
class Member {
  readonly problem: SeparableProblem;
  readonly sharedAt: Int32Array;
  readonly isShared: Uint8Array;
  readonly lower: Float64Array;
  readonly upper: Float64Array;
  /** Rows with a weight. */
  readonly used: Int32Array;
  readonly longest: Float64Array;
  theta: Float64Array;

  constructor(member: SharedMember, q: number) {
    const { problem, start, sharedAt } = member;
    const p = problem.nonlinear;
    if (start.length !== p) throw new Error("start needs one entry a nonlinear parameter");
    if (sharedAt.length !== q) throw new Error("sharedAt needs one entry a shared parameter");
    this.problem = problem;
    this.sharedAt = sharedAt;
    this.isShared = new Uint8Array(p);
    for (const at of sharedAt) if (at >= 0) this.isShared[at] = 1;
    this.lower = member.lower ?? new Float64Array(p).fill(-Infinity);
    this.upper = member.upper ?? new Float64Array(p).fill(Infinity);
    this.longest = new Float64Array(p);
    const used: number[] = [];
    for (let i = 0; i < problem.rows; i++) {
      const w = problem.weights[i]!;
      if (!(w >= 0)) throw new Error("weights must not be negative or NaN");
      if (w > 0) used.push(i);
    }
    this.used = Int32Array.from(used);
    this.theta = start.map((value, j) => clamp(value, this.lower[j]!, this.upper[j]!));
  }

  place(shared: Float64Array): void {
    for (let g = 0; g < shared.length; g++)
      if (this.sharedAt[g]! >= 0) this.theta[this.sharedAt[g]!] = shared[g]!;
  }

  dataSquare(): number {
    const { data, weights } = this.problem;
    let sum = 0;
    for (const i of this.used) sum += (data[i]! * weights[i]!) ** 2;
    return sum;
  }

  scale(): Float64Array {
    return this.longest.map((length, j) => (length > 0 ? length : 1 / (Math.abs(this.theta[j]!) || 1)));
  }

  /** theta after a step of its own parameters and the shared ones. */
  moved(delta: Float64Array, shared: Float64Array): Float64Array {
    const theta = this.theta.map((value, j) =>
      this.isShared[j] === 1 ? value : clamp(value + delta[j]!, this.lower[j]!, this.upper[j]!),
    );
    for (let g = 0; g < shared.length; g++) if (this.sharedAt[g]! >= 0) theta[this.sharedAt[g]!] = shared[g]!;
    return theta;
  }
}

/** Working memory for members of one size: filled anew by each of them. */
class Desk {
  readonly rawColumns: Float64Array;
  readonly rawDerivatives: Float64Array;
  readonly rawOffset: Float64Array;
  readonly phi: Float64Array;
  readonly derivative: Float64Array;
  readonly target: Float64Array;
  readonly residual: Float64Array;
  private readonly stage: LinearStage;
  private readonly builder: SteeringBuilder;

  constructor(rows: number, m: number, p: number, k: number) {
    this.rawColumns = new Float64Array(rows * k);
    this.rawDerivatives = new Float64Array(rows * p);
    this.rawOffset = new Float64Array(rows);
    this.phi = new Float64Array(m * k);
    this.derivative = new Float64Array(m * p);
    this.target = new Float64Array(m);
    this.residual = new Float64Array(m);
    this.stage = new LinearStage(m, k, m);
    this.builder = new SteeringBuilder(m, p, k, "auto", 1);
  }

  /** Columns, coefficients and residual at theta; the cost, NaN where the model is not finite. */
  project(member: Member, theta: Float64Array, coefficients: Float64Array): number {
    const { problem, used } = member;
    const { rows, linear: k, data, weights } = problem;
    const m = used.length;
    if (k > 0) problem.columns(theta, this.rawColumns);
    if (problem.offset === undefined) this.rawOffset.fill(0);
    else problem.offset(theta, this.rawOffset);
    let check = gather(this.rawColumns, rows, k, used, weights, this.phi);
    for (let r = 0; r < m; r++) {
      const i = used[r]!;
      this.target[r] = (data[i]! - this.rawOffset[i]!) * weights[i]!;
      check += this.rawOffset[i]! * 0;
    }
    if (check !== 0) return NaN;
    return this.stage.solve(this.phi, this.target, coefficients, this.residual);
  }

  /** Weighted derivatives at the theta of the last `project`; false where not finite. */
  differentiate(member: Member, theta: Float64Array, coefficients: Float64Array): boolean {
    const { problem, used } = member;
    if (problem.nonlinear === 0) return true;
    problem.derivatives(theta, coefficients, this.rawDerivatives);
    return (
      gather(this.rawDerivatives, problem.rows, problem.nonlinear, used, problem.weights, this.derivative) ===
      0
    );
  }

  evaluate(member: Member, theta: Float64Array): MemberState {
    const { nonlinear: p, linear: k } = member.problem;
    const coefficients = new Float64Array(k);
    const normal = new Float64Array(p * p);
    const cost = this.project(member, theta, coefficients);
    const failed: MemberState = {
      coefficients,
      cost: NaN,
      normal,
      gradient: new Float64Array(p),
      projected: new Float64Array(p),
      plain: new Float64Array(p),
    };
    if (!Number.isFinite(cost) || !this.differentiate(member, theta, coefficients)) return failed;
    const steering = this.builder.build(this.stage, this.phi, this.derivative, this.residual);
    if (steering.orthogonal) squareTriangle(steering.matrix, p, normal);
    else normal.set(steering.matrix);
    return {
      coefficients,
      cost,
      normal,
      gradient: steering.gradient.slice(),
      projected: this.builder.projected.slice(),
      plain: this.builder.plain.slice(),
    };
  }
}

interface MemberDescription {
  readonly columns: MemberColumns;
  readonly coefficients: Float64Array;
  readonly fitted: Float64Array;
  readonly residuals: Float64Array;
  readonly chi2: number;
  readonly activeBounds: Int8Array;
}

/** Model, residuals and the reduced columns of one member at the end. */
function describeMember(
  member: Member,
  desk: Desk,
  state: MemberState | undefined,
  known: boolean,
  sharedBounds: Int8Array,
): MemberDescription {
  const { problem, used, theta, sharedAt, isShared } = member;
  const { rows, nonlinear: p, linear: k } = problem;
  const m = used.length;
  const coefficients = new Float64Array(k);
  const chi2 = desk.project(member, theta, coefficients);
  const usable = known && desk.differentiate(member, theta, coefficients);
  const fitted = new Float64Array(rows);
  const residuals = new Float64Array(rows);
  for (let i = 0; i < rows; i++) {
    let sum = desk.rawOffset[i]!;
    for (let j = 0; j < k; j++) sum += coefficients[j]! * desk.rawColumns[j * rows + i]!;
    fitted[i] = sum;
  }
  for (let r = 0; r < m; r++) residuals[used[r]!] = desk.residual[r]!;
  const activeBounds = new Int8Array(p);
  const own: number[] = [];
  for (let j = 0; j < p; j++) {
    if (isShared[j] === 1) {
      activeBounds[j] = sharedBounds[sharedAt.indexOf(j)]!;
      continue;
    }
    activeBounds[j] = heldBy(theta[j]!, member.lower[j]!, member.upper[j]!, state?.gradient[j] ?? 0);
    if (activeBounds[j] === 0) own.push(j);
  }
  return {
    columns: {
      parameters: p + k,
      own: Int32Array.from([...own, ...Array.from({ length: k }, (_, j) => p + j)]),
      sharedAt,
      // Reduced at once: the desk is another member's next.
      triangle: usable ? triangleOf(desk, own, sharedAt, m, k) : null,
    },
    coefficients,
    fitted,
    residuals,
    chi2,
    activeBounds,
  };
}

/** R of [own theta | Phi | shared | residual], by rows. */
function triangleOf(
  desk: Desk,
  own: readonly number[],
  sharedAt: Int32Array,
  m: number,
  k: number,
): Float64Array {
  const ownColumns = new Float64Array(m * own.length);
  own.forEach((j, at) => ownColumns.set(desk.derivative.subarray(j * m, (j + 1) * m), at * m));
  const shared = new Float64Array(m * sharedAt.length);
  sharedAt.forEach((j, g) => {
    if (j >= 0) shared.set(desk.derivative.subarray(j * m, (j + 1) * m), g * m);
  });
  return reduceMember([ownColumns, desk.phi, shared, desk.residual], [own.length, k, sharedAt.length, 1], m);
}

function heldBy(value: number, lower: number, upper: number, gradient: number): -1 | 0 | 1 {
  if (value === lower && (gradient <= 0 || value === upper)) return -1;
  return value === upper && gradient >= 0 ? 1 : 0;
}

function costOf(states: readonly MemberState[]): number {
  let sum = 0;
  for (const state of states) sum += state.cost;
  return sum;
}

/** A = R'R for an upper triangle R (p x p, row-major). */
function squareTriangle(r: Float64Array, p: number, out: Float64Array): void {
  for (let i = 0; i < p; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let l = 0; l <= j; l++) sum += r[l * p + i]! * r[l * p + j]!;
      out[i * p + j] = sum;
      out[j * p + i] = sum;
    }
  }
}

/** Weighted rows in use; returns 0 where all are finite, NaN else. */
function gather(
  raw: Float64Array,
  rawRows: number,
  count: number,
  used: Int32Array,
  weights: Float64Array,
  out: Float64Array,
): number {
  const m = used.length;
  let check = 0;
  for (let j = 0; j < count; j++) {
    const from = j * rawRows;
    const to = j * m;
    for (let r = 0; r < m; r++) {
      const i = used[r]!;
      const value = raw[from + i]! * weights[i]!;
      out[to + r] = value;
      check += value * 0;
    }
  }
  return check;
}

function clamp(value: number, low: number, high: number): number {
  return Math.min(Math.max(value, low), high);
}
