import type { RunglineResult } from "../../protocol/index.ts";
import type { FittedCurves } from "../curves-csv.ts";
import { linearAxis } from "./axis.ts";
import { ACCENT, DATA, INK, MUTED, paperColourOfN } from "./colours.ts";
import { FULL_WIDTH_MM, type Figure, type Mark } from "./figure.ts";
import { thinned } from "./thin.ts";

/** The whole fitted window, and enlarged the part where the lines crowd towards the gap. */
export function spectrumFigures(result: RunglineResult, curves: FittedCurves): readonly Figure[] {
  const { lines, series } = result;
  const energies = lines.map((line) => line.energy_eV.value).filter((value) => value !== null);
  const fitted = fittedRange(curves);
  if (fitted === null) return [];
  const figures = [
    spectrumFigure(
      result,
      curves,
      fitted,
      "spectrum",
      "Spectrum, model and residuals over the fitted window",
    ),
  ];
  const gap = series?.gap_eV.value ?? null;
  if (gap !== null && energies.length >= 5) {
    const from = energies[Math.floor(energies.length / 2)]!;
    const low = from - 0.25 * (gap - from);
    figures.push(
      spectrumFigure(
        result,
        curves,
        [Math.max(low, fitted[0]), Math.min(gap + 0.35 * (gap - from), fitted[1])],
        "spectrum-high-n",
        "The same towards the gap, enlarged",
      ),
    );
  }
  return figures;
}

function fittedRange(curves: FittedCurves): readonly [number, number] | null {
  let low = Infinity;
  let high = -Infinity;
  curves.energy_eV.forEach((energy, i) => {
    if (!Number.isFinite(curves.model[i]!)) return;
    low = Math.min(low, energy);
    high = Math.max(high, energy);
  });
  return low < high ? [low, high] : null;
}

function spectrumFigure(
  result: RunglineResult,
  curves: FittedCurves,
  [low, high]: readonly [number, number],
  name: string,
  title: string,
): Figure {
  const signal = thinned(curves.energy_eV, curves.signal, low, high);
  const model = thinned(curves.energy_eV, curves.model, low, high);
  const background = thinned(curves.energy_eV, curves.background, low, high);
  const residual = thinned(curves.energy_eV, curves.residual, low, high);
  const gap = result.series?.gap_eV.value ?? null;
  const unit = result.reading.signal_unit;
  const across = linearAxis("Photon energy / eV", [low, high], { pad: 0, count: 7 });
  const up = linearAxis(unit === "1/cm" ? "*α* / cm^{−1}" : "Optical depth *αd*", [
    ...signal.y,
    ...background.y,
  ]);
  const reach = Math.min(8, Math.max(4, ...residual.y.map(Math.abs)));
  const gapRule: Mark[] = gap === null ? [] : [{ kind: "rule", x: gap, colour: ACCENT, dash: "2 2" }];
  let last = -Infinity;
  const labels = result.lines.flatMap((line): Mark[] => {
    const energy = line.energy_eV.value;
    if (energy === null || energy < low || energy > high || (energy - last) / (high - low) < 0.022) return [];
    last = energy;
    const near = signal.x.reduce(
      (most, one, i) => (Math.abs(one - energy) < 0.01 * (high - low) ? Math.max(most, signal.y[i]!) : most),
      -Infinity,
    );
    return [
      { kind: "label", x: energy, y: near, text: String(line.n), colour: paperColourOfN(line.n), lift: 3 },
    ];
  });
  return {
    name,
    caption: `${title}: data (grey), model (red), background without lines (thin). Numbers: *n*${
      gap === null ? "" : "; dashed: gap"
    }. Below: residuals in standard errors with a band of ±2.`,
    width_mm: FULL_WIDTH_MM,
    height_mm: 92,
    legend: [],
    panels: [
      {
        x: { ...across, title: "", ticks: across.ticks.map(({ at }) => ({ at, label: "" })) },
        y: up,
        marks: [
          ...gapRule,
          { kind: "line", ...signal, colour: DATA, width: 0.6 },
          { kind: "line", ...background, colour: INK, width: 0.4 },
          { kind: "line", ...model, colour: ACCENT, width: 0.8 },
          ...labels,
        ],
        share: 2.6,
      },
      {
        x: across,
        y: linearAxis("Residual / *σ*", [-reach, reach], { pad: 0, count: 4 }),
        marks: [
          { kind: "band", x: [low, high], low: [-2, -2], high: [2, 2], colour: MUTED, opacity: 0.12 },
          { kind: "line", ...residual, colour: DATA, width: 0.5 },
          { kind: "rule", y: 0, colour: INK },
        ],
        share: 1,
      },
    ],
  };
}
