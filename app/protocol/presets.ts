import type { ProtocolInput } from "./protocol-schema.ts";

/** A material preset: only starting values and defaults, stated in every result. */
export interface Preset {
  readonly id: string;
  readonly title: string;
  /** Where the figures come from; figures from memory say so. */
  readonly source: string;
  readonly protocol: ProtocolInput;
}

export const PRESETS: readonly Preset[] = [
  {
    id: "cuprous-oxide-yellow-p",
    title: "Cuprous oxide, yellow P series",
    source:
      "Kazimierczuk et al., Nature 514, 343 (2014): gap, Rydberg energy, defect, Bohr radius (values from memory); published Rydberg energies 86-98 meV; width start 16 meV/n^3 (value from memory); onset 1S ortho 2.0328 eV + phonon 13.6 meV (values from memory)",
    protocol: {
      material: {
        preset: "cuprous-oxide-yellow-p",
        dimension: 3,
        envelope: "P",
        first_n: 2,
        gap_eV: 2.17208,
        rydberg_eV: 0.092,
        defect0: 0.23,
        permittivity: 7.5,
        bohr_radius_nm: 1.11,
        index: 2.95,
      },
      width: { exponent: 3 },
      strength: { law: "p-envelope" },
      background: [
        { term: "polynomial", order: 2 },
        { term: "square-root", onset_eV: 2.0464 },
      ],
    },
  },
  {
    id: "gallium-arsenide",
    title: "Gallium arsenide, free exciton",
    source:
      "Sell, Phys. Rev. B 6, 3750 (1972): 1.5192 eV, 4.2(2) meV (values from memory); permittivity 12.6 (value from memory); Nam et al. 1976 read 3.77(5) meV",
    protocol: {
      material: {
        preset: "gallium-arsenide",
        dimension: 3,
        envelope: "S",
        first_n: 1,
        gap_eV: 1.5192,
        rydberg_eV: 0.0042,
        defect0: 0,
        permittivity: 12.6,
      },
    },
  },
  {
    id: "allowed-3d",
    title: "Allowed bulk series (nS), gap and Rydberg energy found from the data",
    source: "Elliott, Phys. Rev. 108, 1384 (1957)",
    protocol: { material: { preset: "allowed-3d", dimension: 3, envelope: "S", first_n: 1, defect0: 0 } },
  },
  {
    id: "sheet-2d",
    title: "Sheet (two-dimensional nS series), gap and Rydberg energy found from the data",
    source: "Shinada and Sugano, J. Phys. Soc. Jpn. 21, 1936 (1966): ideal sheet n - 1/2",
    protocol: {
      material: { preset: "sheet-2d", dimension: 2, envelope: "S", first_n: 1, defect0: 0.5 },
      strength: { law: "sheet" },
    },
  },
];

export function findPreset(id: string): Preset | undefined {
  return PRESETS.find((preset) => preset.id === id);
}
