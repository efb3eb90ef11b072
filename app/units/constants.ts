/**
 * What      Constants of nature with value, standard uncertainty, unit and edition.
 * Units     stated per constant; uncertainty in the same unit, 0 for what the SI fixes exactly.
 * Accuracy  tests/reference/constants.test.ts compares every one with the published tables.
 * Source    CODATA 2018: Tiesinga, Mohr, Newell, Taylor, Rev. Mod. Phys. 93, 025010 (2021);
 *           CODATA 2022: Mohr, Newell, Taylor, Tiesinga, Rev. Mod. Phys. 97, 025002 (2025).
 *           What follows from h, e, c, k and N_A alone is computed here and not listed.
 */
export interface Constant {
  readonly name: string;
  readonly value: number;
  /** One standard uncertainty; 0 where exact. */
  readonly uncertainty: number;
  readonly unit: string;
  readonly edition: Edition;
}

export type Edition = 2018 | 2022;

const PLANCK = 6.62607015e-34;
const CHARGE = 1.602176634e-19;
const LIGHT = 299792458;
const BOLTZMANN = 1.380649e-23;
const AVOGADRO = 6.02214076e23;

type Row = readonly [name: string, value: number, uncertainty: number, unit: string];

const EXACT = {
  h: ["Planck constant", PLANCK, 0, "J Hz^-1"],
  h_eV: ["Planck constant in eV/Hz", PLANCK / CHARGE, 0, "eV Hz^-1"],
  hbar: ["reduced Planck constant", PLANCK / (2 * Math.PI), 0, "J s"],
  hbar_eV_s: ["reduced Planck constant in eV s", PLANCK / (2 * Math.PI * CHARGE), 0, "eV s"],
  c: ["speed of light in vacuum", LIGHT, 0, "m s^-1"],
  e: ["elementary charge", CHARGE, 0, "C"],
  k_B: ["Boltzmann constant", BOLTZMANN, 0, "J K^-1"],
  k_B_eV: ["Boltzmann constant in eV/K", BOLTZMANN / CHARGE, 0, "eV K^-1"],
  N_A: ["Avogadro constant", AVOGADRO, 0, "mol^-1"],
  R_gas: ["molar gas constant", BOLTZMANN * AVOGADRO, 0, "J mol^-1 K^-1"],
  hc_eV_nm: ["hc in eV nm", ((PLANCK * LIGHT) / CHARGE) * 1e9, 0, "eV nm"],
  hc_eV_um: ["hc in eV um", ((PLANCK * LIGHT) / CHARGE) * 1e6, 0, "eV um"],
  inverse_m_to_eV: ["1 m^-1 in eV", (PLANCK * LIGHT) / CHARGE, 0, "eV"],
  eV_to_inverse_m: ["1 eV in m^-1", CHARGE / (PLANCK * LIGHT), 0, "m^-1"],
  eV_to_Hz: ["1 eV in Hz", CHARGE / PLANCK, 0, "Hz"],
  "eV_to_cm-1": ["1 eV in cm^-1", CHARGE / (PLANCK * LIGHT * 100), 0, "cm^-1/eV"],
  "cm-1_to_eV": ["1 cm^-1 in eV", (PLANCK * LIGHT * 100) / CHARGE, 0, "eV cm"],
  meV_to_GHz: ["1 meV in GHz", (CHARGE / PLANCK) * 1e-12, 0, "GHz/meV"],
  hbar_over_1ps_meV: ["hbar over 1 ps", (PLANCK / (2 * Math.PI * CHARGE)) * 1e15, 0, "meV ps"],
  hbar_over_1ueV_ps: ["hbar over 1 ueV", (PLANCK / (2 * Math.PI * CHARGE)) * 1e18, 0, "ueV ps"],
} as const satisfies Readonly<Record<string, Row>>;

const MEASURED_2018 = {
  R_inf: ["Rydberg constant", 10973731.56816, 2.1e-5, "m^-1"],
  Ry_eV: ["Rydberg constant times hc in eV", 13.605693122994, 2.6e-11, "eV"],
  R_inf_c: ["Rydberg constant times c in Hz", 3289841960250800, 6400, "Hz"],
  a_0: ["Bohr radius", 5.29177210903e-11, 8.0e-21, "m"],
  E_h_eV: ["Hartree energy in eV", 27.211386245988, 5.3e-11, "eV"],
  E_h_per_hc: ["Hartree energy over hc", 21947463.13632, 4.3e-5, "m^-1"],
  eps_0: ["vacuum electric permittivity", 8.8541878128e-12, 1.3e-21, "F m^-1"],
  mu_0: ["vacuum magnetic permeability", 1.25663706212e-6, 1.9e-16, "N A^-2"],
  m_e: ["electron mass", 9.1093837015e-31, 2.8e-40, "kg"],
  m_e_c2_MeV: ["electron mass energy equivalent in MeV", 0.51099895, 1.5e-10, "MeV"],
  m_e_u: ["electron mass in u", 5.48579909065e-4, 1.6e-14, "u"],
  m_p: ["proton mass", 1.67262192369e-27, 5.1e-37, "kg"],
  m_e_over_m_p: ["electron-proton mass ratio", 5.44617021487e-4, 3.3e-14, ""],
  alpha: ["fine-structure constant", 7.2973525693e-3, 1.1e-12, ""],
  mu_B_eV_T: ["Bohr magneton in eV/T", 5.788381806e-5, 1.7e-14, "eV T^-1"],
  m_u: ["atomic mass constant", 1.6605390666e-27, 5.0e-37, "kg"],
  au_polarizability: ["atomic unit of electric polarizability", 1.64877727436e-41, 5.0e-51, "C^2 m^2 J^-1"],
} as const satisfies Readonly<Record<string, Row>>;

const MEASURED_2022 = {
  R_inf: ["Rydberg constant", 10973731.568157, 1.2e-5, "m^-1"],
  Ry_eV: ["Rydberg constant times hc in eV", 13.60569312299, 1.5e-11, "eV"],
  R_inf_c: ["Rydberg constant times c in Hz", 3289841960250000, 3600, "Hz"],
  a_0: ["Bohr radius", 5.29177210544e-11, 8.2e-21, "m"],
  E_h_eV: ["Hartree energy in eV", 27.211386245981, 3.0e-11, "eV"],
  E_h_per_hc: ["Hartree energy over hc", 21947463.136314, 2.4e-5, "m^-1"],
  eps_0: ["vacuum electric permittivity", 8.8541878188e-12, 1.4e-21, "F m^-1"],
  mu_0: ["vacuum magnetic permeability", 1.25663706127e-6, 2.0e-16, "N A^-2"],
  m_e: ["electron mass", 9.1093837139e-31, 2.8e-40, "kg"],
  m_e_c2_MeV: ["electron mass energy equivalent in MeV", 0.51099895069, 1.6e-10, "MeV"],
  m_e_u: ["electron mass in u", 5.485799090441e-4, 9.7e-15, "u"],
  m_p: ["proton mass", 1.67262192595e-27, 5.2e-37, "kg"],
  m_e_over_m_p: ["electron-proton mass ratio", 5.446170214889e-4, 9.4e-15, ""],
  alpha: ["fine-structure constant", 7.2973525643e-3, 1.1e-12, ""],
  mu_B_eV_T: ["Bohr magneton in eV/T", 5.7883817982e-5, 1.8e-14, "eV T^-1"],
  m_u: ["atomic mass constant", 1.66053906892e-27, 5.2e-37, "kg"],
  au_polarizability: ["atomic unit of electric polarizability", 1.64877727212e-41, 5.1e-51, "C^2 m^2 J^-1"],
} as const satisfies Readonly<Record<string, Row>>;

export type ConstantSymbol = keyof typeof EXACT | keyof typeof MEASURED_2022;
export type ConstantTable = Readonly<Record<ConstantSymbol, Constant>>;

function makeTable(measured: Readonly<Record<string, Row>>, edition: Edition): ConstantTable {
  const table: Record<string, Constant> = {};
  for (const [symbol, [name, value, uncertainty, unit]] of Object.entries({ ...EXACT, ...measured })) {
    table[symbol] = { name, value, uncertainty, unit, edition };
  }
  return table as ConstantTable;
}

export const CODATA_2018: ConstantTable = makeTable(MEASURED_2018, 2018);
export const CODATA_2022: ConstantTable = makeTable(MEASURED_2022, 2022);

/** The edition that Rungline computes with. */
export const CODATA = CODATA_2022;

/** hc in eV nm, exact. */
export const HC_EV_NM: number = EXACT.hc_eV_nm[1];
/** hbar in ueV ps, exact: lifetime (ps) = HBAR_UEV_PS / width (ueV). */
export const HBAR_UEV_PS: number = EXACT.hbar_over_1ueV_ps[1];
/** Rydberg constant times hc, eV. */
export const RYDBERG_EV: number = MEASURED_2022.Ry_eV[1];
/** Bohr radius of hydrogen, nm. */
export const BOHR_RADIUS_NM: number = MEASURED_2022.a_0[1] * 1e9;
/** Boltzmann constant, eV/K, exact. */
export const BOLTZMANN_EV_K: number = EXACT.k_B_eV[1];
