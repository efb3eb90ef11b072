import type { RunglineResult } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import { composePanels, evenPlaces, type Drawn } from "../plot/compose-panels.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";

/** Whether the residuals of the spectrum are normal, and whether neighbours are alike. */
export function residualsFigure(result: RunglineResult, palette: Palette): FigureDescription {
  const places = evenPlaces(2);
  return {
    summary:
      result.diagnostics === null || result.diagnostics === undefined
        ? "No residuals: nothing was fitted"
        : "Residuals of the spectrum against normal quantiles, and their autocorrelation",
    ...composePanels(
      [
        { place: places[0]!, drawn: quantiles(result, palette) },
        { place: places[1]!, drawn: autocorrelation(result, palette) },
      ],
      { ...baseLayout(palette), hovermode: "closest", uirevision: `${result.source.sha256} residuals` },
    ),
  };
}

function quantiles(result: RunglineResult, palette: Palette): Drawn {
  const points = result.diagnostics?.quantiles ?? [];
  const ends = [points[0]?.normal ?? -3, points[points.length - 1]?.normal ?? 3];
  return {
    data: [
      {
        type: "scatter",
        name: "normal",
        x: ends,
        y: ends,
        mode: "lines",
        line: { width: 1.5, color: palette.accent },
        hoverinfo: "skip",
        meta: { part: "law" },
      },
      {
        type: "scatter",
        name: "residuals",
        x: points.map(({ normal }) => normal),
        y: points.map(({ residual }) => residual),
        mode: "markers",
        marker: { size: 6, symbol: "circle-open", color: palette.ink, line: { width: 1.25 } },
        hovertemplate: "normal %{x:.2f}<br>residual %{y:.2f}<extra></extra>",
        meta: { part: "quantiles" },
      },
    ],
    x: axis(palette, "Normal quantile", { nticks: 9 }),
    y: axis(palette, "Residual / σ", { nticks: 9 }),
  };
}

function autocorrelation(result: RunglineResult, palette: Palette): Drawn {
  const values = result.diagnostics?.autocorrelation ?? [];
  const lags = values.map((_, i) => i + 1);
  const chance = 2 / Math.sqrt(Math.max(1, result.reading.used_points));
  const reach = Math.max(...values.map((value) => Math.abs(value ?? 0)), 2 * chance, 0.05);
  const end = values.length + 0.7;
  const band: Trace = {
    type: "scatter",
    name: "by chance",
    x: [0.3, end, end, 0.3],
    y: [-chance, -chance, chance, chance],
    mode: "lines",
    fill: "toself",
    fillcolor: palette.band,
    line: { width: 0 },
    hoverinfo: "skip",
    meta: { part: "chance" },
  };
  return {
    data: [
      band,
      {
        type: "scatter",
        name: "from zero",
        x: lags.flatMap((lag) => [lag, lag, null]),
        y: values.flatMap((value) => [0, value, null]),
        mode: "lines",
        line: { width: 2, color: palette.ink },
        hoverinfo: "skip",
        meta: { part: "stem" },
      },
      {
        type: "scatter",
        name: "autocorrelation",
        x: lags,
        y: values,
        mode: "markers",
        marker: { size: 6, color: palette.ink },
        hovertemplate: "lag %{x}<br>%{y:.3f}<extra></extra>",
        meta: { part: "autocorrelation" },
      },
    ],
    x: axis(palette, "Lag / points", { range: [0.3, end], nticks: 8 }),
    y: axis(palette, "Autocorrelation", {
      nticks: 7,
      zeroline: true,
      zerolinecolor: palette.muted,
      range: [-1.15 * reach, 1.15 * reach],
    }),
  };
}
