import type { ComparedPower, ComparedPowerPart } from "../../protocol/index.ts";
import { powerTitle } from "../comparison-to-text.ts";
import { linearAxis, logarithmicAxis, namedAxis, quantumNumberAxis } from "./axis.ts";
import type { BatchLook } from "./colours.ts";
import { FULL_WIDTH_MM, ONE_COLUMN_MM, type Figure, type LegendEntry, type Mark } from "./figure.ts";
import { shortName } from "./short-name.ts";

/** Bleaching and volume of all power series against n, and each compared number with its interval by batch. */
export function powerComparisonFigures(
  power: ComparedPower,
  looks: ReadonlyMap<string, BatchLook>,
): readonly Figure[] {
  return [
    ...power.parts.flatMap((part) => intervals(part, looks)),
    ...(["saturation_per_uW", "blockade_volume_um3"] as const).flatMap((quantity) =>
      againstN(power, quantity, looks),
    ),
  ];
}

function legendOf(looks: ReadonlyMap<string, BatchLook>, batches: ReadonlySet<string>): LegendEntry[] {
  return [...looks].flatMap(([batch, { colour, shape }]) =>
    batches.has(batch) ? [{ text: batch.replace(/[*_^]/g, " "), colour, shape }] : [],
  );
}

const TITLES = {
  saturation_per_uW: "*S*_{n} / µW^{−1}",
  blockade_volume_um3: "*V*_{n} / µm^{3}",
  exponent: "Exponent of *S*_{n}",
} as const;

function intervals(part: ComparedPowerPart, looks: ReadonlyMap<string, BatchLook>): Figure[] {
  const rows = [...looks.keys()].flatMap((batch) => part.samples.filter((one) => one.batch === batch));
  const told = rows.filter(({ quantity, left_out }) => left_out === null && quantity.value !== null);
  if (told.length < 2) return [];
  const ends = told.flatMap(({ quantity }) => [quantity.low, quantity.high]);
  const marks: Mark[] = [];
  for (const [batch, look] of looks) {
    const own = rows.flatMap((one, i) =>
      told.includes(one) && one.batch === batch ? [{ one, row: -i }] : [],
    );
    if (own.length === 0) continue;
    const mean = part.batches.find((entry) => entry.batch === batch)?.mean;
    if (own.length > 1 && mean?.low !== null && mean?.high !== null && mean !== undefined) {
      const places = own.map(({ row }) => row);
      marks.push({
        kind: "band",
        x: [mean.low, mean.high],
        low: Array.from({ length: 2 }, () => Math.min(...places) - 0.42),
        high: Array.from({ length: 2 }, () => Math.max(...places) + 0.42),
        colour: look.colour,
        opacity: 0.14,
      });
      ends.push(mean.low, mean.high);
    }
    marks.push({
      kind: "points",
      along: "x",
      x: own.map(({ one }) => one.quantity.value!),
      y: own.map(({ row }) => row),
      low: own.map(({ one }) => one.quantity.low),
      high: own.map(({ one }) => one.quantity.high),
      colour: look.colour,
      shape: look.shape,
      size: 2.3,
    });
  }
  const title = `${TITLES[part.name]}${part.n === null ? "" : `, *n* = ${part.n}`}`;
  return [
    {
      name: `compare-power-${part.name.replace(/_/g, "-").toLowerCase()}`,
      caption:
        `${powerTitle(part)} of ${told.length} power series by batch, shaded the mean of a batch.`.replace(
          /^./,
          (first) => first.toUpperCase(),
        ),
      width_mm: ONE_COLUMN_MM,
      height_mm: 24 + 5.2 * rows.length + 4 * Math.ceil(looks.size / 3),
      legend: legendOf(looks, new Set(rows.map(({ batch }) => batch))),
      panels: [
        {
          x: part.logarithmic ? logarithmicAxis(title, ends) : linearAxis(title, ends, { count: 4 }),
          y: namedAxis(rows.map(({ sample }) => shortName(sample))),
          marks,
          share: 1,
          grid: "x",
        },
      ],
    },
  ];
}

function againstN(
  { series }: ComparedPower,
  quantity: "saturation_per_uW" | "blockade_volume_um3",
  looks: ReadonlyMap<string, BatchLook>,
): Figure[] {
  const drawn = series.map((one) => ({
    ...one,
    lines: one.lines.filter((line) => line[quantity].value !== null),
  }));
  const lines = drawn.flatMap((one) => one.lines);
  if (lines.length === 0) return [];
  const marks = drawn.flatMap((one): Mark[] => {
    const look = looks.get(one.batch);
    if (look === undefined || one.lines.length === 0) return [];
    const x = one.lines.map(({ n }) => n);
    const y = one.lines.map((line) => line[quantity].value);
    return [
      { kind: "line", x, y, colour: look.colour, width: 0.35 },
      {
        kind: "points",
        x,
        y,
        low: one.lines.map((line) => line[quantity].low),
        high: one.lines.map((line) => line[quantity].high),
        colour: look.colour,
        shape: look.shape,
        size: 1.6,
      },
    ];
  });
  return [
    {
      name: quantity === "saturation_per_uW" ? "compare-power-s-against-n" : "compare-power-v-against-n",
      caption:
        quantity === "saturation_per_uW"
          ? "Bleaching *S*_{n} at low power of all power series against *n*, by batch; both axes logarithmic."
          : "Volume *V*_{n} that one exciton blocks against *n*, of all power series, by batch; both axes logarithmic.",
      width_mm: FULL_WIDTH_MM,
      height_mm: 80,
      legend: legendOf(looks, new Set(drawn.map(({ batch }) => batch))),
      panels: [
        {
          x: quantumNumberAxis(
            lines.map(({ n }) => n),
            "logarithmic",
          ),
          y: logarithmicAxis(
            TITLES[quantity],
            lines.flatMap((line) => [line[quantity].low, line[quantity].high]),
          ),
          marks,
          share: 1,
        },
      ],
    },
  ];
}
