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

/** One random spectrum: 2 to 20 lines that stand out, one of four kinds of background, now and then a line too few or too many. */
export interface ColdStart {
  readonly seed: number;
  readonly preset: string;
  readonly series: SyntheticSeries;
  /** Lines of the series that were to stand out, the missing one not counted. */
  readonly count: number;
  /** Of these, lines that a matched filter against a smooth surrounding sees with six standard errors or more. */
  readonly seen: number;
  readonly visible: number;
  readonly missing: number | null;
  readonly spurious: boolean;
  readonly background: string;
  readonly bytes: Uint8Array;
}

export interface ColdVerdict {
  /** `few`: no series claimed where fewer than three lines can be seen; `none`: not claimed although there are more. */
  readonly outcome: "right" | "few" | "none" | "wrong";
  readonly converged: boolean;
  readonly doubts: readonly string[];
  /** Pulls of gap, Rydberg energy and defect where they are determined. */
  readonly pulls: readonly number[];
  readonly result: RunglineResult;
}

/** Notes that say nothing against the numbers of the series. */
export const MILD = [
  "highest-line-blended",
  "low-n-coherent",
  "sampling-coarse",
  "window-short",
  "low-n-off-law",
  "width-floor-at-zero",
  "width-lowest-left-out",
  "width-law-rejected",
  "width-exponent-differs",
  "strength-law-rejected",
  "strength-rolls-off",
];

export function coldStart(seed: number): ColdStart {
  const random = makeRandom(seed);
  const between = (low: number, high: number): number => low + (high - low) * random.uniform();
  const kind = Math.floor(4 * random.uniform());
  const preset = ["cuprous-oxide-yellow-p", "allowed-3d", "sheet-2d", "gallium-arsenide"][kind]!;
  const firstN = kind === 0 ? 2 : 1;
  const law = (["p-envelope", "cubic", "sheet", "cubic"] as const)[kind]!;
  const gap_eV = kind === 0 ? between(2.165, 2.18) : kind === 3 ? between(1.51, 1.525) : between(1.4, 3.4);
  const rydberg_eV =
    kind === 0
      ? between(0.085, 0.1)
      : kind === 3
        ? between(0.0036, 0.0046)
        : Math.exp(between(Math.log(0.004), Math.log(0.12)));
  const defect0 = (kind === 2 ? 0.5 : kind === 0 ? 0.23 : 0) + between(-0.15, 0.15);
  const standing = 2 + Math.floor(19 * random.uniform());
  const visible = firstN + standing - 1;
  const spacing = (n: number): number => (2 * rydberg_eV) / (n + 0.5 - defect0) ** 3;
  const coefficient_eV = between(0.04, 0.2) * 2 * rydberg_eV;
  const floor_eV = between(0.3, 0.5) * spacing(visible);
  const strength = kind === 2 ? between(0.5, 2) * 1e-4 : between(3, 30);
  const scale = strength / (2 * rydberg_eV);
  const missing =
    standing >= 6 && random.uniform() < 0.25
      ? firstN + 1 + Math.floor((standing - 2) * random.uniform())
      : null;
  let series: SyntheticSeries = {
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
    share: (n) => (n === missing ? 0 : 1),
  };
  const bottom = energyOf(series, firstN) - between(5, 9) * widthOf(series, firstN);
  const top = gap_eV + between(0.01, 0.03) * rydberg_eV + floor_eV;
  const [b0, b1, b2] = [between(0.2, 2), between(-0.3, 0.3), between(-0.2, 0.2)];
  const span = top - bottom;
  const shape = Math.floor(4 * random.uniform());
  const phase = between(0, 2 * Math.PI);
  const background = (energy: number): number => {
    const u = (energy - bottom) / span;
    if (shape === 0) return scale * (b0 + b1 * u + b2 * u * u);
    if (shape === 1) return scale * (b0 + 0.3 * Math.exp(3 * (u - 1)));
    if (shape === 2) return scale * (b0 + b1 * Math.sqrt(u + 0.3));
    return scale * (b0 + b1 * u + 0.1 * Math.sin(1.5 * u + phase));
  };
  const knee = gap_eV - rydberg_eV / (firstN + 2.5 - defect0) ** 2;
  const fine = Math.min(2200, Math.ceil((4 * (top - knee)) / floor_eV));
  const grid = [
    [bottom, knee, 1200],
    [knee, top, Math.max(500, fine)],
  ] as const;
  // The last line stands 8 to 30 standard errors high.
  const peak = (2 * strength * strengthOf(law, visible)) / (Math.PI * widthOf(series, visible));
  const points = (widthOf(series, visible) * Math.max(500, fine)) / (top - knee);
  const sigma = (peak * Math.sqrt(points)) / between(8, 30);
  const spurious = standing >= 4 && random.uniform() < 0.25;
  if (spurious) {
    // Half way between two lines, as strong as the upper one.
    const n = firstN + 1 + Math.floor((standing - 2) * random.uniform());
    const at = between(0.35, 0.65);
    series = {
      ...series,
      extraLines: [
        {
          energy_eV: at * energyOf(series, n - 1) + (1 - at) * energyOf(series, n),
          width_eV: widthOf(series, n),
          area: between(0.3, 1) * series.strength * strengthOf(law, n),
        },
      ],
    };
  }
  series = { ...series, background };
  const spectrum = makeSpectrum(series, { grid, sigma, seed: seed + 1_000_003 });
  let seen = 0;
  for (let n = firstN; n <= visible; n++) if (standsOut(series, n, spectrum.energy, sigma)) seen++;
  return {
    seed,
    seen,
    preset,
    series,
    count: standing - (missing === null ? 0 : 1),
    visible,
    missing,
    spurious,
    background: ["quadratic", "exponential", "root", "sine"][shape]!,
    bytes: spectrumFile(
      spectrum,
      sigma,
      kind === 2 ? "Photon energy (eV),Optical depth" : "Photon energy (eV),alpha (1/cm)",
    ),
  };
}

/**
 * Height of a line over the standard error that it would have beside a parabola within two and a half widths: what could be
 * seen there at all.
 */
function standsOut(series: SyntheticSeries, n: number, energies: Float64Array, sigma: number): boolean {
  const center = energyOf(series, n);
  const width = widthOf(series, n);
  const inside = energies.filter((energy) => Math.abs(energy - center) < 2.5 * width);
  const u = inside.map((energy) => (energy - center) / width);
  const line = u.map((one) => 1 / (1 + 4 * one * one));
  const basis: Float64Array[] = [];
  for (const power of [0, 1, 2]) {
    const column = u.map((one) => one ** power);
    for (const known of [...basis]) subtract(column, known);
    const norm = Math.sqrt(column.reduce((sum, one) => sum + one * one, 0));
    if (norm > 0) basis.push(column.map((one) => one / norm));
  }
  for (const known of basis) subtract(line, known);
  const left = Math.sqrt(line.reduce((sum, one) => sum + one * one, 0));
  const height = (2 * areaOf(series, n)) / (Math.PI * width);
  return (height * left) / sigma > 6;
}

function subtract(column: Float64Array, unit: Float64Array): void {
  const dot = column.reduce((sum, one, i) => sum + one * unit[i]!, 0);
  for (let i = 0; i < column.length; i++) column[i]! -= dot * unit[i]!;
}

/** Runs the main job with the preset alone. A line must be nearer to its own place than to its neighbours', and exist. */
export function judgeColdStart(one: ColdStart): ColdVerdict {
  const { series } = one;
  const result = resultOf(one.bytes, {
    material: { preset: one.preset },
    uncertainty: { systematic: false },
  });
  const wrong = result.lines.some(({ n, energy_eV }) => {
    if (energy_eV.value === null || n < series.firstN || areaOf(series, n) === 0) return true;
    const below = n > series.firstN ? (energyOf(series, n - 1) + energyOf(series, n)) / 2 : -Infinity;
    return energy_eV.value < below || energy_eV.value > (energyOf(series, n) + energyOf(series, n + 1)) / 2;
  });
  const pulls: number[] = [];
  if (result.series !== null) {
    for (const [quantity, truth] of [
      [result.series.gap_eV, series.gap_eV],
      [result.series.rydberg_eV, series.rydberg_eV],
      [result.series.defect0, series.defect0],
    ] as const)
      if (quantity.value !== null && quantity.sigma !== null && quantity.sigma > 0)
        pulls.push((quantity.value - truth) / quantity.sigma);
  }
  return {
    outcome: result.series === null ? (one.seen < 3 ? "few" : "none") : wrong ? "wrong" : "right",
    converged: result.status === "converged",
    doubts: doubtsOf(result).filter((code) => !MILD.includes(code)),
    pulls,
    result,
  };
}
