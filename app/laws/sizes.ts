/**
 * What      Sizes, masses, lifetimes and exponents that follow from the series.
 *           Ry a_B = e^2/(8 pi eps0 eps);  Ry = (mu/m0) Ry_H/eps^2;
 *           <r>_nl = (a_B/2) [3 n^2 - l (l+1)];  <r^2>_nl = (a_B^2 n^2/2) [5 n^2 + 1 - 3 l (l+1)];
 *           dimension D: <r> = (a_B/2) [3 nu^2 - lam (lam+1)], nu = n + (D-3)/2, lam = l + (D-3)/2;
 *           tau = hbar/G.
 * Units     energies eV, lengths nm, times ps.
 * Domain    positive arguments, n > l >= 0.
 * Accuracy  rounding only; the constants hold 10 digits or more.
 * Source    Bethe and Salpeter, Quantum Mechanics of One- and Two-Electron Atoms (1957), sec. 3; He, Phys. Rev. B 43,
 *           2063 (1991) for the fractional dimension; constants CODATA 2018, Rev. Mod. Phys. 93, 025010 (2021).
 */

/** e^2/(8 pi eps0) = Ry_H a_0 with infinite nuclear mass, eV nm (13.605693122994 eV times 0.0529177210903 nm). */
export const RYDBERG_TIMES_BOHR = 13.605693122994 * 0.0529177210903;

/** Rydberg energy, eV. CODATA 2018. */
export const RYDBERG_ENERGY = 13.605693122994;

/** Reduced Planck constant, eV ps, exact in the SI since 2019. */
export const HBAR = 6.582119569509e-4;

export function bohrRadiusFromRydberg(rydberg: number, permittivity: number): number {
  return RYDBERG_TIMES_BOHR / (permittivity * rydberg);
}

export function rydbergFromBohrRadius(bohrRadius: number, permittivity: number): number {
  return RYDBERG_TIMES_BOHR / (permittivity * bohrRadius);
}

export function permittivityFromSeries(rydberg: number, bohrRadius: number): number {
  return RYDBERG_TIMES_BOHR / (rydberg * bohrRadius);
}

/** a_B = a_0 eps/(mu/m0), reduced mass in electron masses. */
export function bohrRadiusFromMass(reducedMass: number, permittivity: number): number {
  return (0.0529177210903 * permittivity) / reducedMass;
}

/** mu/m0 = Ry eps^2/Ry_H. */
export function reducedMassFromRydberg(rydberg: number, permittivity: number): number {
  return (rydberg * permittivity * permittivity) / RYDBERG_ENERGY;
}

export function meanRadius(n: number, l: number, bohrRadius: number): number {
  return (bohrRadius / 2) * (3 * n * n - l * (l + 1));
}

export function meanSquareRadius(n: number, l: number, bohrRadius: number): number {
  return ((bohrRadius * bohrRadius * n * n) / 2) * (5 * n * n + 1 - 3 * l * (l + 1));
}

/** Sheet: dimension 2. Dimension 3 is `meanRadius`. */
export function meanRadiusInDimension(n: number, l: number, dimension: number, bohrRadius: number): number {
  const shift = (dimension - 3) / 2;
  return meanRadius(n + shift, l + shift, bohrRadius);
}

/** tau = hbar/G in ps for a full width in eV; Infinity at 0. */
export function lifetimeFromWidth(width: number): number {
  return HBAR / width;
}

export function widthFromLifetime(lifetime: number): number {
  return HBAR / lifetime;
}

/**
 * How properties of a hydrogen-like series grow with n: value(n) = value(1) n^exponent, n >> 1.
 * Source: Saffman, Walker and Molmer, Rev. Mod. Phys. 82, 2313 (2010), table I; common practice for excitons.
 */
export const SCALING_EXPONENTS = {
  binding: -2,
  spacing: -3,
  width: -3,
  strength: -3,
  lifetime: 3,
  radius: 2,
  transitionDipole: 2,
  dipoleDipole: 4,
  vanDerWaals: 11,
  polarizability: 7,
  blockadeVolume: 7,
  saturation: 10,
  ionisationField: -4,
} as const;

/** value(n) from value(m) by a scaling exponent, with effective quantum numbers. */
export function scaleWithN(value: number, exponent: number, fromN: number, toN: number): number {
  return value * Math.pow(toN / fromN, exponent);
}
