/** A stretch of neighbouring points, first <= i < end. */
export interface Panel {
  readonly first: number;
  readonly end: number;
  /** Whether it is replaced by `NODES` nodes; else its points stay as they are. */
  readonly condensed: boolean;
}

/** Few rows that stand for many: their weighted columns have the same products as those of all points. */
export interface CondensedRows {
  readonly x: Float64Array;
  /** One column for each column of data. */
  readonly columns: readonly Float64Array[];
  /** root of the weight, to be used as 1/sigma */
  readonly weight: Float64Array;
  /**
   * Part of sum (w y)^2, by column of data, that no function of these rows can take up: chi square of the rows + lost =
   * that of the points.
   */
  readonly lost: Float64Array;
  /** Part of sum (w y)^2, by column of data, in the two highest polynomials of each panel: small for a smooth column. */
  readonly highest: Float64Array;
}

/** Nodes of a condensed panel. */
export const NODES = 16;

/** A panel with fewer points keeps them: there the recursion would lose its orthogonality, and nothing would be saved. */
export const LEAST_POINTS = 2 * NODES;

/**
 * What      Gauss rule of each panel's own points: nodes x_k and weights W_k with
 *           sum_i w_i^2 f(x_i) = sum_k W_k f(x_k) for every polynomial f of degree up to 2 NODES - 1, and columns y_k of
 *           data, the least-squares polynomial of degree NODES - 1 through the panel's data. A least-squares problem whose columns are
 *           such polynomials on each panel (to the accuracy that the panels were chosen for) has the same normal matrix,
 *           right-hand side and solution on these rows as on all points.
 * Shapes    x ascending, columns, weight (m); panels in order.
 * Units     x any; weights are 1/sigma of y.
 * Domain    weights >= 0, at least `LEAST_POINTS` with weight in a condensed panel.
 * Accuracy  a column that is analytic within the ellipse rho of a panel leaves rho^(-2 NODES) in the matrix and
 *           rho^-NODES in the right-hand side. tests/app/solve/condense.test.ts.
 * Source    Gautschi, Orthogonal Polynomials: Computation and Approximation (2004), 2.2.3 (Stieltjes procedure for a
 *           discrete measure); Golub and Welsch, Math. Comp. 23, 221 (1969).
 */
export function condenseRows(
  x: Float64Array,
  columns: readonly Float64Array[],
  weight: Float64Array,
  panels: readonly Panel[],
): CondensedRows {
  let count = 0;
  let longest = 0;
  for (const { first, end, condensed } of panels) {
    count += condensed ? NODES : end - first;
    longest = Math.max(longest, end - first);
  }
  const out: CondensedRows = {
    x: new Float64Array(count),
    columns: columns.map(() => new Float64Array(count)),
    weight: new Float64Array(count),
    lost: new Float64Array(columns.length),
    highest: new Float64Array(columns.length),
  };
  const work = new PanelWork(longest, columns.length);
  let at = 0;
  for (const panel of panels) {
    const { first, end, condensed } = panel;
    if (condensed) {
      work.condense(x, columns, weight, first, end, out, at);
      at += NODES;
      continue;
    }
    out.x.set(x.subarray(first, end), at);
    out.weight.set(weight.subarray(first, end), at);
    columns.forEach((column, c) => out.columns[c]!.set(column.subarray(first, end), at));
    at += end - first;
  }
  return out;
}

class PanelWork {
  private readonly t: Float64Array;
  private before: Float64Array;
  private now: Float64Array;
  private readonly rest: readonly Float64Array[];
  private readonly moment: readonly Float64Array[];
  private readonly alpha = new Float64Array(NODES);
  private readonly beta = new Float64Array(NODES);
  private readonly vectors = new Float64Array(NODES * NODES);

  constructor(longest: number, columns: number) {
    this.t = new Float64Array(longest);
    this.before = new Float64Array(longest);
    this.now = new Float64Array(longest);
    this.rest = Array.from({ length: columns }, () => new Float64Array(longest));
    this.moment = Array.from({ length: columns }, () => new Float64Array(NODES));
  }

  /** Writes the panel's nodes from place `at`, and adds what they cannot hold to `lost`. */
  condense(
    x: Float64Array,
    columns: readonly Float64Array[],
    weight: Float64Array,
    first: number,
    end: number,
    out: CondensedRows,
    at: number,
  ): void {
    const { t, rest, alpha, beta, moment, vectors } = this;
    const size = end - first;
    const middle = (x[first]! + x[end - 1]!) / 2;
    const half = (x[end - 1]! - x[first]!) / 2;
    for (let i = 0; i < size; i++) t[i] = (x[first + i]! - middle) / half;
    columns.forEach((column, c) => {
      for (let i = 0; i < size; i++) rest[c]![i] = weight[first + i]! * column[first + i]!;
    });
    // Monic orthogonal polynomials times the root of the weight, one after another.
    let norm = 0;
    let square = 0;
    for (let j = 0; j < NODES; j++) {
      const before = square;
      square = j === 0 ? this.begin(weight, first, size) : this.next(alpha[j - 1]!, beta[j - 1]! ** 2, size);
      if (j === 0) norm = Math.sqrt(square);
      else beta[j] = Math.sqrt(square / before);
      const { now } = this;
      let a = 0;
      for (let i = 0; i < size; i++) a += t[i]! * now[i]! * now[i]!;
      alpha[j] = a / square;
      for (let c = 0; c < rest.length; c++) {
        const part = takeOut(now, square, rest[c]!, size);
        moment[c]![j] = part;
        if (j >= NODES - 2) out.highest[c]! += part * part;
      }
    }
    for (let c = 0; c < rest.length; c++) {
      for (let i = 0; i < size; i++) out.lost[c]! += rest[c]![i]! * rest[c]![i]!;
    }
    tridiagonalEigen(alpha, beta, vectors);
    // In ascending order of the nodes.
    const order = Array.from(alpha.keys()).sort((i, j) => alpha[i]! - alpha[j]!);
    order.forEach((k, place) => {
      const root = norm * vectors[k]!;
      out.x[at + place] = middle + half * alpha[k]!;
      out.weight[at + place] = Math.abs(root);
      moment.forEach((one, c) => {
        let sum = 0;
        for (let j = 0; j < NODES; j++) sum += vectors[j * NODES + k]! * one[j]!;
        out.columns[c]![at + place] = sum / root;
      });
    });
  }

  /** The first polynomial, 1; returns its square. */
  private begin(weight: Float64Array, first: number, size: number): number {
    const { now, before } = this;
    let square = 0;
    for (let i = 0; i < size; i++) {
      const value = weight[first + i]!;
      now[i] = value;
      before[i] = 0;
      square += value * value;
    }
    return square;
  }

  /** p := (t - a) p - b p_before; returns its square. */
  private next(a: number, b: number, size: number): number {
    const { t, now, before } = this;
    let square = 0;
    for (let i = 0; i < size; i++) {
      const value = (t[i]! - a) * now[i]! - b * before[i]!;
      before[i] = value;
      square += value * value;
    }
    this.now = before;
    this.before = now;
    return square;
  }
}

/** v := v less its part along u, whose square is given; returns that part for u brought to unit length. */
function takeOut(u: Float64Array, square: number, v: Float64Array, size: number): number {
  let even = 0;
  let odd = 0;
  let i = 0;
  for (; i + 1 < size; i += 2) {
    even += u[i]! * v[i]!;
    odd += u[i + 1]! * v[i + 1]!;
  }
  if (i < size) even += u[i]! * v[i]!;
  const factor = (even + odd) / square;
  for (i = 0; i < size; i++) v[i] = v[i]! - factor * u[i]!;
  return factor * Math.sqrt(square);
}

/**
 * Eigenvalues (into `diagonal`) and eigenvectors (columns of `vectors`, row-major) of the symmetric tridiagonal matrix
 * with this diagonal and off-diagonal elements beta[1..], by implicit QL (Golub and Van Loan, algorithm 8.3.3).
 */
function tridiagonalEigen(diagonal: Float64Array, beta: Float64Array, vectors: Float64Array): void {
  const n = NODES;
  vectors.fill(0);
  for (let i = 0; i < n; i++) vectors[i * n + i] = 1;
  const e = new Float64Array(n);
  for (let i = 1; i < n; i++) e[i - 1] = beta[i]!;
  for (let l = 0; l < n; l++) {
    for (let turn = 0; turn < 60; turn++) {
      let m = l;
      for (; m < n - 1; m++) {
        const size = Math.abs(diagonal[m]!) + Math.abs(diagonal[m + 1]!);
        if (Math.abs(e[m]!) <= 2 ** -53 * size) break;
      }
      if (m === l) break;
      let g = (diagonal[l + 1]! - diagonal[l]!) / (2 * e[l]!);
      let r = Math.sqrt(g * g + 1);
      g = diagonal[m]! - diagonal[l]! + e[l]! / (g + (g >= 0 ? r : -r));
      let s = 1;
      let c = 1;
      let p = 0;
      for (let i = m - 1; i >= l; i--) {
        let f = s * e[i]!;
        const b = c * e[i]!;
        r = Math.sqrt(f * f + g * g);
        e[i + 1] = r;
        if (r === 0) {
          diagonal[i + 1] = diagonal[i + 1]! - p;
          e[m] = 0;
          break;
        }
        s = f / r;
        c = g / r;
        g = diagonal[i + 1]! - p;
        r = (diagonal[i]! - g) * s + 2 * c * b;
        p = s * r;
        diagonal[i + 1] = g + p;
        g = c * r - b;
        for (let k = 0; k < n; k++) {
          f = vectors[k * n + i + 1]!;
          vectors[k * n + i + 1] = s * vectors[k * n + i]! + c * f;
          vectors[k * n + i] = c * vectors[k * n + i]! - s * f;
        }
      }
      if (r === 0 && m - 1 >= l) continue;
      diagonal[l] = diagonal[l]! - p;
      e[l] = g;
      e[m] = 0;
    }
  }
}
