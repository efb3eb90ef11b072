/**
 * What      A smooth function known far from a cluster of lines is evaluated on few of the points and carried to the
 *           others by cubic interpolation; near the cluster every point is a node.
 * Shapes    energy (m), nodes (M <= m); first (m) and share (4m): value_i = sum_k share_4i+k node_first_i+k.
 * Domain    a pole at distance d makes the interpolation error about (spacing/d)^4 of the value.
 * Accuracy  spacing is at most 0.03 d, hence below 1e-6 of the wing's own value.
 * Source    Lagrange interpolation on four nodes.
 */
export interface SparseGrid {
  readonly nodes: Float64Array;
  readonly first: Int32Array;
  readonly share: Float64Array;
}

const SPACING_OVER_DISTANCE = 0.03;

/** Nodes for a function whose poles lie between low and high; `margin` around them is taken point by point. */
export function makeSparseGrid(energy: Float64Array, low: number, high: number, margin: number): SparseGrid {
  const m = energy.length;
  const picked: number[] = [];
  const place = new Int32Array(m);
  let last = -Infinity;
  for (let i = 0; i < m; i++) {
    const e = energy[i]!;
    const distance = Math.max(0, low - margin - e, e - high - margin);
    const next = i + 1 < m ? energy[i + 1]! : Infinity;
    if (distance === 0 || i === m - 1 || next - last > SPACING_OVER_DISTANCE * (distance + margin)) {
      picked.push(i);
      last = e;
    }
    place[i] = picked.length - 1;
  }
  const count = picked.length;
  const nodes = Float64Array.from(picked, (i) => energy[i]!);
  const first = new Int32Array(m);
  const share = new Float64Array(4 * m);
  for (let i = 0; i < m; i++) {
    const at = Math.max(0, place[i]!);
    if (count < 4 || picked[at] === i) {
      first[i] = Math.min(at, Math.max(0, count - 4));
      share[4 * i + (at - first[i]!)] = 1;
      continue;
    }
    const start = Math.max(0, Math.min(count - 4, at - 1));
    first[i] = start;
    for (let a = 0; a < 4; a++) {
      let product = 1;
      for (let b = 0; b < 4; b++) {
        if (b === a) continue;
        product *= (energy[i]! - nodes[start + b]!) / (nodes[start + a]! - nodes[start + b]!);
      }
      share[4 * i + a] = product;
    }
  }
  return { nodes, first, share };
}

/** out_i += factor * interpolated value, out at [offset + i]. */
export function addFromGrid(
  grid: SparseGrid,
  values: Float64Array,
  factor: number,
  out: Float64Array,
  offset = 0,
): void {
  if (factor === 0) return;
  const { first, share } = grid;
  const m = first.length;
  const last = values.length - 1;
  for (let i = 0; i < m; i++) {
    const f = first[i]!;
    const s = 4 * i;
    let sum = share[s]! * values[f]!;
    if (f + 3 <= last)
      sum += share[s + 1]! * values[f + 1]! + share[s + 2]! * values[f + 2]! + share[s + 3]! * values[f + 3]!;
    out[offset + i]! += factor * sum;
  }
}
