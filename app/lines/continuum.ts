import { digamma } from "./digamma.ts";

/** allowed-3d: s excitons; forbidden-3d: p excitons; allowed-2d: s excitons of an ideal sheet. */
export type ContinuumEnvelope = "allowed-3d" | "forbidden-3d" | "allowed-2d";

/** Columns that are wanted; each is written at [offset + i]. */
export interface ContinuumOutputs {
  readonly absorptive: Float64Array;
  /** Partner of the dispersive part of the lines, so that A_n (L + 2 q D) goes on smoothly through the gap. */
  readonly dispersive?: Float64Array;
  readonly absorptiveByGap?: Float64Array;
  readonly absorptiveByRydberg?: Float64Array;
  readonly absorptiveByBroadening?: Float64Array;
  readonly dispersiveByGap?: Float64Array;
  readonly dispersiveByRydberg?: Float64Array;
  readonly dispersiveByBroadening?: Float64Array;
}

/**
 * What      Absorption of the ionised states for the strength law A_n -> C n^-3 with C = 1 (sheet: (n-1/2)^-3), so its
 *           height at the gap is 1/(2 Ry), the height of the averaged lines just below (A_n dn/dE):
 *             allowed 3D    1/(1 - exp(-2 pi/sqrt(x)))            /(2 Ry),  x = (E - E_g)/Ry > 0
 *             forbidden 3D  (1 + x)/(1 - exp(-2 pi/sqrt(x)))      /(2 Ry)
 *             allowed 2D    1/(1 + exp(-2 pi/sqrt(x)))            /(2 Ry)
 *           The edge is broadened by a Lorentzian of full width G in closed form. The unbroadened curve is
 *           (1/pi) Im K(x + i 0) of a function analytic in the upper half plane, so the convolution is
 *           (1/pi) Im K(z) at z = x + i G/(2 Ry). With k = (-z)^(-1/2), Re k > 0,
 *             allowed 3D    K = ln k - 1/(2 k) + psi(1 + k)
 *             forbidden 3D  K = (1 + z) [ln k - 1/(2 k) + psi(1 + k)]
 *             allowed 2D    K = ln k + psi(1/2 + k)
 *           which hold no bound states (those are poles of the full response, taken out term by term from the partial
 *           fractions of coth and tanh). Near the gap this is (1/2 Ry)[1/2 + atan(2 (E-E_g)/G)/pi]; far below it is the
 *           wing that the Lorentzian draws from the whole continuum. Dispersive partner: -(1/pi) Re K.
 * Shapes    elements from <= i < to of energies are read, outputs are written at [offset + i].
 * Units     energies, gap, rydberg, broadening (FWHM) in eV; columns 1/eV, derivatives 1/eV^2.
 * Domain    rydberg > 0, broadening >= 0. With broadening 0 the edge is a step of half height at E = E_g, where the
 *           derivatives are written as 0.
 * Accuracy  allowed forms: equal to the convolution to 1e-12 of the height (tests/app/lines/continuum.test.ts).
 *           Forbidden 3D: the curve grows as x^(3/2), so its convolution with a Lorentzian diverges; K is the convolution
 *           with that divergence (a constant of order G/Ry) left out, equal to a convolution cut off some Ry above the
 *           gap up to a smooth offset of a few G/Ry of the height, below 1e-3 for the widths met here.
 * Source    Elliott, Phys. Rev. 108, 1384 (1957); Shinada and Sugano, J. Phys. Soc. Jpn. 21, 1936 (1966); broadening by
 *           complex energy after Tanguy, Phys. Rev. Lett. 75, 4090 (1995); separation from the lines is ours.
 */
export function continuumPair(
  energies: Float64Array,
  from: number,
  to: number,
  gap: number,
  rydberg: number,
  envelope: ContinuumEnvelope,
  broadening: number,
  outputs: ContinuumOutputs,
  offset = 0,
): void {
  const {
    absorptive,
    dispersive,
    absorptiveByGap,
    absorptiveByRydberg,
    absorptiveByBroadening,
    dispersiveByGap,
    dispersiveByRydberg,
    dispersiveByBroadening,
  } = outputs;
  const height = 1 / (2 * Math.PI * rydberg);
  const y = broadening / (2 * rydberg);
  const response = new Float64Array(4);
  for (let i = from; i < to; i++) {
    const x = (energies[i]! - gap) / rydberg;
    complexResponse(x, y, envelope, response);
    const re = response[0]!;
    const im = response[1]!;
    // dz/dgap = -1/Ry, dz/dRy = -z/Ry, dz/dG = i/(2 Ry)
    const slopeRe = response[2]! / rydberg;
    const slopeIm = response[3]! / rydberg;
    const k = offset + i;
    absorptive[k] = height * im;
    if (absorptiveByGap) absorptiveByGap[k] = -height * slopeIm;
    if (absorptiveByRydberg) absorptiveByRydberg[k] = -height * (im / rydberg + x * slopeIm + y * slopeRe);
    if (absorptiveByBroadening) absorptiveByBroadening[k] = 0.5 * height * slopeRe;
    if (dispersive) dispersive[k] = -height * re;
    if (dispersiveByGap) dispersiveByGap[k] = height * slopeRe;
    if (dispersiveByRydberg) dispersiveByRydberg[k] = height * (re / rydberg + x * slopeRe - y * slopeIm);
    if (dispersiveByBroadening) dispersiveByBroadening[k] = 0.5 * height * slopeIm;
  }
}

/** The absorptive part of `continuumPair` alone, with the derivatives that are given a place. */
export function continuum(
  energies: Float64Array,
  from: number,
  to: number,
  gap: number,
  rydberg: number,
  envelope: ContinuumEnvelope,
  broadening: number,
  absorptive: Float64Array,
  absorptiveByGap?: Float64Array,
  absorptiveByRydberg?: Float64Array,
  absorptiveByBroadening?: Float64Array,
  offset = 0,
): void {
  const outputs: ContinuumOutputs = {
    absorptive,
    ...(absorptiveByGap ? { absorptiveByGap } : {}),
    ...(absorptiveByRydberg ? { absorptiveByRydberg } : {}),
    ...(absorptiveByBroadening ? { absorptiveByBroadening } : {}),
  };
  continuumPair(energies, from, to, gap, rydberg, envelope, broadening, outputs, offset);
}

/** K(z) and K'(z) at z = x + i y, y >= 0: out (4). */
function complexResponse(x: number, y: number, envelope: ContinuumEnvelope, out: Float64Array): void {
  const modulus = Math.hypot(x, y);
  if (modulus === 0) {
    out[0] = 0;
    out[1] = Math.PI / 2;
    out[2] = 0;
    out[3] = 0;
    return;
  }
  // s = sqrt(-z) = a - i b with a, b >= 0, each from the sum that does not cancel; k = 1/s = (a + i b)/|z|.
  const larger = Math.sqrt((modulus + Math.abs(x)) / 2);
  const smaller = y / (2 * larger);
  const a = x <= 0 ? larger : smaller;
  const b = x <= 0 ? smaller : larger;
  const kr = a / modulus;
  const ki = b / modulus;
  const sheet = envelope === "allowed-2d";
  digamma(kr + (sheet ? 0.5 : 1), ki, out);
  // K and dK/dk
  let re = out[0]! - 0.5 * Math.log(modulus);
  let im = out[1]! + Math.atan2(b, a);
  let byKRe = out[2]! + a;
  let byKIm = out[3]! - b;
  if (!sheet) {
    re -= a / 2;
    im += b / 2;
    byKRe += (a * a - b * b) / 2;
    byKIm -= a * b;
  }
  // dk/dz = k^3/2
  const squareRe = kr * kr - ki * ki;
  const squareIm = 2 * kr * ki;
  const factorRe = (kr * squareRe - ki * squareIm) / 2;
  const factorIm = (kr * squareIm + ki * squareRe) / 2;
  const slopeRe = byKRe * factorRe - byKIm * factorIm;
  const slopeIm = byKRe * factorIm + byKIm * factorRe;
  if (envelope === "forbidden-3d") {
    out[0] = (1 + x) * re - y * im;
    out[1] = (1 + x) * im + y * re;
    out[2] = re + (1 + x) * slopeRe - y * slopeIm;
    out[3] = im + (1 + x) * slopeIm + y * slopeRe;
    return;
  }
  out[0] = re;
  out[1] = im;
  out[2] = slopeRe;
  out[3] = slopeIm;
}
