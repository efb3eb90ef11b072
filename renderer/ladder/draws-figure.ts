import type { RunglineResult } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import { composePanels, evenPlaces, type Drawn } from "../plot/compose-panels.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";
import {
  axisTitle,
  fittedParameter,
  PARAMETER_ORDER,
  SERIES_PARAMETERS,
  type SeriesParameter,
} from "./series-parameters.ts";

/** How the series parameters scatter over spectra drawn anew, beside the normal curve of their standard errors. */
export function drawsFigure(result: RunglineResult, palette: Palette): FigureDescription {
  const draws = result.resampled?.draws ?? null;
  const shown = PARAMETER_ORDER.filter(
    (parameter) => (draws?.[parameter]?.length ?? 0) > 1 && fittedParameter(result, parameter) !== null,
  );
  const places = evenPlaces(shown.length);
  return {
    summary:
      shown.length === 0
        ? "No spectra were drawn anew"
        : `Series parameters of ${result.resampled!.count} spectra drawn anew`,
    ...composePanels(
      shown.map((parameter, i) => ({
        place: places[i]!,
        drawn: distribution(result, palette, parameter, draws![parameter]!),
      })),
      { ...baseLayout(palette), hovermode: "closest", uirevision: `${result.source.sha256} draws` },
    ),
  };
}

function distribution(
  result: RunglineResult,
  palette: Palette,
  parameter: SeriesParameter,
  draws: readonly number[],
): Drawn {
  const { scale, unit, absolute } = SERIES_PARAMETERS[parameter];
  const quantity = fittedParameter(result, parameter)!;
  const origin = absolute ? 0 : quantity.value!;
  const from = (value: number): number => (value - origin) * scale;
  const centre = from(quantity.value!);
  const values = draws.map(from);
  const sigma = quantity.sigma! * scale;
  const low = Math.min(...values, centre - 3 * sigma);
  const high = Math.max(...values, centre + 3 * sigma);
  // As many as Rice's rule asks for, twice the cube root of their number.
  const bins = Math.max(8, Math.ceil(2 * Math.cbrt(values.length)));
  const width = (high - low) / bins;
  const counts = new Array<number>(bins).fill(0);
  for (const value of values) counts[Math.min(bins - 1, Math.floor((value - low) / width))]!++;
  const height = (values.length * width) / (sigma * Math.sqrt(2 * Math.PI));
  const top = Math.max(...counts, height);
  const steps = Array.from({ length: 81 }, (_, i) => low + ((high - low) * i) / 80);
  const data: Trace[] = [
    {
      type: "scatter",
      name: "spectra drawn anew",
      x: [low, ...counts.map((_, i) => low + i * width), high],
      y: [0, ...counts, 0],
      mode: "lines",
      line: { shape: "hv", width: 1, color: palette.data },
      fill: "tozeroy",
      fillcolor: palette.band,
      hovertemplate: `%{x:.4g} ${unit}<br>%{y} spectra<extra></extra>`,
      meta: { part: "draws" },
    },
    {
      type: "scatter",
      name: "standard error",
      x: steps,
      y: steps.map((value) => height * Math.exp(-0.5 * ((value - centre) / sigma) ** 2)),
      mode: "lines",
      line: { width: 1.75, color: palette.accent },
      hoverinfo: "skip",
      meta: { part: "normal" },
    },
  ];
  const bar = (
    part: string,
    ends: readonly [number | null, number | null],
    y: number,
    colour: string,
  ): void => {
    if (ends[0] === null || ends[1] === null) return;
    data.push({
      type: "scatter",
      name: part === "interval" ? "interval of the fit" : "interval of the draws",
      x: [from(ends[0]), from(ends[1])],
      y: [y, y],
      mode: "lines+markers",
      line: { width: 2.5, color: colour },
      marker: { symbol: "line-ns-open", size: 9, color: colour, line: { width: 2 } },
      hovertemplate: `%{x:.5g} ${unit}<extra></extra>`,
      meta: { part },
    });
  };
  const drawn = result.resampled![parameter];
  bar("interval", [quantity.low, quantity.high], 1.1 * top, palette.accent);
  bar("drawn-interval", [drawn.low, drawn.high], 1.22 * top, palette.ink);
  return {
    data,
    x: axis(palette, axisTitle(result, parameter), { nticks: 7 }),
    y: axis(palette, "Spectra", { range: [0, 1.32 * top], nticks: 5 }),
  };
}
