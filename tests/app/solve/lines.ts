import { makeRandom } from "../../../app/base/index.ts";
import type { SeparableProblem } from "../../../app/solve/index.ts";

/** Lorentzian dips of unit height on a parabola: centres and widths nonlinear, heights and background linear. */
export function lineProblem(
  m: number,
  truth: { centres: number[]; widths: number[]; heights: number[]; background: number[] },
  sigma: number,
  seed: number,
): { problem: SeparableProblem; theta: Float64Array; c: Float64Array; x: Float64Array } {
  const lines = truth.centres.length;
  const terms = truth.background.length;
  const k = lines + terms;
  const x = Float64Array.from({ length: m }, (_, i) => (2 * i) / (m - 1) - 1);
  const theta = new Float64Array(2 * lines);
  for (let l = 0; l < lines; l++) {
    theta[2 * l] = truth.centres[l]!;
    theta[2 * l + 1] = truth.widths[l]!;
  }
  const c = Float64Array.from([...truth.heights, ...truth.background]);
  const columns = (t: Float64Array, phi: Float64Array): void => {
    for (let i = 0; i < m; i++) {
      for (let l = 0; l < lines; l++) {
        const u = (x[i]! - t[2 * l]!) / t[2 * l + 1]!;
        phi[l * m + i] = 1 / (1 + u * u);
      }
      for (let b = 0; b < terms; b++) phi[(lines + b) * m + i] = x[i]! ** b;
    }
  };
  const derivatives = (t: Float64Array, a: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < m; i++) {
      for (let l = 0; l < lines; l++) {
        const w = t[2 * l + 1]!;
        const u = (x[i]! - t[2 * l]!) / w;
        const f = 1 / (1 + u * u);
        out[2 * l * m + i] = (2 * a[l]! * u * f * f) / w;
        out[(2 * l + 1) * m + i] = (2 * a[l]! * u * u * f * f) / w;
      }
    }
  };
  const phi = new Float64Array(m * k);
  columns(theta, phi);
  const random = makeRandom(seed);
  const data = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    let sum = sigma === 0 ? 0 : sigma * random.normal();
    for (let j = 0; j < k; j++) sum += c[j]! * phi[j * m + i]!;
    data[i] = sum;
  }
  const weights = new Float64Array(m).fill(sigma === 0 ? 1 : 1 / sigma);
  return {
    problem: { rows: m, nonlinear: 2 * lines, linear: k, data, weights, columns, derivatives },
    theta,
    c,
    x,
  };
}

export const TWO_LINES = {
  centres: [-0.3, 0.35],
  widths: [0.12, 0.08],
  heights: [1, 0.6],
  background: [0.5, -0.2, 0.1],
};
