import { colourOfPower } from "../../app/report/index.ts";
import type { AnalysedSeries } from "../../app/tasks/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { Axis, Trace } from "../plot/figure-description.ts";
import { axis, signalTitle } from "../plot/layout.ts";

/** The share of the lines by n that the panel begins with: high n, where power shows first. */
const FIRST_SHARE = 0.45;
/** Each spectrum stands above the one before by this share of the reach of the first. */
const OFFSET = 0.45;

/** High-n spectra, one above the other by power: data thin, model over it; light stands for power. */
export function spectraPanel(
  { result, spectra }: AnalysedSeries,
  palette: Palette,
): { data: Trace[]; x: Axis; y: Axis } {
  const gap = result.series?.gap_eV.value ?? null;
  const energies = result.lines.flatMap(({ energy_eV: { value } }) => (value === null ? [] : [value]));
  const from = energies[Math.floor(FIRST_SHARE * energies.length)] ?? null;
  const next = energies[Math.floor(FIRST_SHARE * energies.length) + 1] ?? null;
  const first = spectra[0]?.curves;
  if (first === undefined) return { data: [], x: axis(palette, "Photon energy / eV"), y: axis(palette, "") };
  const count = first.energy_eV.length;
  const low =
    from === null || next === null
      ? first.energy_eV[0]!
      : Math.max(first.energy_eV[0]!, from - 0.4 * (next - from));
  const high = Math.min(
    first.energy_eV[count - 1]!,
    gap === null || from === null ? Infinity : gap + 0.12 * (gap - from),
  );
  const inside = (energy: number): boolean => energy >= low && energy <= high;
  let least = Infinity;
  let most = -Infinity;
  for (let i = 0; i < count; i++) {
    if (!inside(first.energy_eV[i]!) || !Number.isFinite(first.model[i]!)) continue;
    least = Math.min(least, first.model[i]!);
    most = Math.max(most, first.model[i]!);
  }
  const reach = most > least ? most - least : 1;
  const data: Trace[] = [];
  const labels = { x: [] as number[], y: [] as number[], text: [] as string[] };
  spectra.forEach(({ power_uW: power, curves }, k) => {
    const lift = k * OFFSET * reach;
    const x: number[] = [];
    const signal: number[] = [];
    const model: number[] = [];
    curves.energy_eV.forEach((energy, i) => {
      if (!inside(energy)) return;
      x.push(energy);
      signal.push(curves.used[i] === 1 ? curves.signal[i]! + lift : Number.NaN);
      model.push(curves.model[i]! + lift);
    });
    const colour = colourOfPower(k, spectra.length, palette.mode, palette.accent);
    data.push(
      line(`data at ${power} µW`, x, signal, { width: 0.7, color: palette.data }, "data"),
      line(`${power} µW`, x, model, { width: 1.5, color: colour }, "model"),
    );
    labels.x.push(high);
    labels.y.push(model[model.length - 1] ?? lift);
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
      {
        range: [least - 0.25 * reach, most + (spectra.length - 1) * OFFSET * reach + 0.1 * reach],
      },
    ),
  };

  function line(name: string, x: number[], y: number[], style: object, part: string): Trace {
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
