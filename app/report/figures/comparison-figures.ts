import type { ComparedPart, ComparedSample, Comparison } from "../../protocol/index.ts";
import { besideN } from "../beside-n.ts";
import { PARAMETER_TITLES, sampleLabels } from "../comparison-to-text.ts";
import { energyUnit } from "../format-quantity.ts";
import { powerComparisonFigures } from "./power-comparison-figures.ts";
import { qualityFigure } from "./quality-figure.ts";
import { shortName } from "./short-name.ts";
import { linearAxis, logarithmicAxis, namedAxis, quantumNumberAxis, type AxisDescription } from "./axis.ts";
import { batchLook, type BatchLook } from "./colours.ts";
import { FULL_WIDTH_MM, ONE_COLUMN_MM, type Figure, type LegendEntry, type Mark } from "./figure.ts";

/** Each parameter of all samples beside each other, and widths and strengths of all samples in one picture. */
export function comparisonFigures(comparison: Comparison): readonly Figure[] {
  const batches = [...new Set(comparison.samples.map((sample) => sample.batch))];
  const looks = new Map(batches.map((batch, i) => [batch, batchLook(i)]));
  return [
    ...comparison.parameters
      .filter((part) => part.samples > 1)
      .map((part) => intervals(part, comparison, looks)),
    ...allLines(comparison, looks),
    ...(comparison.quality === null ? [] : qualityFigure(comparison, comparison.quality)),
    ...(comparison.power === null ? [] : powerComparisonFigures(comparison.power, looks)),
  ];
}

/** Samples of one batch stand together, in the order of the batches. */
function inBatches(comparison: Comparison, looks: ReadonlyMap<string, BatchLook>): ComparedSample[] {
  return [...looks.keys()].flatMap((batch) => comparison.samples.filter((sample) => sample.batch === batch));
}

function intervals(
  part: ComparedPart,
  comparison: Comparison,
  looks: ReadonlyMap<string, BatchLook>,
): Figure {
  const samples = inBatches(comparison, looks);
  const labels = new Map(sampleLabels(comparison).map((label, i) => [comparison.samples[i]!, label]));
  const centre = part.name === "gap_eV" ? (part.mean.value ?? 0) : 0;
  const size = Math.max(
    ...samples.map((sample) => Math.abs((sample.parameters[part.name]?.value ?? 0) - centre)),
  );
  const energy = part.name.endsWith("_eV") ? energyUnit(size) : null;
  const factor = energy?.perElectronvolt ?? 1;
  const unit = energy?.name ?? part.unit;
  const quantity = part.name === "gap_eV" ? "gap − common mean" : PARAMETER_TITLES[part.name];
  const marks: Mark[] = [];
  const ends: (number | null)[] = [];
  for (const [batch, look] of looks) {
    const rows = samples.flatMap((sample, i) => {
      const one = sample.parameters[part.name];
      return sample.batch === batch && one !== undefined && one.value !== null ? [{ one, row: -i }] : [];
    });
    const moved = (value: number): number => (value - centre) * factor;
    const mean = part.batches.find((entry) => entry.batch === batch)?.mean;
    if (mean !== undefined && mean.low !== null && mean.high !== null && rows.length > 0) {
      const [top, bottom] = [
        Math.max(...rows.map(({ row }) => row)) + 0.42,
        Math.min(...rows.map(({ row }) => row)) - 0.42,
      ];
      const [from, to] = [moved(mean.low), moved(mean.high)];
      marks.push({
        kind: "band",
        x: [from, to],
        low: [bottom, bottom],
        high: [top, top],
        colour: look.colour,
        opacity: 0.14,
      });
      ends.push(from, to);
    }
    const around =
      (sigma: number | null, sign: number): ((row: (typeof rows)[number]) => number | null) =>
      ({ one }) =>
        sigma === null ? null : moved(one.value! + sign * sigma);
    const points: Mark & { kind: "points" } = {
      kind: "points",
      along: "x",
      x: rows.map(({ one }) => moved(one.value!)),
      y: rows.map(({ row }) => row),
      low: rows.map((row) => around(row.one.statistical, -1)(row)),
      high: rows.map((row) => around(row.one.statistical, 1)(row)),
      outerLow: rows.map((row) => around(row.one.sigma, -1)(row)),
      outerHigh: rows.map((row) => around(row.one.sigma, 1)(row)),
      colour: look.colour,
      shape: look.shape,
      hollow: rows.map(({ one }) => one.left_out !== null),
      size: 2.3,
    };
    marks.push(points);
    // An interval far longer than the others runs out of the picture.
    ends.push(...points.x, ...points.low!, ...points.high!);
  }
  return {
    name: `compare-${part.name.replace(/_/g, "-")}`,
    caption: `${capital(PARAMETER_TITLES[part.name])} of ${part.samples} samples${
      part.name === "gap_eV" ? ", their distance to the common mean" : ""
    }: thick one statistical standard error, thin with the systematic part, shaded the mean of the batch. Hollow: left out of the comparison.`,
    width_mm: ONE_COLUMN_MM,
    height_mm: 24 + 5.2 * samples.length + 4 * Math.ceil(looks.size / 3),
    legend: legendOf(looks),
    panels: [
      {
        x: linearAxis(`${quantity}${unit === "" ? "" : ` / ${unit}`}`, ends, { count: 4 }),
        y: namedAxis(samples.map((sample) => shortName(labels.get(sample)!))),
        marks,
        share: 1,
        grid: "x",
      },
    ],
  };
}

function capital(text: string): string {
  return text.slice(0, 1).toUpperCase() + text.slice(1);
}

function legendOf(looks: ReadonlyMap<string, BatchLook>): LegendEntry[] {
  return [...looks].map(([batch, { colour, shape }]) => ({
    text: batch.replace(/[*_^]/g, " "),
    colour,
    shape,
  }));
}

function allLines(comparison: Comparison, looks: ReadonlyMap<string, BatchLook>): Figure[] {
  const samples = inBatches(comparison, looks).filter((sample) => sample.lines.length > 0);
  if (samples.length < 2) return [];
  const ns = samples.flatMap((sample) => sample.lines.map(({ n }) => n));
  const figure = (
    name: string,
    title: string,
    caption: string,
    quantity: "width_eV" | "area_n3",
    factor: number,
  ): Figure => {
    const marks = samples.flatMap((sample): Mark[] => {
      const look = looks.get(sample.batch)!;
      const lines = sample.lines.filter((line) => line[quantity].value !== null);
      const at = (pick: (line: (typeof lines)[number]) => number | null): (number | null)[] =>
        lines.map((line) => {
          const value = pick(line);
          return value === null ? null : value * factor;
        });
      const place = samples.indexOf(sample);
      const x = lines.map(({ n }) => besideN(n, place, samples.length));
      return [
        { kind: "line", x, y: at((line) => line[quantity].value), colour: look.colour, width: 0.35 },
        {
          kind: "points",
          x,
          y: at((line) => line[quantity].value),
          low: at((line) => line[quantity].low),
          high: at((line) => line[quantity].high),
          colour: look.colour,
          shape: look.shape,
          size: 1.6,
        },
      ];
    });
    return {
      name,
      caption,
      width_mm: FULL_WIDTH_MM,
      height_mm: 80,
      legend: legendOf(looks),
      panels: [
        {
          x: quantumNumberAxis(ns, "logarithmic"),
          y: levelOrSteep(
            title,
            samples
              .flatMap((sample) => sample.lines.map((line) => line[quantity].value))
              .map((value) => (value === null ? null : value * factor)),
          ),
          marks,
          share: 1,
        },
      ],
    };
  };
  return [
    figure(
      "compare-widths",
      "*Γ*_{n} / µeV",
      "Widths of all samples against *n*, by batch.",
      "width_eV",
      1e6,
    ),
    figure(
      "compare-strengths",
      `*A*_{n} *n*^{3} / ${areaUnitOf(comparison)}`,
      "Areas times *n*^{3} of all samples, by batch: level where strengths follow *n*^{−3}.",
      "area_n3",
      1,
    ),
  ];
}

function areaUnitOf({ parameters }: Comparison): string {
  const unit = parameters.find((part) => part.name === "strength_coefficient")?.unit ?? "";
  return unit === "" ? "(eV × unit of the signal)" : unit.includes("/") ? `(${unit})` : unit;
}

/** What varies little is told apart better on a linear axis. */
function levelOrSteep(title: string, values: readonly (number | null)[]): AxisDescription {
  const known = values.filter((value): value is number => value !== null && value > 0);
  return Math.max(...known) < 6 * Math.min(...known)
    ? linearAxis(title, known)
    : logarithmicAxis(title, values);
}
