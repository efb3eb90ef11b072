import type { Curves } from "../../app/analysis/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { colourOfN, type Palette } from "../plot/colours.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout, signalTitle } from "../plot/layout.ts";

/** The part of the fitted window that is shown. */
export type LinesView = "window" | "high-n" | "line";

/** Where the signal's axis begins over that of the residuals, as a share of the height. */
const SIGNAL_FOOT = 0.27;

/** Data, model, components, background and tail above; residuals in standard deviations below. */
export function linesFigure(
  curves: Curves,
  result: RunglineResult,
  palette: Palette,
  view: LinesView,
  selectedN: number | null,
): FigureDescription {
  const window = fittedWindow(curves, result);
  const range = viewRange(view, window, result, selectedN);
  const many = curves.energy_eV.length > 1500;
  const data: Trace[] = [
    {
      type: "scatter",
      name: "data",
      x: curves.energy_eV,
      y: curves.signal,
      mode: many ? "lines" : "markers",
      line: { width: 1, color: palette.data },
      marker: { size: 3, color: palette.data },
      hovertemplate: "%{x:.6f} eV<br>%{y:.5g}<extra></extra>",
      meta: { part: "data" },
    },
  ];
  const quiet = { hoverinfo: "skip" } as const;
  if (curves.tail !== null)
    data.push(
      {
        type: "scatter",
        name: "background under the tail",
        x: curves.energy_eV,
        y: curves.background,
        mode: "lines",
        line: { width: 0, color: palette.muted },
        ...quiet,
        meta: { part: "background" },
      },
      {
        type: "scatter",
        name: "tail and continuum",
        x: curves.energy_eV,
        y: sum(curves.background, curves.tail),
        mode: "lines",
        fill: "tonexty",
        fillcolor: palette.tail,
        line: { width: 1, color: palette.accent, dash: "dot" },
        ...quiet,
        meta: { part: "tail" },
      },
    );
  data.push({
    type: "scatter",
    name: "background",
    x: curves.energy_eV,
    y: curves.background,
    mode: "lines",
    line: { width: 1.2, color: palette.muted, dash: "dash" },
    ...quiet,
    meta: { part: "background" },
  });
  for (const { n, energy_eV, value } of curves.lines)
    data.push({
      type: "scatter",
      name: `n = ${n}`,
      x: energy_eV,
      y: onBackground(energy_eV, value, curves),
      mode: "lines",
      opacity: 0.55,
      line: { width: 1.1, color: colourOfN(n, palette.mode) },
      ...quiet,
      meta: { part: "line", n },
    });
  data.push({
    type: "scatter",
    name: "model",
    x: curves.energy_eV,
    y: curves.model,
    mode: "lines",
    line: { width: 1.5, color: palette.accent },
    ...quiet,
    meta: { part: "model" },
  });
  const values = signalRange(curves, range);
  data.push(labels(curves, result, palette, range, 0.012 * (values[1] - values[0])));
  data.push({
    type: "scatter",
    name: "residual",
    x: curves.energy_eV,
    y: curves.residual,
    yaxis: "y2",
    mode: many ? "lines" : "markers",
    line: { width: 0.8, color: palette.data },
    marker: { size: 2.5, color: palette.data },
    ...quiet,
    meta: { part: "residual" },
  });
  const edge = (x: number): object => ({
    type: "line",
    xref: "x",
    yref: "paper",
    x0: x,
    x1: x,
    y0: SIGNAL_FOOT,
    y1: 1,
    line: { width: 1, color: palette.muted, dash: "dot" },
  });
  return {
    summary: `Fitted spectrum: ${result.lines.length} lines between ${window[0].toFixed(4)} and ${window[1].toFixed(4)} eV, residuals in standard deviations below`,
    data,
    layout: {
      ...baseLayout(palette),
      hovermode: "x",
      hoverdistance: 40,
      uirevision: `${result.source.sha256} ${view} ${view === "line" ? selectedN : ""} ${window.join(" ")}`,
      xaxis: axis(palette, "Photon energy / eV", { range, anchor: "y2", tickformat: "" }),
      yaxis: axis(palette, signalTitle(curves.unit), {
        domain: [SIGNAL_FOOT, 1],
        range: values,
        showgrid: false,
      }),
      yaxis2: axis(palette, "Residual / σ", {
        domain: [0, 0.23],
        range: [-5, 5],
        tickvals: [-4, -2, 0, 2, 4],
      }),
      shapes: [
        edge(window[0]),
        edge(window[1]),
        {
          type: "rect",
          xref: "paper",
          yref: "y2",
          x0: 0,
          x1: 1,
          y0: -2,
          y1: 2,
          line: { width: 0 },
          fillcolor: palette.band,
          layer: "below",
        },
        ...gapMark(result, palette),
      ],
      annotations: gapName(result, palette),
    },
  };
}

export function fittedWindow(curves: Curves, result: RunglineResult): [number, number] {
  if (result.fit !== null) return [...result.fit.window_eV];
  const { energy_eV: energy } = curves;
  return [energy[0] ?? 0, energy[energy.length - 1] ?? 1];
}

function viewRange(
  view: LinesView,
  window: readonly [number, number],
  result: RunglineResult,
  selectedN: number | null,
): [number, number] {
  const span = window[1] - window[0];
  const whole: [number, number] = [window[0] - 0.02 * span, window[1] + 0.02 * span];
  const energies = result.lines.map((line) => line.energy_eV.value ?? Number.NaN);
  if (view === "high-n" && energies.length >= 4) {
    const from = energies[Math.floor(energies.length / 2)]!;
    const spacing =
      energies[Math.floor(energies.length / 2)]! - energies[Math.floor(energies.length / 2) - 1]!;
    const low = from - 0.4 * spacing;
    return [low, window[1] + 0.02 * (window[1] - low)];
  }
  if (view === "line") {
    const line = result.lines.find((one) => one.n === selectedN);
    if (line !== undefined && line.energy_eV.value !== null) {
      const half = Math.max(6 * (line.width_eV.value ?? 0), 0.6 * (line.spacing_eV ?? 0), span / 200);
      return [line.energy_eV.value - half, line.energy_eV.value + half];
    }
  }
  return whole;
}

/** The data of the part that is shown, with air above for the labels. */
function signalRange(curves: Curves, [from, to]: readonly [number, number]): [number, number] {
  let low = Infinity;
  let high = -Infinity;
  for (let i = 0; i < curves.energy_eV.length; i++) {
    const energy = curves.energy_eV[i]!;
    if (energy < from || energy > to || curves.used[i] !== 1) continue;
    for (const value of [curves.signal[i]!, curves.background[i]!]) {
      if (value < low) low = value;
      if (value > high) high = value;
    }
  }
  if (!(high > low)) return [0, 1];
  const air = high - low;
  return [low - 0.05 * air, high + 0.12 * air];
}

function gapMark(result: RunglineResult, palette: Palette): object[] {
  const gap = result.series?.gap_eV.value ?? null;
  if (gap === null) return [];
  return [
    {
      type: "line",
      xref: "x",
      yref: "paper",
      x0: gap,
      x1: gap,
      y0: SIGNAL_FOOT,
      y1: 1,
      line: { width: 1.2, color: palette.ink },
      layer: "below",
    },
  ];
}

/** Left of its line: on the right the end of the window may stand close. */
function gapName(result: RunglineResult, palette: Palette): object[] {
  const gap = result.series?.gap_eV.value ?? null;
  if (gap === null) return [];
  return [
    {
      xref: "x",
      yref: "paper",
      x: gap,
      y: 1,
      xanchor: "right",
      yanchor: "top",
      xshift: -2,
      showarrow: false,
      text: "gap",
      font: { size: 12, color: palette.ink },
    },
  ];
}

/** Share of the shown range that the number of a line takes. */
const LABEL_ROOM = 0.022;

/** n over each line that has room for it. */
function labels(
  curves: Curves,
  result: RunglineResult,
  palette: Palette,
  [from, to]: readonly [number, number],
  lift: number,
): Trace {
  const room = LABEL_ROOM * (to - from);
  let taken = -Infinity;
  const x: number[] = [];
  const y: number[] = [];
  const text: string[] = [];
  const colours: string[] = [];
  for (const line of result.lines) {
    const energy = line.energy_eV.value;
    if (energy === null || energy - taken < room) continue;
    if (energy < from + room / 2 || energy > to - room / 2) continue;
    const top = highestNear(curves, energy, 0.5 * (line.width_eV.value ?? 0));
    if (!Number.isFinite(top.value)) continue;
    taken = energy;
    x.push(top.energy);
    y.push(top.value + lift);
    text.push(String(line.n));
    colours.push(colourOfN(line.n, palette.mode));
  }
  return {
    type: "scatter",
    name: "n",
    x,
    y,
    mode: "text",
    text,
    textposition: "top center",
    textfont: { size: 12, weight: 600, color: colours },
    hoverinfo: "skip",
    cliponaxis: true,
    meta: { part: "labels" },
  };
}

/** The peak of data and model within a reach: an asymmetric line has it beside its energy, and noise stands above it. */
function highestNear(
  { energy_eV, model, signal, used }: Curves,
  energy: number,
  reach: number,
): { readonly energy: number; readonly value: number } {
  let at = nearestIndex(energy_eV, energy);
  let value = model[at]!;
  const from = nearestIndex(energy_eV, energy - reach);
  const to = nearestIndex(energy_eV, energy + reach);
  let peak = -Infinity;
  for (let i = from; i <= to; i++) {
    if (model[i]! > peak) {
      peak = model[i]!;
      at = i;
    }
    const higher = used[i] === 1 ? Math.max(model[i]!, signal[i]!) : model[i]!;
    if (higher > value) value = higher;
  }
  return { energy: energy_eV[at]!, value };
}

/** A line alone, standing on the background; nothing where there is none. */
function onBackground(energy: Float64Array, value: Float64Array, curves: Curves): Float64Array {
  const out = new Float64Array(energy.length);
  const first = curves.energy_eV[0]!;
  const last = curves.energy_eV[curves.energy_eV.length - 1]!;
  for (let i = 0; i < energy.length; i++) {
    const outside = energy[i]! < first || energy[i]! > last;
    out[i] = outside
      ? Number.NaN
      : value[i]! + curves.background[nearestIndex(curves.energy_eV, energy[i]!)]!;
  }
  return out;
}

function sum(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(a.length);
  for (let i = 0; i < a.length; i++) out[i] = a[i]! + b[i]!;
  return out;
}

function nearestIndex(ascending: Float64Array, wanted: number): number {
  let low = 0;
  let high = ascending.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (ascending[middle]! <= wanted) low = middle;
    else high = middle;
  }
  return wanted - ascending[low]! <= ascending[high]! - wanted ? low : high;
}
