import type { Sampling, SyntheticSeries } from "./make-spectrum.ts";

/** One realistic synthetic spectrum for every material preset; `seed` is the noise's. */
export interface PresetCase {
  readonly preset: string;
  readonly series: SyntheticSeries;
  readonly sampling: Omit<Sampling, "seed">;
  readonly heading: string;
}

const ALPHA = "Photon energy (eV),alpha (1/cm)";

export const PRESET_CASES: readonly PresetCase[] = [
  {
    preset: "cuprous-oxide-yellow-p",
    series: {
      gap_eV: 2.172,
      rydberg_eV: 0.0905,
      defect0: 0.19,
      firstN: 2,
      law: "p-envelope",
      floor_eV: 60e-6,
      coefficient_eV: 0.0155,
      exponent: 3,
      strength: 12,
      asymmetry: -0.18,
      offsets_eV: { 2: 0.0045, 3: 0.0012, 4: 0.0004 },
      continuumTop_eV: 2.3,
      background: (e) => {
        const u = (e - 2.156) / 0.016;
        return 15 + 2 * u + 0.7 * u * u + 185 * Math.sqrt(e - 2.0464);
      },
    },
    sampling: {
      grid: [
        [2.138, 2.16, 1500],
        [2.16, 2.173, 2000],
      ],
      sigma: 1.2,
    },
    heading: ALPHA,
  },
  {
    preset: "gallium-arsenide",
    series: {
      gap_eV: 1.5189,
      rydberg_eV: 0.0041,
      defect0: 0.03,
      firstN: 1,
      law: "cubic",
      floor_eV: 25e-6,
      coefficient_eV: 0.00028,
      exponent: 2.8,
      strength: 5,
      asymmetry: -0.12,
      continuumTop_eV: 1.56,
      background: (e) => 80 + 900 * (e - 1.5189),
    },
    sampling: {
      grid: [
        [1.507, 1.517, 1300],
        [1.517, 1.5199, 1100],
      ],
      sigma: 25,
    },
    heading: ALPHA,
  },
  {
    preset: "allowed-3d",
    series: {
      gap_eV: 3.05,
      rydberg_eV: 0.028,
      defect0: -0.04,
      firstN: 1,
      law: "cubic",
      floor_eV: 120e-6,
      coefficient_eV: 0.0028,
      exponent: 3,
      strength: 40,
      asymmetry: 0.08,
      continuumTop_eV: 3.4,
      background: (e) => 120 + 300 * (e - 3.05) + 4000 * (e - 3.05) ** 2,
    },
    sampling: {
      grid: [
        [2.97, 3.035, 1400],
        [3.035, 3.0525, 1300],
      ],
      sigma: 25,
    },
    heading: ALPHA,
  },
  {
    preset: "sheet-2d",
    series: {
      gap_eV: 2.01,
      rydberg_eV: 0.042,
      defect0: 0.47,
      firstN: 1,
      law: "sheet",
      floor_eV: 180e-6,
      coefficient_eV: 0.006,
      exponent: 2.4,
      strength: 1.2e-4,
      asymmetry: -0.05,
      continuumTop_eV: 2.25,
      background: (e) => 0.005 + 0.01 * (e - 2.01),
    },
    sampling: {
      grid: [
        [1.79, 1.98, 1500],
        [1.98, 2.0135, 1500],
      ],
      sigma: 3e-5,
    },
    heading: "Photon energy (eV),Optical depth",
  },
];
