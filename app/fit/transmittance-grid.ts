/** Where a curve has structure: a line, or an edge, of this full width at this energy. */
export interface Feature {
  readonly energy: number;
  readonly width: number;
}

/**
 * What      The mean of a curve over a Gaussian slit at every point, as a banded matrix K from the curve's values on
 *           nodes of their own: out_i = sum_k share_(start_i + k) value_(first_i + k). Between nodes the curve is a polynomial
 *           through six of them; the mean is the trapezoidal rule in (E - E_i)/s. Nodes are dense where lines are narrow
 *           and few in between, whatever the step of the points, and reach beyond both ends by the slit's own width.
 *           Without a slit the nodes are the points and K is the identity.
 * Shapes    energy (m, ascending); nodes (M); first (m), start (m+1), share (start_m).
 * Units     eV; share without unit, each row sums to 1.
 * Accuracy  node distance is 1/12 of the distance r to the nearest pole of the absorption, so the interpolation error
 *           is below 3.5/12^6 = 1.2e-6 of T (Cauchy's bound, |f^(6)| <= 6!/r^6; exp(-alpha d) is below 1 within r of the
 *           axis); the trapezoidal error is exp(-2 pi 4) = 1e-11 from the poles, and the slit is cut where it
 *           has fallen to 1e-6 of its height. tests/app/fit/transmittance-grid.test.ts.
 * Source    Lagrange interpolation; trapezoidal rule for analytic functions: Trefethen and Weideman, SIAM Rev. 56, 385
 *           (2014).
 */
export interface SlitGrid {
  readonly nodes: Float64Array;
  readonly first: Int32Array;
  readonly start: Int32Array;
  readonly share: Float64Array;
  /** True without a slit. */
  readonly identity: boolean;
}

const NODES_PER_REACH = 12;
const STENCIL = 6;
const STEPS_PER_REACH = 4;
const STEPS_PER_STD = 2;
/** The slit is cut at this many standard deviations. */
const SLIT_END = 5.3;
/** Structure finer than this part of the slit's standard deviation is not followed. */
const FINEST = 1 / 40;
/** The background asks for this many nodes over the window at least. */
const LEAST_NODES = 400;

/**
 * `coarsest` (eV): largest distance of nodes, for backgrounds with a structure of their own. `reference` (eV): a slit that
 * is constant in wavelength has `slitStd` at this energy, and grows as E^2.
 */
export function makeSlitGrid(
  energy: Float64Array,
  slitStd: number,
  features: readonly Feature[],
  coarsest = Infinity,
  reference: number | null = null,
): SlitGrid {
  const m = energy.length;
  if (!(slitStd > 0)) {
    return {
      nodes: energy,
      first: Int32Array.from({ length: m }, (_, i) => i),
      start: Int32Array.from({ length: m + 1 }, (_, i) => i),
      share: new Float64Array(m).fill(1),
      identity: true,
    };
  }
  const span = Math.max(energy[m - 1]! - energy[0]!, slitStd);
  const largest = Math.min(coarsest, span / LEAST_NODES);
  const stdAt = (e: number): number => (reference === null ? slitStd : slitStd * (e / reference) ** 2);
  const widest = Math.max(stdAt(energy[0]!), stdAt(energy[m - 1]!));
  const { nodes, reach } = placeNodes(energy, widest, features, largest);
  const inverse = stencilWeights(nodes);
  const first = new Int32Array(m);
  const start = new Int32Array(m + 1);
  const shares: number[] = [];
  const row = new Float64Array(nodes.length);
  let low = 0;
  for (let i = 0; i < m; i++) {
    const e = energy[i]!;
    const std = stdAt(e);
    while (nodes[low + 1]! <= e - SLIT_END * widest) low++;
    let nearest = Infinity;
    for (let j = low; j < nodes.length && nodes[j]! < e + SLIT_END * std; j++)
      nearest = Math.min(nearest, reach[j]!);
    const step = Math.min(std / STEPS_PER_STD, Math.max(nearest / STEPS_PER_REACH, std * FINEST));
    const half = Math.ceil((SLIT_END * std) / step);
    const total = Math.sqrt(2 * Math.PI) * (std / step);
    let at = low;
    let begin = nodes.length;
    let end = 0;
    for (let k = -half; k <= half; k++) {
      const x = e + k * step;
      while (at + 2 < nodes.length && nodes[at + 1]! <= x) at++;
      const stencil = Math.max(0, Math.min(nodes.length - STENCIL, at - STENCIL / 2 + 1));
      const u = (k * step) / std;
      addInterpolated(nodes, inverse, stencil, x, Math.exp(-0.5 * u * u) / total, row);
      begin = Math.min(begin, stencil);
      end = Math.max(end, stencil + STENCIL);
    }
    first[i] = begin;
    let sum = 0;
    for (let j = begin; j < end; j++) sum += row[j]!;
    for (let j = begin; j < end; j++) {
      shares.push(row[j]! / sum);
      row[j] = 0;
    }
    start[i + 1] = shares.length;
  }
  return { nodes, first, start, share: Float64Array.from(shares), identity: false };
}

/** out[outAt + i] = (K values)_i, the values at [valuesAt + j]. */
export function applySlit(
  grid: SlitGrid,
  values: Float64Array,
  valuesAt: number,
  out: Float64Array,
  outAt: number,
): void {
  const { first, start, share } = grid;
  const m = first.length;
  if (grid.identity) {
    for (let i = 0; i < m; i++) out[outAt + i] = values[valuesAt + i]!;
    return;
  }
  for (let i = 0; i < m; i++) {
    const from = start[i]!;
    const to = start[i + 1]!;
    const shift = valuesAt + first[i]! - from;
    let sum = 0;
    for (let k = from; k < to; k++) sum += share[k]! * values[k + shift]!;
    out[outAt + i] = sum;
  }
}

function placeNodes(
  energy: Float64Array,
  slitStd: number,
  features: readonly Feature[],
  largest: number,
): { nodes: Float64Array; reach: Float64Array } {
  const low = energy[0]! - (SLIT_END + 1) * slitStd;
  const high = energy[energy.length - 1]! + (SLIT_END + 1) * slitStd;
  const reachAt = (e: number): number => {
    let least = NODES_PER_REACH * largest;
    for (const { energy: centre, width } of features)
      least = Math.min(least, Math.hypot(width / 2, e - centre));
    return Math.max(least, slitStd * FINEST * NODES_PER_REACH);
  };
  const nodes: number[] = [];
  const reach: number[] = [];
  let e = low;
  let beyond = 0;
  while (beyond < STENCIL / 2) {
    const r = reachAt(e);
    nodes.push(e);
    reach.push(r);
    if (e > high) beyond++;
    // The reach changes by at most the step, so the next node is asked too: steps shrink in time before a line.
    e += Math.min(r, reachAt(e + r / NODES_PER_REACH)) / NODES_PER_REACH;
  }
  while (nodes.length < STENCIL) {
    nodes.push(nodes[nodes.length - 1]! + slitStd);
    reach.push(Infinity);
  }
  return { nodes: Float64Array.from(nodes), reach: Float64Array.from(reach) };
}

/** 1/prod_(b != a) (x_a - x_b) for every six neighbouring nodes: entry 6 j + a. */
function stencilWeights(nodes: Float64Array): Float64Array {
  const out = new Float64Array(STENCIL * Math.max(0, nodes.length - STENCIL + 1));
  for (let j = 0; j + STENCIL <= nodes.length; j++) {
    for (let a = 0; a < STENCIL; a++) {
      let product = 1;
      for (let b = 0; b < STENCIL; b++) if (b !== a) product *= nodes[j + a]! - nodes[j + b]!;
      out[STENCIL * j + a] = 1 / product;
    }
  }
  return out;
}

/** row[j + a] += weight * (Lagrange polynomial of node j + a at x). */
function addInterpolated(
  nodes: Float64Array,
  inverse: Float64Array,
  j: number,
  x: number,
  weight: number,
  row: Float64Array,
): void {
  const d0 = x - nodes[j]!;
  const d1 = x - nodes[j + 1]!;
  const d2 = x - nodes[j + 2]!;
  const d3 = x - nodes[j + 3]!;
  const d4 = x - nodes[j + 4]!;
  const d5 = x - nodes[j + 5]!;
  const d01 = d0 * d1;
  const d012 = d01 * d2;
  const d45 = d4 * d5;
  const d345 = d3 * d45;
  const at = STENCIL * j;
  row[j]! += weight * inverse[at]! * d1 * d2 * d345;
  row[j + 1]! += weight * inverse[at + 1]! * d0 * d2 * d345;
  row[j + 2]! += weight * inverse[at + 2]! * d01 * d345;
  row[j + 3]! += weight * inverse[at + 3]! * d012 * d45;
  row[j + 4]! += weight * inverse[at + 4]! * d012 * d3 * d5;
  row[j + 5]! += weight * inverse[at + 5]! * d012 * d3 * d4;
}
