import { boseEinsteinGap, phononWidth, varshni } from "../../laws/index.ts";
import type { TemperatureLaw, TemperatureResult, TemperatureSeries } from "../../protocol/index.ts";
import { energyUnit } from "../format-quantity.ts";
import { linearAxis } from "./axis.ts";
import { ACCENT, DATA, INK } from "./colours.ts";
import { ONE_COLUMN_MM, type Figure, type Mark } from "./figure.ts";

const LAW_NAMES: Readonly<Record<TemperatureLaw["law"], string>> = {
  varshni: "Varshni",
  "bose-einstein": "Bose-Einstein",
  phonons: "acoustic and optical phonons",
  optical: "optical phonons",
  acoustic: "acoustic phonons",
};
const DASHES = [undefined, "4 2", "1.5 1.5"] as const;
const COLOURS = [ACCENT, INK, DATA] as const;

export function temperatureFigures(temperature: TemperatureResult): readonly Figure[] {
  return temperature.series.map(seriesFigure);
}

function seriesFigure(series: TemperatureSeries): Figure {
  const values = series.points.map(({ value }) => value);
  const unit =
    series.quantity === "gap_eV" ? { name: "eV", perElectronvolt: 1 } : energyUnit(Math.max(...values));
  const temperatures = series.points.map(({ temperature_K }) => temperature_K);
  const highest = Math.max(...temperatures);
  const grid = Array.from({ length: 80 }, (_, i) => (1.04 * highest * i) / 79);
  const laws: Mark[] = series.laws.map((law, i) => ({
    kind: "line",
    x: grid,
    y: grid.map((t) => evaluate(law, t) * unit.perElectronvolt),
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
    name: `temperature-${series.quantity.replace(/[^a-z0-9]+/gi, "-").replace(/-$/, "")}`,
    caption: `${what} against temperature with the laws fitted to it.`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 64,
    legend: series.laws.map((law, i) => ({
      text: LAW_NAMES[law.law],
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

function evaluate(law: TemperatureLaw, temperature: number): number {
  const of = (name: string): number => law.parameters.find((one) => one.name === name)?.quantity.value ?? 0;
  const out = new Float64Array(5);
  if (law.law === "varshni") varshni(temperature, of("gap0"), of("alpha"), of("beta"), out);
  else if (law.law === "bose-einstein")
    boseEinsteinGap(temperature, of("gapB"), of("coupling"), of("theta"), out);
  else
    phononWidth(temperature, of("width0"), of("acoustic"), of("optical"), of("phonon_energy") || 0.02, out);
  return out[0]!;
}
