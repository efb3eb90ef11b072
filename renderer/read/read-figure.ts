import type { Spectrum } from "../../app/spectrum/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout, signalTitle } from "../plot/layout.ts";

/** The spectrum as it was read, with one standard deviation to both sides; points that are not used stand apart. */
export function readFigure(spectrum: Spectrum, palette: Palette): FigureDescription {
  const { energy_eV: energy, signal, sigma, used, unit } = spectrum;
  const count = energy.length;
  const low = new Float64Array(count);
  const high = new Float64Array(count);
  const shown = new Float64Array(count);
  const leftOutX: number[] = [];
  const leftOutY: number[] = [];
  for (let i = 0; i < count; i++) {
    const value = signal[i]!;
    const keep = used[i] === 1 && Number.isFinite(value);
    shown[i] = keep ? value : Number.NaN;
    low[i] = keep ? value - sigma[i]! : Number.NaN;
    high[i] = keep ? value + sigma[i]! : Number.NaN;
    if (!keep && Number.isFinite(value)) {
      leftOutX.push(energy[i]!);
      leftOutY.push(value);
    }
  }
  const edge = { width: 0, color: palette.muted };
  const data: Trace[] = [
    band("one standard deviation below", low, { line: edge }),
    band("one standard deviation above", high, { line: edge, fill: "tonexty", fillcolor: palette.noise }),
    {
      type: "scatter",
      name: "signal",
      x: energy,
      y: shown,
      mode: "lines",
      line: { width: 1, color: palette.ink },
      hovertemplate: "%{x:.6f} eV<br>%{y:.5g}<extra></extra>",
      meta: { part: "signal" },
    },
  ];
  if (leftOutX.length > 0)
    data.push({
      type: "scatter",
      name: "not used",
      x: leftOutX,
      y: leftOutY,
      mode: "markers",
      marker: { symbol: "x-thin", size: 6, line: { width: 1.2, color: palette.accent } },
      hovertemplate: "%{x:.6f} eV<br>not used<extra></extra>",
      meta: { part: "not-used" },
    });
  return {
    summary: `Spectrum as read: ${count} points from ${energy[0]?.toFixed(4)} to ${energy[count - 1]?.toFixed(4)} eV`,
    data,
    layout: {
      ...baseLayout(palette),
      hovermode: "x",
      uirevision: spectrum.sha256,
      xaxis: axis(palette, "Photon energy / eV"),
      yaxis: axis(palette, signalTitle(unit), { rangemode: "normal" }),
    },
  };

  function band(name: string, y: Float64Array, more: object): Trace {
    return {
      type: "scatter",
      name,
      x: energy,
      y,
      mode: "lines",
      hoverinfo: "skip",
      meta: { part: "noise" },
      ...more,
    };
  }
}
