import { SATURATION, saturationLaw, type SaturationLaw } from "../laws/index.ts";

/** How the absorption of a line falls with u = S P, S its initial relative fall; `ratio` is read by `gaussian-two-beam`. */
export type BleachingLaw = SaturationLaw | "gaussian-scanned" | "gaussian-two-beam";

/**
 * What      Relative absorption f(u) = A/A_0 and df/du, u = S P and f = 1 - u + ...: the laws of laws/saturation.ts and
 *             gaussian-scanned   2 [sqrt(1 + v) - 1]/v, v = 4 u     area of a line that a swept Gaussian beam bleaches
 *             gaussian-two-beam  Int_0^1 dt/(1 + s t^k), s = (1 + k) u  hyperbola under a Gaussian pump read by a
 *                                Gaussian probe, k = (w_probe/w_pump)^2; k = 0 is the hyperbola, k = 1 gaussian-self
 * Domain    u > -1/4 at least; NaN where the law has no value.
 * Accuracy  1e-12 for |u| < 1e3 (two beams: 1e-9); tests/app/power/bleaching-law.test.ts integrates independently.
 * Source    averages of the local laws over the beam, elementary integrals; t = exp(-2 r^2/w_probe^2).
 */
export function bleaching(law: BleachingLaw, u: number, ratio = 1): { factor: number; slope: number } {
  if (law === "gaussian-scanned") return scannedGaussian(u);
  if (law === "gaussian-two-beam") return twoBeams(u, ratio);
  saturationLaw(law, u, 1, 1, scratch);
  return { factor: scratch[SATURATION.area]!, slope: scratch[SATURATION.byPower]! };
}

const scratch = new Float64Array(SATURATION.size);

/** u at which the law has fallen to this part of its start; NaN outside its range. */
export function unbleach(law: BleachingLaw, factor: number, ratio = 1): number {
  if (!(factor > 0)) return Number.NaN;
  let low = -0.2;
  let high = 1;
  if (!(bleaching(law, low, ratio).factor > factor)) return Number.NaN;
  while (bleaching(law, high, ratio).factor > factor) {
    high *= 4;
    if (high > 1e9) return Number.NaN;
  }
  for (let turn = 0; turn < 100 && high - low > 1e-12 * (1 + high); turn++) {
    const middle = (low + high) / 2;
    if (bleaching(law, middle, ratio).factor > factor) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

function scannedGaussian(u: number): { factor: number; slope: number } {
  // 2 (sqrt(1+v) - 1)/v = 2/(1 + sqrt(1+v)) without cancellation.
  const root = Math.sqrt(1 + 4 * u);
  return { factor: 2 / (1 + root), slope: -4 / (root * (1 + root) * (1 + root)) };
}

/** With t = y^(1/k) the integrand is smooth where k is large; split on a logarithmic scale of t it is smooth always. */
function twoBeams(u: number, ratio: number): { factor: number; slope: number } {
  const s = (1 + ratio) * u;
  let factor = 0;
  let slope = 0;
  // t = e^-x, x from 0 to 40: panels that grow away from the centre of the beam.
  let from = 0;
  for (const to of PANELS) {
    const half = (to - from) / 2;
    for (let i = 0; i < NODES.length; i++) {
      const x = from + half * (1 + NODES[i]!);
      const weight = half * WEIGHTS[i]! * Math.exp(-x);
      const t = Math.exp(-ratio * x);
      const value = 1 / (1 + s * t);
      factor += weight * value;
      slope -= weight * value * value * t * (1 + ratio);
    }
    from = to;
  }
  return { factor, slope };
}

const PANELS = [1, 2, 3, 5, 8, 12, 20, 40];
/** Gauss-Legendre nodes and weights of order 10 on [-1, 1] (Abramowitz and Stegun, table 25.4). */
const HALF_NODES = [
  0.14887433898163122, 0.4333953941292472, 0.6794095682990244, 0.8650633666889845, 0.9739065285171717,
];
const HALF_WEIGHTS = [
  0.29552422471475287, 0.26926671930999635, 0.21908636251598204, 0.1494513491505806, 0.06667134430868814,
];
const NODES = [...HALF_NODES.map((x) => -x), ...HALF_NODES];
const WEIGHTS = [...HALF_WEIGHTS, ...HALF_WEIGHTS];
