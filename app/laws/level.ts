/**
 * What      Level law of a hydrogen-like series with the modified Ritz expansion of its quantum defect:
 *           E_n = E_g - Ry/(n - delta_n)^2,  delta_n = delta0 + delta2/(n-delta0)^2 + delta4/(n-delta0)^4.
 *           Defect "none" is all deltas 0, "constant" is delta2 = delta4 = 0.
 * Shapes    out (LEVEL.size): value and partial derivatives at the indices of LEVEL.
 * Units     gap, rydberg and the value in one energy unit (eV); n and the deltas dimensionless. delta_n is the total
 *           shift from the integer n (0.5 for an ideal sheet).
 * Domain    n > delta_n, n real (d/dn is for tails treated as continuous). n = delta_n gives -Infinity.
 * Accuracy  rounding only.
 * Source    Ritz, Phys. Z. 4, 406 (1903); Lorenzen and Niemax, Phys. Scr. 27, 300 (1983); Drake and Swainson, Phys. Rev.
 *           A 44, 5448 (1991) (explicit form, n - delta0 on the right).
 */
export interface LevelParameters {
  readonly gap: number;
  readonly rydberg: number;
  readonly defect0: number;
  readonly defect2: number;
  readonly defect4: number;
}

/** Places in the output of `levelLaw`. */
export const LEVEL = {
  energy: 0,
  byGap: 1,
  byRydberg: 2,
  byDefect0: 3,
  byDefect2: 4,
  byDefect4: 5,
  byN: 6,
  /** n - delta_n, and its derivatives are those of the energy divided by 2 Ry/(n - delta_n)^3. */
  effectiveN: 7,
  size: 8,
} as const;

export function levelLaw(n: number, parameters: LevelParameters, out: Float64Array): void {
  const { gap, rydberg, defect0, defect2, defect4 } = parameters;
  const inverse2 = 1 / ((n - defect0) * (n - defect0));
  const nu = n - defect0 - inverse2 * (defect2 + inverse2 * defect4);
  const nuByN = 1 + (2 * inverse2 * (defect2 + 2 * inverse2 * defect4)) / (n - defect0);
  const byNu = (2 * rydberg) / (nu * nu * nu);
  out[LEVEL.energy] = gap - rydberg / (nu * nu);
  out[LEVEL.byGap] = 1;
  out[LEVEL.byRydberg] = -1 / (nu * nu);
  out[LEVEL.byDefect0] = -byNu * nuByN;
  out[LEVEL.byDefect2] = -byNu * inverse2;
  out[LEVEL.byDefect4] = -byNu * inverse2 * inverse2;
  out[LEVEL.byN] = byNu * nuByN;
  out[LEVEL.effectiveN] = nu;
}

/** Total defect delta_n. */
export function defectAt(n: number, defect0: number, defect2 = 0, defect4 = 0): number {
  const inverse2 = 1 / ((n - defect0) * (n - defect0));
  return defect0 + inverse2 * (defect2 + inverse2 * defect4);
}

/** E_n alone. */
export function levelEnergy(
  n: number,
  gap: number,
  rydberg: number,
  defect0 = 0,
  defect2 = 0,
  defect4 = 0,
): number {
  const nu = n - defectAt(n, defect0, defect2, defect4);
  return gap - rydberg / (nu * nu);
}

/** n - delta_n that puts a line at this energy; NaN at and above the gap. */
export function effectiveNAt(energy: number, gap: number, rydberg: number): number {
  return energy < gap ? Math.sqrt(rydberg / (gap - energy)) : Number.NaN;
}

/** Spacing E_(n+1) - E_n. */
export function levelSpacing(n: number, rydberg: number, defect0 = 0, defect2 = 0, defect4 = 0): number {
  const lower = n - defectAt(n, defect0, defect2, defect4);
  const upper = n + 1 - defectAt(n + 1, defect0, defect2, defect4);
  // 1/lower^2 - 1/upper^2 without cancellation at high n.
  return (rydberg * (upper - lower) * (upper + lower)) / (lower * lower * upper * upper);
}
