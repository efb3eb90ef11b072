import { temperatureVerdict, seriesTitle } from "../../app/report/index.ts";
import { energyUnit } from "../../app/report/index.ts";
import type { Comparison, TemperatureLaw, TemperatureSeries } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { Axis, FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";
import type { BatchLook } from "./batch-look.ts";

/** How a law is drawn: the preferred one as a line, the others dashed and dotted; the same in the key. */
export const LAW_DASHES = ["solid", "dash", "dot"] as const;

/** The preferred law first: it has the plain line. */
export function lawsInOrder({ laws, preferred }: TemperatureSeries): readonly TemperatureLaw[] {
  return [...laws].sort((a, b) => Number(b.law === preferred) - Number(a.law === preferred));
}

/** Whose series are there, in the order of the comparison; null stands for several samples as one series. */
export function temperatureSamples({ temperature }: Comparison): readonly (string | null)[] {
  return [...new Set((temperature?.series ?? []).map(({ sample }) => sample))];
}

/** Gap and one width against temperature with every fitted law, and below each what the preferred one leaves over. */
export function temperatureFigure(
  gap: TemperatureSeries | null,
  width: TemperatureSeries | null,
  palette: Palette,
  look: BatchLook,
  placeOf: (file: string) => number | null,
): FigureDescription {
  const data: Trace[] = [];
  const shapes: object[] = [];
  const layout: Record<string, unknown> = {
    ...baseLayout(palette),
    hovermode: "closest",
    uirevision: `temperature ${gap?.sample ?? ""} ${width?.quantity ?? ""}`,
  };
  const shown = [gap, width].filter((one) => one !== null);
  let count = 0;
  const place = (
    traces: readonly Trace[],
    x: Axis,
    y: Axis,
    across: readonly number[],
    up: readonly number[],
  ) => {
    const suffix = count === 0 ? "" : String(count + 1);
    count++;
    data.push(...traces.map((trace) => ({ ...trace, xaxis: `x${suffix}`, yaxis: `y${suffix}` })));
    layout[`xaxis${suffix}`] = { ...x, domain: across, anchor: `y${suffix}` };
    layout[`yaxis${suffix}`] = { ...y, domain: up, anchor: `x${suffix}` };
    return suffix;
  };
  shown.forEach((series, i) => {
    const across = shown.length === 1 ? [0, 1] : i === 0 ? [0, 0.44] : [0.56, 1];
    const values = series.points.map(({ value }) => value);
    const unit =
      series.quantity === "gap_eV" ? { name: "eV", perElectronvolt: 1 } : energyUnit(Math.max(...values));
    const at = series.points.map(({ temperature_K }) => temperature_K);
    const range = [0, series.grid_K.at(-1) ?? Math.max(...at)];
    const laws = lawsInOrder(series);
    const lines = laws.map((law, k): Trace => ({
      type: "scatter",
      name: law.law,
      x: series.grid_K,
      y: law.curve.map((value) => (value === null ? null : value * unit.perElectronvolt)),
      mode: "lines",
      line: {
        width: k === 0 ? 1.8 : 1.2,
        color: k === 0 ? palette.accent : palette.muted,
        dash: LAW_DASHES[Math.min(k, LAW_DASHES.length - 1)],
      },
      hoverinfo: "skip",
      meta: { part: "law" },
    }));
    const points: Trace = {
      type: "scatter",
      name: series.quantity,
      x: at,
      y: values.map((value) => value * unit.perElectronvolt),
      mode: "markers",
      marker: { size: at.map(() => 8), symbol: look.mark, color: look.colour },
      error_y: {
        type: "data",
        array: series.points.map(({ sigma }) => sigma * unit.perElectronvolt),
        color: look.colour,
        thickness: 1,
        width: 0,
      },
      customdata: series.points.map(({ file }) => placeOf(file)),
      text: series.points.map(({ file, temperature_K }) => `${file}, ${temperature_K} K`),
      hovertemplate: "%{text}: %{y:.6~g}<extra></extra>",
      meta: { part: "levels" },
    };
    place(
      [...lines, points],
      axis(palette, "", { range, showticklabels: false }),
      axis(palette, `${symbolOf(series)} / ${unit.name}`, { nticks: 6 }),
      across,
      [0.36, 1],
    );
    const best = laws[0];
    const left = best?.residuals ?? [];
    const reach = Math.max(3, ...left.map(Math.abs)) * 1.15;
    const suffix = place(
      [
        {
          type: "scatter",
          name: "residuals",
          x: at,
          y: left,
          mode: "markers",
          marker: { size: 6, symbol: look.mark, color: look.colour },
          hoverinfo: "skip",
          meta: { part: "residuals" },
        },
      ],
      axis(palette, "Temperature T / K", { range }),
      axis(palette, "Residual / σ", {
        range: [-reach, reach],
        nticks: 4,
        zeroline: true,
        zerolinecolor: palette.grid,
      }),
      across,
      [0, 0.28],
    );
    shapes.push({
      type: "rect",
      layer: "below",
      xref: `x${suffix}`,
      yref: `y${suffix}`,
      x0: range[0],
      x1: range[1],
      y0: -2,
      y1: 2,
      fillcolor: palette.band,
      line: { width: 0 },
    });
  });
  layout["shapes"] = shapes;
  layout["margin"] = { l: 76, r: 16, t: 10, b: 46, pad: 0 };
  return {
    summary: shown.map((series) => `${seriesTitle(series)}: ${temperatureVerdict(series)}`).join("; "),
    data,
    layout,
  };
}

function symbolOf({ quantity, n }: TemperatureSeries): string {
  if (quantity === "gap_eV") return "Gap";
  return n === null ? "Width floor Γ₀" : `Width of n = ${n}`;
}
