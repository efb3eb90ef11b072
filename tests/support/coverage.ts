import type { RunglineResult } from "../../app/protocol/index.ts";
import { resultOf } from "./analyse-bytes.ts";
import {
  areaOf,
  energyOf,
  makeSpectrum,
  spectrumFile,
  widthOf,
  type Sampling,
  type SyntheticSeries,
} from "./make-spectrum.ts";

/** A kind of small spectrum whose intervals are counted against the truth; the seed is that of the noise alone. */
export interface CoverageKind {
  readonly name: string;
  readonly choices: object;
  readonly series: SyntheticSeries;
  readonly sampling: Omit<Sampling, "seed">;
  readonly heading: string;
}

const ALPHA = "Photon energy (eV),alpha (1/cm)";

const BULK: SyntheticSeries = {
  gap_eV: 2.5,
  rydberg_eV: 0.03,
  defect0: 0.06,
  firstN: 1,
  law: "cubic",
  floor_eV: 100e-6,
  coefficient_eV: 0.0026,
  exponent: 3,
  strength: 30,
  asymmetry: -0.1,
  continuumTop_eV: 2.7,
  background: (e) => 100 + 400 * (e - 2.5),
};
const BULK_GRID = [
  [2.445, 2.489, 500],
  [2.489, 2.5008, 700],
] as const;
const ALLOWED = { material: { preset: "allowed-3d" } };

export const COVERAGE_KINDS: readonly CoverageKind[] = [
  { name: "plain", choices: ALLOWED, series: BULK, sampling: { grid: BULK_GRID, sigma: 8 }, heading: ALPHA },
  { name: "noisy", choices: ALLOWED, series: BULK, sampling: { grid: BULK_GRID, sigma: 40 }, heading: ALPHA },
  {
    name: "blended",
    choices: { material: { preset: "cuprous-oxide-yellow-p" } },
    series: {
      ...BULK,
      gap_eV: 2.172,
      rydberg_eV: 0.0905,
      defect0: 0.2,
      firstN: 2,
      law: "p-envelope",
      // As wide as the spacing at n = 11.
      floor_eV: 130e-6,
      coefficient_eV: 0.02,
      strength: 12,
      asymmetry: -0.15,
      continuumTop_eV: 2.3,
      background: (e) => 15 + 185 * Math.sqrt(e - 2.0464),
    },
    sampling: {
      grid: [
        [2.125, 2.16, 600],
        [2.16, 2.1731, 800],
      ],
      sigma: 0.7,
    },
    heading: ALPHA,
  },
  {
    name: "sheet",
    choices: { material: { preset: "sheet-2d" } },
    series: {
      ...BULK,
      gap_eV: 2.01,
      rydberg_eV: 0.042,
      defect0: 0.47,
      law: "sheet",
      floor_eV: 220e-6,
      coefficient_eV: 0.006,
      exponent: 2.4,
      strength: 1.2e-4,
      asymmetry: -0.05,
      continuumTop_eV: 2.25,
      background: (e) => 0.005 + 0.01 * (e - 2.01),
    },
    sampling: {
      grid: [
        [1.8, 1.98, 600],
        [1.98, 2.0135, 700],
      ],
      sigma: 2e-5,
    },
    heading: "Photon energy (eV),Optical depth",
  },
];

/** One figure of one spectrum: value, standard error, interval and truth. */
export interface Counted {
  readonly figure: string;
  readonly pull: number;
  readonly covered: boolean;
  /** The interval is not the standard error on both sides (profile). */
  readonly skew: boolean;
}

type Interval = { value: number | null; sigma: number | null; low: number | null; high: number | null };

function count(figure: string, quantity: Interval | undefined, truth: number, out: Counted[]): void {
  if (quantity === undefined) return;
  const { value, sigma, low, high } = quantity;
  if (value === null || sigma === null || !(sigma > 0) || low === null || high === null) return;
  out.push({
    figure,
    pull: (value - truth) / sigma,
    covered: low <= truth && truth <= high,
    skew: Math.abs((high - value) / (value - low) - 1) > 0.1,
  });
}

export function countSpectrum(
  kind: CoverageKind,
  seed: number,
): { counted: Counted[]; result: RunglineResult } {
  const { series, sampling } = kind;
  const bytes = spectrumFile(makeSpectrum(series, { ...sampling, seed }), sampling.sigma, kind.heading);
  const result = resultOf(bytes, { ...kind.choices, uncertainty: { systematic: false } });
  const counted: Counted[] = [];
  for (const line of result.lines) {
    count("line energies", line.energy_eV, energyOf(series, line.n), counted);
    count("line widths", line.width_eV, widthOf(series, line.n), counted);
    count("line areas", line.area, areaOf(series, line.n), counted);
  }
  count("gap", result.series?.gap_eV, series.gap_eV, counted);
  count("Rydberg energy", result.series?.rydberg_eV, series.rydberg_eV, counted);
  count("defect", result.series?.defect0, series.defect0, counted);
  count("width coefficient", result.width_law?.coefficient_eV, series.coefficient_eV, counted);
  count("width exponent", result.width_law?.exponent, series.exponent, counted);
  count("width floor", result.width_law?.floor_eV, series.floor_eV, counted);
  count("strength", result.strength_law?.coefficient, series.strength, counted);
  count("asymmetry", result.lines[0]?.asymmetry, series.asymmetry, counted);
  return { counted, result };
}

export interface Tally {
  readonly figure: string;
  readonly count: number;
  readonly share: number;
  readonly mean: number;
  readonly width: number;
  readonly skewed: number;
}

export function tally(all: readonly Counted[]): Tally[] {
  const figures = [...new Set(all.map((one) => one.figure))];
  return figures.map((figure) => {
    const own = all.filter((one) => one.figure === figure);
    const mean = own.reduce((sum, one) => sum + one.pull, 0) / own.length;
    return {
      figure,
      count: own.length,
      share: own.filter((one) => one.covered).length / own.length,
      mean,
      width: Math.sqrt(own.reduce((sum, one) => sum + (one.pull - mean) ** 2, 0) / own.length),
      skewed: own.filter((one) => one.skew).length / own.length,
    };
  });
}
