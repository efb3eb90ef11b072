/**
 * What      Blockade by the interaction of two excitons: radius R where the interaction equals kappa times the full
 *           width, |C6|/R^6 = kappa G or |C3|/R^3 = kappa G; excluded volume (4 pi/3) R^3; its mean over the places in a
 *           slab; and the same averaged over distance, where a shift V takes the part 1/(1 + (kappa G/V)^2) away.
 * Units     width eV; C3 ueV um^3, C6 ueV um^6; lengths um.
 * Domain    positive arguments.
 * Accuracy  rounding only; tests/reference/blockade-figures.test.ts integrates independently.
 * Source    criterion: Lukin et al., Phys. Rev. Lett. 87, 037901 (2001); Saffman, Walker and Molmer, Rev. Mod. Phys. 82,
 *           2313 (2010). Averages and slab: elementary integrals (pair distances in a slab have density 2 (d-t)/d^2).
 */
export type Interaction = "dipole-dipole" | "van-der-waals";

/** Power of the distance, growth of the coefficient with n, and soft over hard average: pi/2 and pi/(2 sqrt 2). */
export const INTERACTIONS = {
  "dipole-dipole": { power: 3, growth: 4, soft: Math.PI / 2 },
  "van-der-waals": { power: 6, growth: 11, soft: Math.PI / (2 * Math.SQRT2) },
} as const;

/** e^2 a_B^2/(4 pi eps0 eps) for a_B = 1.11 nm, permittivity 7.5: an order of magnitude. */
export const DEFAULT_C3 = 2.37e-4;

/** `coefficient` at n = 1. */
export function blockadeRadius(
  interaction: Interaction,
  coefficient: number,
  n: number,
  width_eV: number,
  kappa: number,
): number {
  const { power, growth } = INTERACTIONS[interaction];
  return Math.pow((coefficient * Math.pow(n, growth)) / (kappa * width_eV * 1e6), 1 / power);
}

export function sphereVolume(radius: number): number {
  return ((4 * Math.PI) / 3) * radius ** 3;
}

export function sphereRadius(volume: number): number {
  return Math.cbrt((3 * volume) / (4 * Math.PI));
}

/** Part of the sphere that lies in a slab, mean over the centre's place in it: 1 - 3 R/(8 d) up to R = d. */
export function slabFactor(radius: number, thickness: number | null): number {
  if (thickness === null) return 1;
  if (radius <= thickness) return 1 - (3 * radius) / (8 * thickness);
  const inside = Math.PI * (radius * radius * thickness - thickness ** 3 / 6);
  return inside / sphereVolume(radius);
}

/** V(P)/V(0) where the width grows as sqrt(1 + s): the volume goes as the width to -3/power. */
export function shrinkage(interaction: Interaction, s: number): number {
  return Math.pow(1 + Math.max(0, s), shrinkageExponent(interaction));
}

/** -1/4 for van der Waals, -1/2 for dipole-dipole. */
export function shrinkageExponent(interaction: Interaction): number {
  return -3 / (2 * INTERACTIONS[interaction].power);
}
