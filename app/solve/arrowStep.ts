import { backSubstitute, choleskyInto, forwardSubstitute } from "./cholesky.ts";

/** One member's part of the normal equations: A = J'J (p x p, row-major), g = J'r, over all of its theta. */
export interface ArrowBlock {
  readonly normal: Float64Array;
  readonly gradient: Float64Array;
  /** Length that each column counts with in the damping (p). */
  readonly scale: Float64Array;
  /** Room to the bounds (p), low <= 0 <= high; not used at the places of shared parameters. */
  readonly low: Float64Array;
  readonly high: Float64Array;
  readonly theta: Float64Array;
  /** Place of each shared parameter, -1 where absent; and the same as a mask over theta. */
  readonly sharedAt: Int32Array;
  readonly isShared: Uint8Array;
}

export interface ArrowResult {
  /** One step a member (p), the shared one at its places too. */
  readonly own: readonly Float64Array[];
  readonly shared: Float64Array;
  /** Fall of the sum of squares that the linear model promises. */
  readonly predicted: number;
  /** |S delta| and |S theta| over all parameters. */
  readonly length: number;
  readonly size: number;
}

/** Relative damping of an undamped step, so that dependent columns do no harm. */
const LEAST_DAMPING = 1e-14;
const MOST_TURNS = 40;

/**
 * What      The step of a Levenberg-Marquardt iteration for a normal matrix in the form of an arrow,
 *           min sum_a |r_a - J_a delta_a|^2 + lambda |S delta|^2 within bounds: every member's own parameters are
 *           eliminated by its Cholesky factor, A_ss - A_so A_oo^-1 A_os is summed over the members and solved for the
 *           shared step, and back substitution gives the rest. Parameters that would cross a bound are set on it and the
 *           others solved again.
 * Shapes    blocks (N members of p_a parameters), shared (q).
 * Units     delta in those of the parameters.
 * Domain    damping 0 is met by 1e-14 of each column's present length. Parameters at a bound whose gradient leads
 *           outward stay there.
 * Accuracy  steers only; the gradient decides where an iteration ends. tests/app/solve/shared.test.ts.
 * Source    Bjorck, Numerical Methods for Least Squares Problems (1996), 6.3.
 */
export class ArrowStep {
  private readonly q: number;

  constructor(q: number) {
    this.q = q;
  }

  find(
    blocks: readonly ArrowBlock[],
    sharedScale: Float64Array,
    low: Float64Array,
    high: Float64Array,
    damping: number,
  ): ArrowResult {
    const { q } = this;
    const own = blocks.map((block) => new Float64Array(block.gradient.length));
    const free = blocks.map((block) =>
      Uint8Array.from(block.gradient, (g, j) =>
        block.isShared[j] === 1 || leadsOut(g, block.low[j]!, block.high[j]!) ? 0 : 1,
      ),
    );
    const shared = new Float64Array(q);
    const total = new Float64Array(q);
    for (const block of blocks)
      for (let g = 0; g < q; g++)
        if (block.sharedAt[g]! >= 0) total[g]! += block.gradient[block.sharedAt[g]!]!;
    const sharedFree = Uint8Array.from(total, (g, i) => (leadsOut(g, low[i]!, high[i]!) ? 0 : 1));
    const ridge = (block: ArrowBlock, j: number): number => {
      if (damping > 0) return damping * block.scale[j]! ** 2;
      const diagonal = block.normal[j * block.gradient.length + j]!;
      return LEAST_DAMPING * (diagonal > 0 ? diagonal : block.scale[j]! ** 2);
    };
    for (let turn = 0; turn < MOST_TURNS; turn++) {
      this.solve(blocks, own, free, shared, sharedFree, ridge, sharedScale, damping);
      if (!settle(blocks, own, free, shared, sharedFree, low, high)) break;
    }
    let predicted = 0;
    let length = 0;
    let size = 0;
    blocks.forEach((block, a) => {
      const delta = own[a]!;
      const p = delta.length;
      for (let g = 0; g < q; g++) if (block.sharedAt[g]! >= 0) delta[block.sharedAt[g]!] = shared[g]!;
      for (let i = 0; i < p; i++) {
        let image = 0;
        for (let j = 0; j < p; j++) image += block.normal[i * p + j]! * delta[j]!;
        predicted += delta[i]! * (2 * block.gradient[i]! - image);
        if (block.isShared[i] === 1) continue;
        length += (block.scale[i]! * delta[i]!) ** 2;
        size += (block.scale[i]! * block.theta[i]!) ** 2;
      }
    });
    for (let g = 0; g < q; g++) {
      length += (sharedScale[g]! * shared[g]!) ** 2;
      const holder = blocks.find((block) => block.sharedAt[g]! >= 0);
      if (holder !== undefined) size += (sharedScale[g]! * holder.theta[holder.sharedAt[g]!]!) ** 2;
    }
    return { own, shared, predicted, length: Math.sqrt(length), size: Math.sqrt(size) };
  }

  /** Free parameters' minimum, the held ones standing where they are. */
  private solve(
    blocks: readonly ArrowBlock[],
    own: readonly Float64Array[],
    free: readonly Uint8Array[],
    shared: Float64Array,
    sharedFree: Uint8Array,
    ridge: (block: ArrowBlock, j: number) => number,
    sharedScale: Float64Array,
    damping: number,
  ): void {
    const { q } = this;
    const schur = new Float64Array(q * q);
    const right = new Float64Array(q);
    const eliminated = blocks.map((block, a) => eliminate(block, own[a]!, free[a]!, q, ridge, schur, right));
    const list: number[] = [];
    for (let g = 0; g < q; g++) if (sharedFree[g] === 1) list.push(g);
    const n = list.length;
    if (n > 0) {
      const matrix = new Float64Array(n * n);
      const target = new Float64Array(n);
      for (let extra = Math.max(damping, LEAST_DAMPING); ; extra *= 100) {
        list.forEach((g, a) => {
          target[a] = right[g]!;
          for (let h = 0; h < q; h++) if (sharedFree[h] === 0) target[a]! -= schur[g * q + h]! * shared[h]!;
          list.forEach((h, b) => (matrix[a * n + b] = schur[g * q + h]!));
          const weight =
            damping > 0 ? sharedScale[g]! ** 2 : Math.abs(schur[g * q + g]!) || sharedScale[g]! ** 2;
          matrix[a * n + a]! += extra * weight;
        });
        if (choleskyInto(matrix, n, matrix) > 0) break;
        if (!(extra < 1e10)) {
          target.fill(0);
          break;
        }
      }
      forwardSubstitute(matrix, n, target);
      backSubstitute(matrix, n, target);
      list.forEach((g, a) => (shared[g] = target[a]!));
    }
    blocks.forEach((_, a) => {
      const { places, base, bySharedStep } = eliminated[a]!;
      places.forEach((j, i) => {
        let value = base[i]!;
        for (let g = 0; g < q; g++) value -= bySharedStep[g * places.length + i]! * shared[g]!;
        own[a]![j] = value;
      });
    });
  }
}

interface Eliminated {
  /** Free own parameters, their step at shared step zero, and -d step/d shared (q x n). */
  readonly places: readonly number[];
  readonly base: Float64Array;
  readonly bySharedStep: Float64Array;
}

function eliminate(
  block: ArrowBlock,
  own: Float64Array,
  free: Uint8Array,
  q: number,
  ridge: (block: ArrowBlock, j: number) => number,
  schur: Float64Array,
  right: Float64Array,
): Eliminated {
  const { normal, gradient, sharedAt, isShared } = block;
  const p = gradient.length;
  const places: number[] = [];
  const held: number[] = [];
  for (let j = 0; j < p; j++) {
    if (free[j] === 1) places.push(j);
    else if (isShared[j] === 0 && own[j] !== 0) held.push(j);
  }
  const n = places.length;
  const lower = new Float64Array(n * n);
  for (let extra = 1; ; extra *= 100) {
    places.forEach((i, a) => {
      places.forEach((j, b) => (lower[a * n + b] = normal[i * p + j]!));
      lower[a * n + a]! += extra * ridge(block, i);
    });
    if (n === 0 || choleskyInto(lower, n, lower) > 0) break;
    if (!(extra < 1e24)) throw new Error("a normal matrix is not finite");
  }
  const residual = (i: number): number => {
    let value = gradient[i]!;
    for (const j of held) value -= normal[i * p + j]! * own[j]!;
    return value;
  };
  // Forward substituted once: u = L^-1 rhs, and columns V_g = L^-1 A_og, so that Schur terms are dot products.
  const base = Float64Array.from(places, residual);
  forwardSubstitute(lower, n, base);
  const bySharedStep = new Float64Array(q * n);
  for (let g = 0; g < q; g++) {
    const at = sharedAt[g]!;
    if (at < 0) continue;
    places.forEach((i, a) => (bySharedStep[g * n + a] = normal[i * p + at]!));
    forwardSubstitute(lower, n, bySharedStep, g * n);
  }
  for (let g = 0; g < q; g++) {
    const at = sharedAt[g]!;
    if (at < 0) continue;
    let value = residual(at);
    for (let a = 0; a < n; a++) value -= bySharedStep[g * n + a]! * base[a]!;
    right[g]! += value;
    for (let h = 0; h < q; h++) {
      const other = sharedAt[h]!;
      if (other < 0) continue;
      let sum = normal[at * p + other]!;
      for (let a = 0; a < n; a++) sum -= bySharedStep[g * n + a]! * bySharedStep[h * n + a]!;
      schur[g * q + h]! += sum;
    }
  }
  backSubstitute(lower, n, base);
  for (let g = 0; g < q; g++) {
    const column = bySharedStep.subarray(g * n, (g + 1) * n);
    backSubstitute(lower, n, column);
  }
  return { places, base, bySharedStep };
}

/** Steps beyond a bound are set on it and held; true where there were any. */
function settle(
  blocks: readonly ArrowBlock[],
  own: readonly Float64Array[],
  free: readonly Uint8Array[],
  shared: Float64Array,
  sharedFree: Uint8Array,
  low: Float64Array,
  high: Float64Array,
): boolean {
  let crossed = false;
  const hold = (delta: Float64Array, mask: Uint8Array, j: number, from: number, to: number): void => {
    if (mask[j] === 0 || (delta[j]! >= from && delta[j]! <= to)) return;
    delta[j] = delta[j]! < from ? from : to;
    mask[j] = 0;
    crossed = true;
  };
  blocks.forEach((block, a) => {
    for (let j = 0; j < block.gradient.length; j++) hold(own[a]!, free[a]!, j, block.low[j]!, block.high[j]!);
  });
  for (let g = 0; g < shared.length; g++) hold(shared, sharedFree, g, low[g]!, high[g]!);
  return crossed;
}

function leadsOut(gradient: number, low: number, high: number): boolean {
  return (gradient <= 0 && low === 0) || (gradient >= 0 && high === 0);
}
