import type { RunglineResult } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import { composePanels, evenPlaces, type Drawn } from "../plot/compose-panels.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";
import { axisTitle, fittedParameter, SERIES_PARAMETERS, type SeriesParameter } from "./series-parameters.ts";

/** Chi square along each series parameter, beside the parabola of its standard error. */
export function profilesFigure(result: RunglineResult, palette: Palette): FigureDescription {
  const profiles = (result.diagnostics?.profiles ?? []).filter(
    (one): one is { name: SeriesParameter; points: [number, number][] } =>
      one.name in SERIES_PARAMETERS && one.points.length > 1,
  );
  const places = evenPlaces(profiles.length);
  return {
    summary:
      profiles.length === 0
        ? "No profiles: the series parameters were held or tied"
        : `Profiles of chi square along ${profiles.length} series parameters`,
    ...composePanels(
      profiles.map(({ name, points }, i) => ({
        place: places[i]!,
        drawn: profile(result, palette, name, points),
      })),
      { ...baseLayout(palette), hovermode: "closest", uirevision: `${result.source.sha256} profiles` },
    ),
  };
}

function profile(
  result: RunglineResult,
  palette: Palette,
  parameter: SeriesParameter,
  points: readonly (readonly [number, number])[],
): Drawn {
  const { scale, unit, absolute } = SERIES_PARAMETERS[parameter];
  const quantity = fittedParameter(result, parameter);
  const best = points.find(([, rise]) => rise === 0)?.[0] ?? quantity?.value ?? 0;
  const origin = absolute ? 0 : best;
  const x = points.map(([value]) => (value - origin) * scale);
  const reach: [number, number] = [Math.min(...x), Math.max(...x)];
  const guide = (height: number): Trace => ({
    type: "scatter",
    name: `rise of ${height}`,
    x: reach,
    y: [height, height],
    mode: "lines",
    line: { width: 1, color: palette.grid },
    hoverinfo: "skip",
    meta: { part: "guide" },
  });
  const data: Trace[] = [guide(1), guide(4)];
  const sigma = (quantity?.sigma ?? 0) * scale;
  if (sigma > 0) {
    const steps = Array.from({ length: 61 }, (_, i) => reach[0] + ((reach[1] - reach[0]) * i) / 60);
    data.push({
      type: "scatter",
      name: "parabola of the standard error",
      x: steps,
      y: steps.map((value) => ((value - (best - origin) * scale) / sigma) ** 2),
      mode: "lines",
      line: { width: 1.25, color: palette.muted, dash: "dash" },
      hoverinfo: "skip",
      meta: { part: "parabola" },
    });
  }
  data.push({
    type: "scatter",
    name: "profile",
    x,
    y: points.map(([, rise]) => rise),
    mode: "lines+markers",
    line: { width: 2, color: palette.accent, shape: "spline" },
    marker: { size: 5, color: palette.accent },
    hovertemplate: `%{x:.5g} ${unit}<br>χ² + %{y:.3g}<extra></extra>`,
    meta: { part: "profile" },
  });
  return {
    data,
    x: axis(palette, axisTitle(result, parameter), { nticks: 7 }),
    y: axis(palette, "Rise of χ²", { range: [0, 9.6], tickvals: [0, 1, 4, 9] }),
  };
}
