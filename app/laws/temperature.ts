/** Boltzmann constant, eV/K, exact in the SI since 2019. Source: CODATA 2022, Rev. Mod. Phys. 97, 025002 (2025). */
export const BOLTZMANN = 8.617333262145e-5;

/**
 * What      Gap and linewidth against temperature.
 *           Varshni         E = E_0 - a T^2/(T + b)
 *           Bose-Einstein   E = E_B - a_B [1 + 2/(exp(Theta/T) - 1)] = E_B - a_B coth(Theta/(2 T))
 *           phonons         G = G_0 + a T + b/[exp(hw/(k_B T)) - 1]
 * Shapes    out: value first, then the partial derivatives in the order of the arguments after T.
 * Units     T, b (Varshni) and Theta in K; energies and widths in eV; a in eV/K.
 * Domain    T >= 0 (T = 0 is the limit), Varshni T + b > 0, Theta > 0, hw > 0.
 * Accuracy  rounding only (expm1).
 * Source    Varshni, Physica 34, 149 (1967); O'Donnell and Chen, Appl. Phys. Lett. 58, 2924 (1991); Rudin, Reinecke and
 *           Segall, Phys. Rev. B 42, 11218 (1990).
 */
export function varshni(temperature: number, gap0: number, a: number, b: number, out: Float64Array): void {
  const sum = temperature + b;
  const ratio = sum === 0 ? 0 : temperature / sum;
  out[0] = gap0 - a * temperature * ratio;
  out[1] = 1;
  out[2] = -temperature * ratio;
  out[3] = a * ratio * ratio;
}

/** out (4): value, by E_B, by a_B, by Theta. */
export function boseEinsteinGap(
  temperature: number,
  gapB: number,
  coupling: number,
  theta: number,
  out: Float64Array,
): void {
  const occupation = bose(theta, temperature);
  out[0] = gapB - coupling * (1 + 2 * occupation);
  out[1] = 1;
  out[2] = -(1 + 2 * occupation);
  out[3] = -2 * coupling * boseByEnergy(occupation, temperature);
}

/** out (5): value, by G_0, by a, by b, by the phonon energy. */
export function phononWidth(
  temperature: number,
  width0: number,
  acoustic: number,
  optical: number,
  phononEnergy: number,
  out: Float64Array,
): void {
  const thermal = BOLTZMANN * temperature;
  const occupation = bose(phononEnergy, thermal);
  out[0] = width0 + acoustic * temperature + optical * occupation;
  out[1] = 1;
  out[2] = temperature;
  out[3] = occupation;
  out[4] = optical * boseByEnergy(occupation, thermal);
}

/** 1/(exp(energy/thermal) - 1), both in one unit; 0 at thermal = 0. */
export function bose(energy: number, thermal: number): number {
  return thermal > 0 ? 1 / Math.expm1(energy / thermal) : 0;
}

/** d bose/d energy = -N (N + 1)/thermal. */
function boseByEnergy(occupation: number, thermal: number): number {
  return thermal > 0 ? (-occupation * (occupation + 1)) / thermal : 0;
}
