import {
  FAR_4,
  FAR_FIELD,
  FAR_LARGEST,
  FOUR_NODES,
  TWO_OVER_ROOT_PI,
  farField,
  farFieldDerivative,
  nearField,
} from "./faddeeva.ts";
import { TINY_GAUSS } from "./voigt.ts";

/**
 * What      Unit-area absorptive profile L and its dispersive partner D of one line at E0 with full width G,
 *           L = (1/pi) g/[(E-E0)^2 + g^2],  D = (1/pi) (E-E0)/[(E-E0)^2 + g^2],  g = G/2;
 *           seen through a Gaussian instrument of standard deviation s > 0:
 *           L = Re w(z)/(s sqrt(2 pi)),  D = Im w(z)/(s sqrt(2 pi)),  z = (E - E0 + i g)/(s sqrt 2).
 *           The asymmetric line of area A is A (L + 2 q D).
 * Shapes    energies (any length); elements from <= i < to are read, absorptive[offset + i] and
 *           dispersive[offset + i] are written (offset is where a column begins, so a window keeps its place).
 * Units     energies, center, width, gaussStd in eV; L and D in 1/eV.
 * Domain    width > 0 or gaussStd > 0, width >= 0, any order of energies. gaussStd below 1e-9 of the half width
 *           counts as none.
 * Accuracy  relative error of L and D a few 1e-15 (components of w below 1e-12 next to the real axis).
 * Source    Toyozawa, J. Phys. Chem. Solids 25, 59 (1964), for the asymmetric line; DLMF 7.19 for the Voigt form;
 *           the convolved partner is the imaginary part of the same analytic function.
 */
export function linePair(
  energies: Float64Array,
  from: number,
  to: number,
  center: number,
  width: number,
  gaussStd: number,
  absorptive: Float64Array,
  dispersive: Float64Array,
  offset = 0,
): void {
  const g = width / 2;
  if (!(gaussStd > TINY_GAUSS * g)) {
    for (let i = from; i < to; i++) {
      const u = energies[i]! - center;
      const inverse = 1 / (Math.PI * (u * u + g * g));
      absorptive[offset + i] = g * inverse;
      dispersive[offset + i] = u * inverse;
    }
    return;
  }
  const scale = Math.SQRT1_2 / gaussStd;
  const height = scale / Math.sqrt(Math.PI);
  const y = g * scale;
  const y2 = y * y;
  const w = new Float64Array(2);
  // Wings are most of the points: there farField's rule of four nodes is written out with one division, and without the
  // way through memory, which takes half the time.
  const { nodeA, nodeB, weightA, weightB } = FOUR_NODES;
  const wings = y > 1e-10 ? FAR_4 : Infinity;
  for (let i = from; i < to; i++) {
    const x = (energies[i]! - center) * scale;
    const x2 = x * x;
    const r2 = x2 + y2;
    if (r2 >= wings && r2 < FAR_LARGEST) {
      const a = x2 - y2;
      const b = 4 * x2 * y2;
      const dA = (a - nodeA) * (a - nodeA) + b;
      const dB = (a - nodeB) * (a - nodeB) + b;
      const inverse = 1 / (dA * dB);
      const termA = weightA * dB * inverse;
      const termB = weightB * dA * inverse;
      const sum = r2 * (termA + termB);
      const moment = termA * nodeA + termB * nodeB;
      absorptive[offset + i] = height * y * (sum + moment);
      dispersive[offset + i] = height * x * (sum - moment);
      continue;
    }
    if (r2 >= FAR_FIELD) farField(x, y, r2, w);
    else nearField(x, y, r2, w);
    absorptive[offset + i] = height * w[0]!;
    dispersive[offset + i] = height * w[1]!;
  }
}

/**
 * What      The line pair with its partial derivatives by line energy E0 and full width G. With k = 1/(s sqrt 2) and
 *           c = k^2/sqrt(pi), from w' and the Cauchy-Riemann relations:
 *           dL/dE0 = -c Re w',  dD/dE0 = -c Im w',  dL/dG = -(c/2) Im w',  dD/dG = (c/2) Re w'.
 * Shapes    as linePair; all six outputs are written at [offset + i].
 * Units     derivatives in 1/eV^2.
 * Accuracy  values as linePair; derivatives to about 1e-13 of |w'| (near field: w' = -2 z w + 2 i/sqrt(pi) loses up to
 *           2 |z|^2 <= 120 units in the last place; far field: the differentiated sum of poles loses nothing).
 * Source    DLMF 7.10.2.
 */
export function linePairWithDerivatives(
  energies: Float64Array,
  from: number,
  to: number,
  center: number,
  width: number,
  gaussStd: number,
  absorptive: Float64Array,
  dispersive: Float64Array,
  absorptiveByCenter: Float64Array,
  absorptiveByWidth: Float64Array,
  dispersiveByCenter: Float64Array,
  dispersiveByWidth: Float64Array,
  offset = 0,
): void {
  const g = width / 2;
  if (!(gaussStd > TINY_GAUSS * g)) {
    for (let i = from; i < to; i++) {
      const u = energies[i]! - center;
      const inverse = 1 / (u * u + g * g);
      const a = g * inverse * (1 / Math.PI);
      const d = u * inverse * (1 / Math.PI);
      const cross = 2 * u * inverse * a;
      const square = (u - g) * (u + g) * inverse * inverse * (1 / Math.PI);
      const k = offset + i;
      absorptive[k] = a;
      dispersive[k] = d;
      absorptiveByCenter[k] = cross;
      absorptiveByWidth[k] = 0.5 * square;
      dispersiveByCenter[k] = square;
      dispersiveByWidth[k] = -0.5 * cross;
    }
    return;
  }
  const scale = Math.SQRT1_2 / gaussStd;
  const height = scale / Math.sqrt(Math.PI);
  const slope = height * scale;
  const y = g * scale;
  const y2 = y * y;
  const w = new Float64Array(2);
  const derivative = new Float64Array(2);
  const { nodeA, nodeB, weightA, weightB } = FOUR_NODES;
  const wings = y > 1e-10 ? FAR_4 : Infinity;
  for (let i = from; i < to; i++) {
    const x = (energies[i]! - center) * scale;
    const x2 = x * x;
    const r2 = x2 + y2;
    const k = offset + i;
    let re: number;
    let im: number;
    if (r2 >= wings && r2 < FAR_LARGEST) {
      // farField and farFieldDerivative with four nodes, written out as in linePair.
      const a = x2 - y2;
      const b = 2 * x * y;
      const b2 = b * b;
      const realA = a - nodeA;
      const realB = a - nodeB;
      const dA = realA * realA + b2;
      const dB = realB * realB + b2;
      const inverse = 1 / (dA * dB);
      const inverseA = dB * inverse;
      const inverseB = dA * inverse;
      const termA = weightA * inverseA;
      const termB = weightB * inverseB;
      const sum = r2 * (termA + termB);
      const moment = termA * nodeA + termB * nodeB;
      absorptive[k] = height * y * (sum + moment);
      dispersive[k] = height * x * (sum - moment);
      const squareA = slope * termA * inverseA;
      const squareB = slope * termB * inverseB;
      const differenceA = realA * realA - b2;
      const differenceB = realB * realB - b2;
      const plusA = a + nodeA;
      const plusB = a + nodeB;
      re = b * (squareA * (differenceA - 2 * realA * plusA) + squareB * (differenceB - 2 * realB * plusB));
      im = -(
        squareA * (plusA * differenceA + 2 * realA * b2) +
        squareB * (plusB * differenceB + 2 * realB * b2)
      );
      absorptiveByCenter[k] = -re;
      absorptiveByWidth[k] = -0.5 * im;
      dispersiveByCenter[k] = -im;
      dispersiveByWidth[k] = 0.5 * re;
      continue;
    }
    if (r2 >= FAR_FIELD) {
      farField(x, y, r2, w);
      farFieldDerivative(x, y, r2, derivative);
      re = slope * derivative[0]!;
      im = slope * derivative[1]!;
    } else {
      nearField(x, y, r2, w);
      re = -2 * slope * (x * w[0]! - y * w[1]!);
      im = slope * (TWO_OVER_ROOT_PI - 2 * (x * w[1]! + y * w[0]!));
    }
    absorptive[k] = height * w[0]!;
    dispersive[k] = height * w[1]!;
    absorptiveByCenter[k] = -re;
    absorptiveByWidth[k] = -0.5 * im;
    dispersiveByCenter[k] = -im;
    dispersiveByWidth[k] = 0.5 * re;
  }
}

/**
 * What      Partial derivatives of the line pair by the instrument's standard deviation s. Convolution with a
 *           Gaussian obeys the heat equation, so dL/ds = s d2L/dE2 and likewise for D; near field
 *           w'' = -2 w - 2 z w', far field the asymptotic series differentiated twice.
 * Shapes    as linePair. Only for s > 0.
 * Units     1/eV^2.
 * Accuracy  relative error about 1e-12 of |w''| in the near field (two cancelling steps, 4 |z|^4 ulp at worst at
 *           |z| = 7.7), 1e-13 beyond.
 * Source    DLMF 7.10.2, and 7.12.1 with 7.5.1 for the series.
 */
export function linePairByGaussStd(
  energies: Float64Array,
  from: number,
  to: number,
  center: number,
  width: number,
  gaussStd: number,
  absorptiveByStd: Float64Array,
  dispersiveByStd: Float64Array,
  offset = 0,
): void {
  const g = width / 2;
  if (!(gaussStd > TINY_GAUSS * g)) {
    absorptiveByStd.fill(0, offset + from, offset + to);
    dispersiveByStd.fill(0, offset + from, offset + to);
    return;
  }
  const scale = Math.SQRT1_2 / gaussStd;
  const y = (width / 2) * scale;
  // s L'' = s (scale^3/sqrt(pi)) w'' = (scale^2/sqrt(2 pi)) w''
  const curvature = (scale * scale) / Math.sqrt(2 * Math.PI);
  const w = new Float64Array(2);
  for (let i = from; i < to; i++) {
    const x = (energies[i]! - center) * scale;
    const r2 = x * x + y * y;
    if (r2 >= FAR_FIELD) {
      farCurvature(x, y, w);
    } else {
      nearField(x, y, r2, w);
      const re = -2 * (x * w[0]! - y * w[1]!);
      const im = TWO_OVER_ROOT_PI - 2 * (x * w[1]! + y * w[0]!);
      const secondRe = -2 * (w[0]! + x * re - y * im);
      const secondIm = -2 * (w[1]! + x * im + y * re);
      w[0] = secondRe;
      w[1] = secondIm;
    }
    absorptiveByStd[offset + i] = curvature * w[0]!;
    dispersiveByStd[offset + i] = curvature * w[1]!;
  }
}

/** w'' for |z|^2 >= FAR_FIELD: (i/sqrt(pi)) Sum_m (2m+1)(2m+2) (1/2)_m z^(-2m-3), summed until it stops falling. */
function farCurvature(x: number, y: number, out: Float64Array): void {
  const r2 = x * x + y * y;
  // v = 1/z
  const vr = x / r2;
  const vi = -y / r2;
  const ur = vr * vr - vi * vi;
  const ui = 2 * vr * vi;
  // term = v^3 (1/2)_m u^m
  let tr = vr * ur - vi * ui;
  let ti = vr * ui + vi * ur;
  let sr = 2 * tr;
  let si = 2 * ti;
  for (let m = 1; m < 30; m++) {
    const pr = (m - 0.5) * (tr * ur - ti * ui);
    ti = (m - 0.5) * (tr * ui + ti * ur);
    tr = pr;
    const factor = (2 * m + 1) * (2 * m + 2);
    sr += factor * tr;
    si += factor * ti;
    if (Math.abs(factor * tr) + Math.abs(factor * ti) < 1e-17 * (Math.abs(sr) + Math.abs(si))) break;
  }
  const f = 1 / Math.sqrt(Math.PI);
  out[0] = -f * si;
  out[1] = f * sr;
  if (y < 1e-10 && x * x < 746) out[0] += (4 * x * x - 2) * Math.exp(-x * x);
}

/**
 * What      The pair of the other half of the response, in place: (L, D) becomes (-D, L). With F = -D + i L, the line's
 *           analytic amplitude 1/[pi (E0 - E - i g)], absorption A (L + 2 q D) is Im[A (1 - 2 i q) F]; the same expression on
 *           the turned pair, A (-D + 2 q L), is its real part: 2 E/(hbar c) times the change of the refractive index.
 * Shapes    two columns of one length, both written.
 * Source    Kramers-Kronig relations of a narrow line (E0 in place of E in the slow factor).
 */
export function turnPair(absorptive: Float64Array, dispersive: Float64Array): void {
  for (let i = 0; i < absorptive.length; i++) {
    const value = absorptive[i]!;
    absorptive[i] = -dispersive[i]!;
    dispersive[i] = value;
  }
}
