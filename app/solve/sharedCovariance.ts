import { conditionOfTriangle, invertTriangle } from "./invertTriangle.ts";
import { RANK_TOLERANCE } from "./linearStage.ts";
import { pivotedQr } from "./pivotedQr.ts";
import { RowBlockTriangle } from "./rowBlockTriangle.ts";

/** One member's weighted columns at the solution, reduced to a triangle. */
export interface MemberColumns {
  /** p + k of the member. */
  readonly parameters: number;
  /** Its own free parameters among them, in the order of the triangle's columns. */
  readonly own: Int32Array;
  /** Place of each shared parameter, -1 where absent. */
  readonly sharedAt: Int32Array;
  /** R of [own | shared | residual], row-major, (own + q + 1) square; null where derivatives could not be had. */
  readonly triangle: Float64Array | null;
}

export interface MemberAnalysis {
  /** (p + k) square, marginal over the shared parameters; NaN where undetermined, 0 where held at a bound. */
  readonly covariance: Float64Array;
  /** d(theta, c)/d(shared), everything else refitted ((p + k) x q, row-major). */
  readonly sensitivity: Float64Array;
  readonly undetermined: Uint8Array;
  readonly rank: number;
  /** Of its own unit-length columns; Infinity where the rank is short. */
  readonly condition: number;
}

export interface SharedAnalysis {
  readonly sharedCovariance: Float64Array;
  readonly sharedRank: number;
  readonly members: readonly MemberAnalysis[];
  /** How far the linearised minimum still is, in standard errors of all parameters together. */
  readonly remaining: number;
}

/** As in covariance.ts. */
const NULL_PART = 1e-6;

/** The triangle of a member's columns; groups (rows x counts[g], column-major) side by side. */
export function reduceMember(
  groups: readonly Float64Array[],
  counts: readonly number[],
  rows: number,
): Float64Array {
  let size = 0;
  for (const count of counts) size += count;
  const triangle = new RowBlockTriangle(size);
  triangle.factor(
    groups,
    counts,
    counts.map(() => rows),
    rows,
  );
  return triangle.r;
}

/**
 * What      Covariance of several least-squares problems with shared parameters: with R_a = [R_oo R_os; 0 R_ss] of each
 *           member, the shared block is C = (sum_a R_ss' R_ss)^-1 from the QR of the stacked R_ss, a member's own block
 *           (R_oo' R_oo)^-1 + T C T', T = R_oo^-1 R_os, its cross terms -T C, and those between members T_a C T_b'.
 * Shapes    members (N); free: the shared parameters that are not at a bound, out of q.
 * Units     products of the parameters' units; weights are taken to be 1/sigma.
 * Domain    own columns that depend on each other are told apart by pivoting, as in covariance.ts.
 * Accuracy  tests/app/solve/shared.test.ts: agrees with the covariance of one dense fit.
 * Source    Golub and Van Loan, Matrix Computations, 4th ed., 5.3; Bjorck (1996), 6.3.
 */
export function analyseShared(
  members: readonly MemberColumns[],
  q: number,
  free: Int32Array,
): SharedAnalysis {
  const parts = members.map((member) => eliminateOwn(member, q));
  const sharedCovariance = new Float64Array(q * q);
  let remaining = 0;
  for (const part of parts) remaining += part?.remaining ?? NaN;
  const shared = coverShared(parts, q, free, sharedCovariance);
  remaining += shared.remaining;
  return {
    sharedCovariance,
    sharedRank: shared.rank,
    remaining: Math.sqrt(remaining),
    members: members.map((member, a) => describe(member, parts[a] ?? null, q, free, sharedCovariance)),
  };
}

interface Eliminated {
  readonly rank: number;
  readonly condition: number;
  /** Columns of R_oo^-1 over the independent ones (rank x rank, by column) and where each stands in `own`. */
  readonly inverse: Float64Array;
  readonly permutation: Int32Array;
  readonly scale: Float64Array;
  /** R_oo^-1 R_os (own x q, row-major), unscaled. */
  readonly transfer: Float64Array;
  /** 1 where an own parameter takes part in the null space. */
  readonly undetermined: Uint8Array;
  /** Rows left for the shared parameters ((q + 1) columns, column-major, `rows` high). */
  readonly rest: Float64Array;
  readonly rows: number;
  readonly remaining: number;
}

function eliminateOwn(member: MemberColumns, q: number): Eliminated | null {
  const { triangle, own } = member;
  if (triangle === null) return null;
  const n = own.length;
  const size = n + q + 1;
  const small = new Float64Array(size * size);
  const scale = new Float64Array(n);
  const permutation = new Int32Array(size);
  for (let j = 0; j < size; j++) {
    permutation[j] = j;
    let norm = 0;
    for (let i = 0; i < size; i++) norm += triangle[i * size + j]! ** 2;
    const factor = j < n && norm > 0 ? 1 / Math.sqrt(norm) : 1;
    if (j < n) scale[j] = factor;
    for (let i = 0; i < size; i++) {
      small[j * size + i] = triangle[i * size + j]! * factor;
    }
  }
  const rank = pivotedQr(small, size, size, 0, 0, n, permutation, RANK_TOLERANCE);
  let remaining = 0;
  for (let i = 0; i < rank; i++) remaining += small[(size - 1) * size + i]! ** 2;
  const inverse = invertTriangle(small, size, rank);
  const condition = rank === n && n > 0 ? conditionOfTriangle(small, size, inverse, n) : Infinity;
  /** Row a of R^-1 times column `column` of what was reflected along. */
  const solveRow = (a: number, column: number): number => {
    let sum = 0;
    for (let l = a; l < rank; l++) sum += inverse[l * rank + a]! * small[column * size + l]!;
    return sum;
  };
  const undetermined = new Uint8Array(n);
  for (let d = rank; d < n; d++) {
    undetermined[permutation[d]!] = 1;
    for (let a = 0; a < rank; a++)
      if (Math.abs(solveRow(a, d)) > NULL_PART) undetermined[permutation[a]!] = 1;
  }
  const transfer = new Float64Array(n * q);
  for (let a = 0; a < rank; a++) {
    const at = permutation[a]!;
    for (let g = 0; g < q; g++) transfer[at * q + g] = scale[at]! * solveRow(a, n + g);
  }
  const rows = size - rank;
  const rest = new Float64Array(rows * (q + 1));
  for (let g = 0; g <= q; g++)
    for (let i = 0; i < rows; i++) rest[g * rows + i] = small[(n + g) * size + rank + i]!;
  // The last row of the residual's column is what no parameter can take away.
  return { rank, condition, inverse, permutation, scale, transfer, undetermined, rest, rows, remaining };
}

/** C over the free shared parameters, from the stacked rests. */
function coverShared(
  parts: readonly (Eliminated | null)[],
  q: number,
  free: Int32Array,
  covariance: Float64Array,
): { rank: number; remaining: number } {
  if (parts.some((part) => part === null)) {
    covariance.fill(NaN);
    return { rank: 0, remaining: NaN };
  }
  const n = free.length;
  let rows = 0;
  for (const part of parts) rows += part!.rows;
  if (n === 0) return { rank: 0, remaining: 0 };
  const stacked = new Float64Array(rows * (n + 1));
  const columns = [...free, q];
  columns.forEach((g, c) => {
    let at = c * rows;
    for (const part of parts) {
      stacked.set(part!.rest.subarray(g * part!.rows, (g + 1) * part!.rows), at);
      at += part!.rows;
    }
  });
  const scale = new Float64Array(n);
  for (let c = 0; c < n; c++) {
    let norm = 0;
    for (let i = 0; i < rows; i++) norm += stacked[c * rows + i]! ** 2;
    scale[c] = norm > 0 ? 1 / Math.sqrt(norm) : 1;
    for (let i = 0; i < rows; i++) stacked[c * rows + i]! *= scale[c]!;
  }
  const permutation = Int32Array.from({ length: n + 1 }, (_, c) => c);
  const rank = pivotedQr(stacked, rows, n + 1, 0, 0, n, permutation, RANK_TOLERANCE);
  let remaining = 0;
  for (let i = 0; i < rank; i++) remaining += stacked[n * rows + i]! ** 2;
  const inverse = invertTriangle(stacked, rows, rank);
  for (let a = 0; a < rank; a++) {
    for (let b = 0; b <= a; b++) {
      let sum = 0;
      for (let l = a; l < rank; l++) sum += inverse[l * rank + a]! * inverse[l * rank + b]!;
      const i = permutation[a]!;
      const j = permutation[b]!;
      sum *= scale[i]! * scale[j]!;
      covariance[free[i]! * q + free[j]!] = sum;
      covariance[free[j]! * q + free[i]!] = sum;
    }
  }
  // A shared parameter that nothing determines spoils every number that follows it.
  for (let d = rank; d < n; d++) {
    for (let g = 0; g < q; g++) {
      covariance[free[permutation[d]!]! * q + g] = NaN;
      covariance[g * q + free[permutation[d]!]!] = NaN;
    }
  }
  return { rank, remaining };
}

function describe(
  member: MemberColumns,
  part: Eliminated | null,
  q: number,
  free: Int32Array,
  shared: Float64Array,
): MemberAnalysis {
  const size = member.parameters;
  const covariance = new Float64Array(size * size);
  const sensitivity = new Float64Array(size * q);
  const undetermined = new Uint8Array(size);
  if (part === null) {
    covariance.fill(NaN);
    return { covariance, sensitivity, undetermined, rank: 0, condition: NaN };
  }
  const { own, sharedAt } = member;
  for (const g of free) {
    if (sharedAt[g]! >= 0) sensitivity[sharedAt[g]! * q + g] = 1;
    own.forEach((i, a) => (sensitivity[i * q + g] = -part.transfer[a * q + g]!));
  }
  const { rank, inverse, permutation, scale } = part;
  for (let a = 0; a < rank; a++) {
    for (let b = 0; b <= a; b++) {
      let sum = 0;
      for (let l = a; l < rank; l++) sum += inverse[l * rank + a]! * inverse[l * rank + b]!;
      sum *= scale[permutation[a]!]! * scale[permutation[b]!]!;
      const i = own[permutation[a]!]!;
      const j = own[permutation[b]!]!;
      covariance[i * size + j] = sum;
      covariance[j * size + i] = sum;
    }
  }
  const involved = [...own, ...Array.from(sharedAt).filter((at) => at >= 0)];
  // (S C) once, then S C S'.
  const product = new Float64Array(size * q);
  for (const i of involved)
    for (const g of free) {
      let sum = 0;
      for (const h of free) sum += sensitivity[i * q + h]! * shared[h * q + g]!;
      product[i * q + g] = sum;
    }
  for (const i of involved)
    for (const j of involved) {
      let sum = 0;
      for (const g of free) sum += product[i * q + g]! * sensitivity[j * q + g]!;
      covariance[i * size + j]! += sum;
    }
  own.forEach((i, a) => {
    if (part.undetermined[a] === 0) return;
    undetermined[i] = 1;
    for (let j = 0; j < size; j++) {
      covariance[i * size + j] = NaN;
      covariance[j * size + i] = NaN;
    }
  });
  return { covariance, sensitivity, undetermined, rank, condition: part.condition };
}
