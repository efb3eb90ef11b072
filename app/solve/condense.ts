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
  private readonly node = new Float64Array(NODES);
  private readonly part = new Float64Array(NODES);
  private readonly order = new Int32Array(NODES);
  private readonly value = new Float64Array(NODES);
  private square = 0;
  private tilt = 0;

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
    const { t, rest, alpha, beta, moment, node, part, order, value } = this;
    const size = end - first;
    const middle = (x[first]! + x[end - 1]!) / 2;
    const half = (x[end - 1]! - x[first]!) / 2;
    for (let i = 0; i < size; i++) t[i] = (x[first + i]! - middle) / half;
    for (let c = 0; c < rest.length; c++) {
      const own = rest[c]!;
      const column = columns[c]!;
      for (let i = 0; i < size; i++) own[i] = weight[first + i]! * column[first + i]!;
    }
    // Monic orthogonal polynomials times the root of the weight, one after another.
    let norm = 0;
    for (let j = 0; j < NODES; j++) {
      const before = this.square;
      if (j === 0) this.begin(weight, first, size);
      else this.next(alpha[j - 1]!, beta[j - 1]! ** 2, size);
      const { square } = this;
      if (j === 0) norm = Math.sqrt(square);
      else beta[j] = Math.sqrt(square / before);
      alpha[j] = this.tilt / square;
      const length = Math.sqrt(square);
      const lengthBefore = Math.sqrt(before);
      for (let c = 0; c < rest.length; c++) {
        const own = moment[c]!;
        const taken = j === 0 ? 0 : own[j - 1]! / lengthBefore;
        const found = takeOutAndMultiply(rest[c]!, taken, this.before, this.now, size) / length;
        own[j] = found;
        if (j >= NODES - 2) out.highest[c]! += found * found;
      }
    }
    const length = Math.sqrt(this.square);
    for (let c = 0; c < rest.length; c++) {
      const taken = moment[c]![NODES - 1]! / length;
      const own = rest[c]!;
      let sum = 0;
      for (let i = 0; i < size; i++) sum += (own[i]! - taken * this.now[i]!) ** 2;
      out.lost[c]! += sum;
    }
    node.set(alpha);
    tridiagonalEigen(node, beta, part);
    // In ascending order of the nodes.
    for (let k = 0; k < NODES; k++) {
      let place = k;
      for (; place > 0 && node[order[place - 1]!]! > node[k]!; place--) order[place] = order[place - 1]!;
      order[place] = k;
    }
    for (let place = 0; place < NODES; place++) {
      const k = order[place]!;
      const u = node[k]!;
      // Orthonormal polynomials at the node, by their recursion.
      value[0] = 1 / norm;
      for (let j = 1; j < NODES; j++) {
        const second = j === 1 ? 0 : beta[j - 1]! * value[j - 2]!;
        value[j] = ((u - alpha[j - 1]!) * value[j - 1]! - second) / beta[j]!;
      }
      out.x[at + place] = middle + half * u;
      out.weight[at + place] = Math.abs(norm * part[k]!);
      for (let c = 0; c < rest.length; c++) {
        const own = moment[c]!;
        let sum = 0;
        for (let j = 0; j < NODES; j++) sum += value[j]! * own[j]!;
        out.columns[c]![at + place] = sum;
      }
    }
  }

  /** The first polynomial, 1, with its square and the sum of t times its square. */
  private begin(weight: Float64Array, first: number, size: number): void {
    const { t, now, before } = this;
    let square = 0;
    let tilt = 0;
    for (let i = 0; i < size; i++) {
      const value = weight[first + i]!;
      now[i] = value;
      before[i] = 0;
      square += value * value;
      tilt += t[i]! * value * value;
    }
    this.square = square;
    this.tilt = tilt;
  }

  /** p := (t - a) p - b p_before, with its square and the sum of t times its square. */
  private next(a: number, b: number, size: number): void {
    const { t, now, before } = this;
    let square = 0;
    let tilt = 0;
    let squareOdd = 0;
    let tiltOdd = 0;
    let i = 0;
    for (; i + 1 < size; i += 2) {
      const u = t[i]!;
      const v = t[i + 1]!;
      const even = (u - a) * now[i]! - b * before[i]!;
      const odd = (v - a) * now[i + 1]! - b * before[i + 1]!;
      before[i] = even;
      before[i + 1] = odd;
      square += even * even;
      squareOdd += odd * odd;
      tilt += u * even * even;
      tiltOdd += v * odd * odd;
    }
    if (i < size) {
      const even = (t[i]! - a) * now[i]! - b * before[i]!;
      before[i] = even;
      square += even * even;
      tilt += t[i]! * even * even;
    }
    this.square = square + squareOdd;
    this.tilt = tilt + tiltOdd;
    this.now = before;
    this.before = now;
  }
}

/** v := v - factor u, and its product with w. */
function takeOutAndMultiply(
  v: Float64Array,
  factor: number,
  u: Float64Array,
  w: Float64Array,
  size: number,
): number {
  let even = 0;
  let odd = 0;
  let i = 0;
  for (; i + 1 < size; i += 2) {
    const a = v[i]! - factor * u[i]!;
    const b = v[i + 1]! - factor * u[i + 1]!;
    v[i] = a;
    v[i + 1] = b;
    even += a * w[i]!;
    odd += b * w[i + 1]!;
  }
  if (i < size) {
    const a = v[i]! - factor * u[i]!;
    v[i] = a;
    even += a * w[i]!;
  }
  return even + odd;
}

/**
 * Eigenvalues (into `diagonal`) and the first component of each eigenvector of the symmetric tridiagonal matrix with this
 * diagonal and off-diagonal elements beta[1..], by implicit QL (Golub and Van Loan, algorithm 8.3.3; Golub and Welsch).
 */
function tridiagonalEigen(diagonal: Float64Array, beta: Float64Array, component: Float64Array): void {
  const n = NODES;
  component.fill(0);
  component[0] = 1;
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
        f = component[i + 1]!;
        component[i + 1] = s * component[i]! + c * f;
        component[i] = c * component[i]! - s * f;
      }
      if (r === 0 && m - 1 >= l) continue;
      diagonal[l] = diagonal[l]! - p;
      e[l] = g;
      e[m] = 0;
    }
  }
}
