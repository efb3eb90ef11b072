/**
 * What      The asymmetric line alpha(E) = (A/pi) [g + 2 q (E - E0)]/[(E - E0)^2 + g^2], g = G/2, read in formulas:
 *           its maximum and minimum, and its Fano reading.
 * Units     center and width in eV, area in eV times the unit of alpha; q and q_F dimensionless.
 * Domain    width > 0. q -> 0 goes over smoothly into the symmetric line.
 * Source    Toyozawa, J. Phys. Chem. Solids 25, 59 (1964); Fano, Phys. Rev. 124, 1866 (1961).
 */

/** Energy of the maximum (A > 0): E0 + g [sqrt(1 + 4 q^2) - 1]/(2 q), written without the 0/0 at q = 0. */
export function peakPosition(center: number, width: number, asymmetry: number): number {
  return center + (width * asymmetry) / (1 + Math.sqrt(1 + 4 * asymmetry * asymmetry));
}

/** Height at that maximum: (A/pi) [1 + sqrt(1 + 4 q^2)]/(2 g). */
export function peakHeight(area: number, width: number, asymmetry: number): number {
  return (area * (1 + Math.sqrt(1 + 4 * asymmetry * asymmetry))) / (Math.PI * width);
}

/** Energy of the minimum (A > 0): E0 - g [sqrt(1 + 4 q^2) + 1]/(2 q); -+Infinity for q = +-0. */
export function dipPosition(center: number, width: number, asymmetry: number): number {
  return center - (width * (1 + Math.sqrt(1 + 4 * asymmetry * asymmetry))) / (4 * asymmetry);
}

/** Height at that minimum (of the sign opposite to A): (A/pi) [1 - sqrt(1 + 4 q^2)]/(2 g). */
export function dipHeight(area: number, width: number, asymmetry: number): number {
  const root = Math.sqrt(1 + 4 * asymmetry * asymmetry);
  return (-4 * area * asymmetry * asymmetry) / (Math.PI * width * (1 + root));
}

/**
 * Fano's q_F of the line, from q = q_F/(q_F^2 - 1). The profile is height [(q_F^2 - 1)(1 + 2 q e)/(1 + e^2) + 1] with
 * height > 0 and flat part height, so A > 0 takes the root |q_F| > 1, [1 + sqrt(1 + 4 q^2)]/(2 q), and A < 0 (a window
 * resonance) the root |q_F| < 1, [1 - sqrt(1 + 4 q^2)]/(2 q). q = 0: Infinity and 0.
 */
export function fanoFromAsymmetry(asymmetry: number, area = 1): number {
  const root = 1 + Math.sqrt(1 + 4 * asymmetry * asymmetry);
  return area < 0 ? (-2 * asymmetry) / root : root / (2 * asymmetry);
}

/** dq_F/dq of the same root. */
export function fanoByAsymmetry(asymmetry: number, area = 1): number {
  const qf = fanoFromAsymmetry(asymmetry, area);
  // q (q_F^2 - 1) = q_F  =>  dq_F/dq = (q_F^2 - 1)/(1 - 2 q q_F)
  return (qf * qf - 1) / (1 - 2 * asymmetry * qf);
}

/** Asymmetry q of a Fano line; +-Infinity at |q_F| = 1, where the line is purely dispersive. */
export function asymmetryFromFano(fano: number): number {
  return Math.abs(fano) > 1 ? 1 / (fano - 1 / fano) : fano / (fano * fano - 1);
}

/**
 * The same line written after Fano: height [(q_F + e)^2/(1 + e^2) - 1], e = (E - E0)/g. The flat part `height` of the
 * Fano form belongs to the background.
 */
export function fanoHeight(area: number, width: number, asymmetry: number): number {
  const qf = fanoFromAsymmetry(asymmetry, area);
  return (2 * area) / (Math.PI * width * (qf * qf - 1));
}
