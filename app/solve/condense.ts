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
  readonly y: Float64Array;
  /** root of the weight, to be used as 1/sigma */
  readonly weight: Float64Array;
  /** Part of sum (w y)^2 that no function of these rows can take up: chi square of the rows + lost = that of the points. */
  readonly lost: number;
}

/** Nodes of a condensed panel. */
export const NODES = 14;

/** A panel with fewer points keeps them: there the recursion would lose its orthogonality, and nothing would be saved. */
export const LEAST_POINTS = 2 * NODES;

/**
 * What      Gauss rule of each panel's own points: nodes x_k and weights W_k with
 *           sum_i w_i^2 f(x_i) = sum_k W_k f(x_k) for every polynomial f of degree up to 2 NODES - 1, and data y_k, the
 *           least-squares polynomial of degree NODES - 1 through the panel's data. A least-squares problem whose columns are
 *           such polynomials on each panel (to the accuracy that the panels were chosen for) has the same normal matrix,
 *           right-hand side and solution on these rows as on all points.
 * Shapes    x ascending, y, weight (m); panels in order.
 * Units     x any; weights are 1/sigma of y.
 * Domain    weights >= 0, at least `LEAST_POINTS` with weight in a condensed panel.
 * Accuracy  a column that is analytic within the ellipse rho of a panel leaves rho^(-2 NODES) in the matrix and
 *           rho^-NODES in the right-hand side. tests/app/solve/condense.test.ts.
 * Source    Gautschi, Orthogonal Polynomials: Computation and Approximation (2004), 2.2.3 (Stieltjes procedure for a
 *           discrete measure); Golub and Welsch, Math. Comp. 23, 221 (1969).
 */
export function condenseRows(
  x: Float64Array,
  y: Float64Array,
  weight: Float64Array,
  panels: readonly Panel[],
): CondensedRows {
  let count = 0;
  let longest = 0;
  for (const { first, end, condensed } of panels) {
    count += condensed ? NODES : end - first;
    longest = Math.max(longest, end - first);
  }
  const out = {
    x: new Float64Array(count),
    y: new Float64Array(count),
    weight: new Float64Array(count),
    lost: 0,
  };
  const work = new PanelWork(longest);
  let at = 0;
  for (const panel of panels) {
    const { first, end, condensed } = panel;
    if (condensed) {
      out.lost += work.condense(x, y, weight, first, end, out, at);
      at += NODES;
      continue;
    }
    for (let i = first; i < end; i++, at++) {
      out.x[at] = x[i]!;
      out.y[at] = y[i]!;
      out.weight[at] = weight[i]!;
    }
  }
  return out;
}

class PanelWork {
  private readonly t: Float64Array;
  private before: Float64Array;
  private now: Float64Array;
  private readonly rest: Float64Array;
  private readonly alpha = new Float64Array(NODES);
  private readonly beta = new Float64Array(NODES);
  private readonly moment = new Float64Array(NODES);
  private readonly vectors = new Float64Array(NODES * NODES);

  constructor(longest: number) {
    this.t = new Float64Array(longest);
    this.before = new Float64Array(longest);
    this.now = new Float64Array(longest);
    this.rest = new Float64Array(longest);
  }

  /** Writes the panel's nodes from place `at`; returns the squares that the nodes cannot hold. */
  condense(
    x: Float64Array,
    y: Float64Array,
    weight: Float64Array,
    first: number,
    end: number,
    out: { x: Float64Array; y: Float64Array; weight: Float64Array },
    at: number,
  ): number {
    const { t, rest, alpha, beta, moment, vectors } = this;
    const size = end - first;
    const middle = (x[first]! + x[end - 1]!) / 2;
    const half = (x[end - 1]! - x[first]!) / 2;
    let total = 0;
    for (let i = 0; i < size; i++) {
      t[i] = (x[first + i]! - middle) / half;
      const w = weight[first + i]!;
      total += w * w;
      rest[i] = w * y[first + i]!;
    }
    // Orthonormal polynomials times the root of the weight, one after another.
    const norm = Math.sqrt(total);
    for (let i = 0; i < size; i++) {
      this.now[i] = weight[first + i]! / norm;
      this.before[i] = 0;
    }
    for (let j = 0; ; j++) {
      const { now, before } = this;
      let a = 0;
      let b = 0;
      for (let i = 0; i < size; i++) {
        const p = now[i]!;
        a += t[i]! * p * p;
        b += p * rest[i]!;
      }
      alpha[j] = a;
      moment[j] = b;
      for (let i = 0; i < size; i++) rest[i] = rest[i]! - b * now[i]!;
      if (j === NODES - 1) break;
      const back = j === 0 ? 0 : beta[j]!;
      let square = 0;
      for (let i = 0; i < size; i++) {
        const next = (t[i]! - a) * now[i]! - back * before[i]!;
        before[i] = next;
        square += next * next;
      }
      const length = Math.sqrt(square);
      beta[j + 1] = length;
      const unit = 1 / length;
      for (let i = 0; i < size; i++) before[i] = before[i]! * unit;
      this.now = before;
      this.before = now;
    }
    tridiagonalEigen(alpha, beta, vectors);
    // In ascending order of the nodes.
    const order = Array.from(alpha.keys()).sort((i, j) => alpha[i]! - alpha[j]!);
    order.forEach((k, place) => {
      const head = vectors[k]!;
      let sum = 0;
      for (let j = 0; j < NODES; j++) sum += vectors[j * NODES + k]! * moment[j]!;
      const root = norm * Math.abs(head);
      out.x[at + place] = middle + half * alpha[k]!;
      out.weight[at + place] = root;
      out.y[at + place] = (Math.sign(head) * sum) / root;
    });
    let lost = 0;
    for (let i = 0; i < size; i++) lost += rest[i]! * rest[i]!;
    return lost;
  }
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
      let r = Math.hypot(g, 1);
      g = diagonal[m]! - diagonal[l]! + e[l]! / (g + (g >= 0 ? r : -r));
      let s = 1;
      let c = 1;
      let p = 0;
      for (let i = m - 1; i >= l; i--) {
        let f = s * e[i]!;
        const b = c * e[i]!;
        r = Math.hypot(f, g);
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
