import type { TemperatureResult, TemperatureSeries } from "../../protocol/index.ts";
import { TEMPERATURE_LAW_NAMES, temperatureVerdict } from "../comparison-to-text.ts";
import { energyUnit } from "../format-quantity.ts";
import { linearAxis } from "./axis.ts";
import { ACCENT, DATA, INK } from "./colours.ts";
import { ONE_COLUMN_MM, type Figure, type Mark } from "./figure.ts";

const DASHES = [undefined, "4 2", "1.5 1.5"] as const;
const COLOURS = [ACCENT, INK, DATA] as const;

export function temperatureFigures(temperature: TemperatureResult): readonly Figure[] {
  const samples = new Set(temperature.series.map(({ sample, batch }) => `${batch}\n${sample}`));
  return temperature.series.map((series) => seriesFigure(series, samples.size > 1 ? series.sample : null));
}

/** `of`: the sample, where the series of several are told apart. */
function seriesFigure(series: TemperatureSeries, of: string | null): Figure {
  const values = series.points.map(({ value }) => value);
  const unit =
    series.quantity === "gap_eV" ? { name: "eV", perElectronvolt: 1 } : energyUnit(Math.max(...values));
  const temperatures = series.points.map(({ temperature_K }) => temperature_K);
  const highest = Math.max(...temperatures);
  // The preferred law has the plain line, as in the window.
  const ordered = [...series.laws].sort(
    (a, b) => Number(b.law === series.preferred) - Number(a.law === series.preferred),
  );
  const laws: Mark[] = ordered.map((law, i) => ({
    kind: "line",
    x: series.grid_K,
    y: law.curve.map((value) => (value === null ? null : value * unit.perElectronvolt)),
    colour: COLOURS[i % COLOURS.length]!,
    width: 0.8,
    ...(DASHES[i % DASHES.length] !== undefined && { dash: DASHES[i % DASHES.length]! }),
  }));
  const what =
    series.quantity === "gap_eV" ? "*E*_{g}" : series.n === null ? "Width floor" : `*Γ*_{${series.n}}`;
  const scaled = (pick: (point: TemperatureSeries["points"][number]) => number): number[] =>
    series.points.map((point) => pick(point) * unit.perElectronvolt);
  const low = scaled(({ value, sigma }) => value - sigma);
  const high = scaled(({ value, sigma }) => value + sigma);
  return {
    name: `temperature-${[series.quantity, ...(of === null ? [] : [of])]
      .join("-")
      .replace(/[^a-z0-9]+/gi, "-")
      .replace(/-$/, "")}`,
    caption: `${what}${of === null ? "" : ` of ${of.replace(/[*_^]/g, " ")}`} against temperature with the laws fitted to it; ${temperatureVerdict(series)}.`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 64,
    legend: ordered.map((law, i) => ({
      text: TEMPERATURE_LAW_NAMES[law.law],
      colour: COLOURS[i % COLOURS.length]!,
      ...(DASHES[i % DASHES.length] !== undefined && { dash: DASHES[i % DASHES.length]! }),
    })),
    panels: [
      {
        x: linearAxis("*T* / K", [0, highest], { fromZero: true }),
        y: linearAxis(`${what} / ${unit.name}`, [...low, ...high]),
        marks: [
          ...laws,
          { kind: "points", x: temperatures, y: scaled(({ value }) => value), low, high, colour: INK },
        ],
        share: 1,
      },
    ],
  };
}
