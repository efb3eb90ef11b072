import type { RunglineResult } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import { composePanels, evenPlaces, type Drawn } from "../plot/compose-panels.ts";
import type { Axis, FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";
import { fittedParameter, SERIES_PARAMETERS, type SeriesParameter } from "./series-parameters.ts";

/** Joint regions of every pair of series parameters, with the spectra that were drawn anew as points. */
export function regionsFigure(result: RunglineResult, palette: Palette): FigureDescription {
  const regions = result.diagnostics?.regions ?? [];
  const pairs = [...new Set(regions.map(({ x, y }) => `${x} ${y}`))];
  const places = evenPlaces(pairs.length);
  const panels = pairs.map((pair, i) => {
    const [x, y] = pair.split(" ") as [SeriesParameter, SeriesParameter];
    return {
      place: places[i]!,
      drawn: region(result, palette, x, y),
    };
  });
  return {
    summary:
      pairs.length === 0
        ? "No joint regions: two free series parameters are needed"
        : "Joint regions of gap, Rydberg energy and quantum defect at 68.3 and 95.4 percent",
    ...composePanels(panels, {
      ...baseLayout(palette),
      hovermode: "closest",
      uirevision: `${result.source.sha256} regions`,
    }),
  };
}

function region(result: RunglineResult, palette: Palette, x: SeriesParameter, y: SeriesParameter): Drawn {
  const [alongX, alongY] = [SERIES_PARAMETERS[x], SERIES_PARAMETERS[y]];
  const [fitX, fitY] = [fittedParameter(result, x), fittedParameter(result, y)];
  const fromX = (value: number): number => (value - (fitX?.value ?? 0)) * alongX.scale;
  const fromY = (value: number): number => (value - (fitY?.value ?? 0)) * alongY.scale;
  const data: Trace[] = (result.diagnostics?.regions ?? [])
    .filter((one) => one.x === x && one.y === y)
    .sort((a, b) => b.level - a.level)
    .map(({ level, points }): Trace => {
      const closed = [...points, points[0]!];
      const inner = level < 0.9;
      return {
        type: "scatter",
        name: `${(100 * level).toFixed(1)} %`,
        x: closed.map(([value]) => fromX(value)),
        y: closed.map(([, value]) => fromY(value)),
        mode: "lines",
        fill: "toself",
        fillcolor: inner ? palette.tail : palette.band,
        line: {
          shape: "spline",
          width: inner ? 2 : 1.25,
          color: palette.accent,
          dash: inner ? "solid" : "dash",
        },
        hoveron: "points",
        hovertemplate: `${(100 * level).toFixed(1)} %<br>%{x:.3g}, %{y:.3g}<extra></extra>`,
        meta: { part: "region" },
      };
    });
  const draws = result.resampled?.draws;
  const [drawnX, drawnY] = [draws?.[x], draws?.[y]];
  if (drawnX !== undefined && drawnY !== undefined)
    data.push({
      type: "scatter",
      name: "spectra drawn anew",
      x: drawnX.map(fromX),
      y: drawnY.map(fromY),
      mode: "markers",
      marker: { size: 4, opacity: 0.5, color: palette.data },
      hoverinfo: "skip",
      meta: { part: "draws" },
    });
  data.push({
    type: "scatter",
    name: "fitted",
    x: [0],
    y: [0],
    mode: "markers",
    marker: { size: 8, symbol: "diamond", color: palette.accent },
    error_x: bar((fitX?.sigma ?? 0) * alongX.scale, palette),
    error_y: bar((fitY?.sigma ?? 0) * alongY.scale, palette),
    hovertemplate: "fitted, with one standard error each<extra></extra>",
    meta: { part: "fitted" },
  });
  return {
    data,
    x: axis(palette, alongX.axis, { nticks: 7, ...reach(data, "x") }),
    y: axis(palette, alongY.axis, { nticks: 7, ...reach(data, "y") }),
  };
}

function bar(length: number, palette: Palette): object {
  return { type: "data", array: [length], thickness: 1.25, width: 0, color: palette.accent };
}

/** All of the curves, which the library would cut between their points. */
function reach(data: readonly Trace[], along: "x" | "y"): Axis {
  const values = data.flatMap((trace) => Array.from(trace[along]).filter((value) => value !== null));
  const [low, high] = [Math.min(...values), Math.max(...values)];
  const margin = 0.06 * (high - low);
  return high > low ? { range: [low - margin, high + margin] } : {};
}
