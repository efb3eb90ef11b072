import { colourOfPower, stackSpectra } from "../../app/report/index.ts";
import type { AnalysedSeries } from "../../app/tasks/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { Axis, Trace } from "../plot/figure-description.ts";
import { axis, signalTitle } from "../plot/layout.ts";

/** High-n spectra, one above the other by power: data thin, model over it; light stands for power. */
export function spectraPanel(
  { result, spectra }: AnalysedSeries,
  palette: Palette,
): { data: Trace[]; x: Axis; y: Axis } {
  const stacked = stackSpectra(result, spectra);
  if (stacked === null) return { data: [], x: axis(palette, "Photon energy / eV"), y: axis(palette, "") };
  const { low, high, least, most, rows } = stacked;
  const data: Trace[] = [];
  const labels = { x: [] as number[], y: [] as number[], text: [] as string[] };
  rows.forEach(({ power_uW: power, x, signal, model }, k) => {
    const colour = colourOfPower(k, rows.length, palette.mode, palette.accent);
    data.push(
      line(`data at ${power} µW`, x, signal, { width: 0.7, color: palette.data }, "data"),
      line(`${power} µW`, x, model, { width: 1.5, color: colour }, "model"),
    );
    labels.x.push(high);
    labels.y.push(model[model.length - 1] ?? NaN);
    labels.text.push(` ${power} µW`);
  });
  data.push({
    type: "scatter",
    name: "powers",
    ...labels,
    mode: "text",
    textposition: "middle right",
    textfont: { size: 11, color: palette.ink },
    cliponaxis: false,
    hoverinfo: "skip",
    meta: { part: "names" },
  });
  return {
    data,
    // Room to the right for the powers.
    x: axis(palette, "Photon energy / eV", { range: [low, high + 0.09 * (high - low)] }),
    y: axis(
      palette,
      `${signalTitle(result.reading.signal_unit === "1/cm" ? "1/cm" : "1")}, offset by power`,
      { range: [least, most] },
    ),
  };

  function line(
    name: string,
    x: readonly number[],
    y: readonly number[],
    style: object,
    part: string,
  ): Trace {
    return {
      type: "scatter",
      name,
      x,
      y,
      mode: "lines",
      line: style,
      hovertemplate: "%{x:.6f} eV<extra></extra>",
      meta: { part },
    };
  }
}
