import { makeRandom } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { doubtsOf, resultOf } from "./analyse-bytes.ts";
import {
  areaOf,
  energyOf,
  makeSpectrum,
  spectrumFile,
  strengthOf,
  widthOf,
  type SyntheticSeries,
} from "./make-spectrum.ts";

/** One spectrum of a random campaign. */
export interface CampaignCase {
  readonly seed: number;
  readonly preset: string;
  readonly series: SyntheticSeries;
  /** Highest line that stands out of noise and of its neighbours, roughly. */
  readonly visible: number;
  readonly bytes: Uint8Array;
}

export interface Verdict {
  /** `right`: every line has its n; `none`: no series claimed; `wrong`: at least one line has another's n. */
  readonly assignment: "right" | "none" | "wrong";
  readonly lines: number;
  readonly doubts: readonly string[];
  /** Pull of the gap where it is determined. */
  readonly gapPull: number | null;
  readonly result: RunglineResult;
}

/** Random material, widths, asymmetry, background, sampling and noise, with `visible` lines from 3 to 14. */
export function campaignCase(seed: number): CampaignCase {
  const random = makeRandom(seed);
  const between = (low: number, high: number): number => low + (high - low) * random.uniform();
  const kind = Math.floor(3 * random.uniform());
  const preset = ["cuprous-oxide-yellow-p", "allowed-3d", "sheet-2d"][kind]!;
  const firstN = kind === 0 ? 2 : 1;
  const law = (["p-envelope", "cubic", "sheet"] as const)[kind]!;
  const gap_eV = kind === 0 ? between(2.165, 2.18) : between(1.4, 3.4);
  const rydberg_eV = kind === 0 ? between(0.085, 0.1) : Math.exp(between(Math.log(0.004), Math.log(0.12)));
  const defect0 = (kind === 2 ? 0.5 : kind === 0 ? 0.23 : 0) + between(-0.15, 0.15);
  const count = 3 + Math.floor(12 * random.uniform());
  const visible = firstN + count - 1;
  const spacing = (n: number): number => (2 * rydberg_eV) / (n + 0.5 - defect0) ** 3;
  // Widths a few hundredths to a fifth of the spacing at low n; the floor as wide as half a spacing at the last visible.
  const coefficient_eV = between(0.04, 0.2) * 2 * rydberg_eV;
  const floor_eV = 0.5 * spacing(visible);
  const strength = kind === 2 ? between(0.5, 2) * 1e-4 : between(3, 30);
  const scale = strength / (2 * rydberg_eV);
  const series: SyntheticSeries = {
    gap_eV,
    rydberg_eV,
    defect0,
    firstN,
    law,
    floor_eV,
    coefficient_eV,
    exponent: kind === 0 ? 3 : between(2.6, 3.2),
    strength,
    asymmetry: between(-0.25, 0.25),
    continuumTop_eV: gap_eV + 4 * rydberg_eV,
    background: () => 0,
  };
  const bottom = energyOf(series, firstN) - between(5, 9) * widthOf(series, firstN);
  const top = gap_eV + between(0.01, 0.03) * rydberg_eV + floor_eV;
  const [b0, b1, b2] = [between(0.2, 2), between(-0.3, 0.3), between(-0.2, 0.2)];
  const span = top - bottom;
  const background = (energy: number): number => {
    const u = (energy - bottom) / span;
    return scale * (b0 + b1 * u + b2 * u * u);
  };
  // Three points or more on the narrowest width, denser towards the gap.
  const knee = gap_eV - rydberg_eV / (firstN + 2.5 - defect0) ** 2;
  const fine = Math.min(2200, Math.ceil((4 * (top - knee)) / floor_eV));
  const grid = [
    [bottom, knee, 1200],
    [knee, top, Math.max(500, fine)],
  ] as const;
  const peak = (2 * areaOf(series, visible)) / (Math.PI * widthOf(series, visible));
  // The last visible line stands 8 to 30 standard errors high.
  const points = (widthOf(series, visible) * Math.max(500, fine)) / (top - knee);
  const sigma = (peak * Math.sqrt(points)) / between(8, 30);
  const full = { ...series, background };
  return {
    seed,
    preset,
    series: full,
    visible,
    bytes: spectrumFile(
      makeSpectrum(full, { grid, sigma, seed: seed + 1_000_003 }),
      sigma,
      kind === 2 ? "Photon energy (eV),Optical depth" : "Photon energy (eV),alpha (1/cm)",
    ),
  };
}

/** Runs the main job with the preset alone and compares n by n. */
export function judgeCase(one: CampaignCase): Verdict {
  const result = resultOf(one.bytes, {
    material: { preset: one.preset },
    uncertainty: { systematic: false },
  });
  const { series } = one;
  const wrong = result.lines.some(({ n, energy_eV }) => {
    if (energy_eV.value === null || strengthOf(series.law, n) === 0) return true;
    const below = n > series.firstN ? (energyOf(series, n - 1) + energyOf(series, n)) / 2 : -Infinity;
    const above = (energyOf(series, n) + energyOf(series, n + 1)) / 2;
    return energy_eV.value < below || energy_eV.value > above;
  });
  const gap = result.series?.gap_eV;
  return {
    assignment: result.series === null ? "none" : wrong ? "wrong" : "right",
    lines: result.lines.length,
    doubts: doubtsOf(result),
    gapPull:
      gap === undefined || gap.value === null || gap.sigma === null
        ? null
        : (gap.value - series.gap_eV) / gap.sigma,
    result,
  };
}
