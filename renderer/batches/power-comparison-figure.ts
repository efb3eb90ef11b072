import { besideN, formatNumber, powerTitle, spreadInWords } from "../../app/report/index.ts";
import type { ComparedPower, ComparedPowerPart } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { Axis, FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout, logarithmic } from "../plot/layout.ts";
import { batchLook, type BatchLook } from "./batch-look.ts";

export type PowerView = "one" | "all";

const TITLES: Readonly<Record<ComparedPowerPart["name"], string>> = {
  saturation_per_uW: "Bleaching S / µW⁻¹",
  blockade_volume_um3: "Volume V / µm³",
  exponent: "Exponent of S",
};

/** Power series side by side: one line's numbers by sample (`one`), or S and V of every line against n (`all`). */
export function powerComparisonFigure(
  power: ComparedPower,
  batches: readonly string[],
  palette: Palette,
  view: PowerView,
  placeOf: (file: string) => number | null,
): FigureDescription {
  const looks = new Map(batches.map((batch, i) => [batch, batchLook(i, palette.mode)]));
  const data: Trace[] = [];
  const shapes: object[] = [];
  const layout: Record<string, unknown> = {
    ...baseLayout(palette),
    hovermode: "closest",
    uirevision: `power ${view} ${power.n ?? ""}`,
  };
  let count = 0;
  const place = (drawn: Drawn, across: readonly number[]): void => {
    const suffix = count === 0 ? "" : String(count + 1);
    count++;
    data.push(...drawn.traces.map((trace) => ({ ...trace, xaxis: `x${suffix}`, yaxis: `y${suffix}` })));
    layout[`xaxis${suffix}`] = { ...drawn.x, domain: across, anchor: `y${suffix}` };
    layout[`yaxis${suffix}`] = { ...drawn.y, anchor: `x${suffix}` };
    shapes.push(...drawn.bands.map((band) => ({ ...band, xref: `x${suffix}`, yref: `y${suffix}` })));
  };
  if (view === "all") {
    place(againstN(power, "saturation_per_uW", looks, palette, placeOf), [0, 0.44]);
    place(againstN(power, "blockade_volume_um3", looks, palette, placeOf), [0.56, 1]);
  } else {
    const gap = 0.05;
    const width = (1 - gap * (power.parts.length - 1)) / power.parts.length;
    power.parts.forEach((part, i) =>
      place(intervals(part, looks, palette, i === 0, placeOf), [
        i * (width + gap),
        i * (width + gap) + width,
      ]),
    );
    const longest = Math.max(0, ...power.series.map(({ sample }) => Math.min(18, sample.length)));
    layout["margin"] = { l: 24 + 6.5 * longest, r: 16, t: 10, b: 46, pad: 0 };
  }
  layout["shapes"] = shapes;
  return {
    summary: `${power.series.length} power series side by side`,
    data,
    layout,
  };
}

interface Drawn {
  readonly traces: readonly Trace[];
  readonly x: Axis;
  readonly y: Axis;
  readonly bands: readonly object[];
}

type PlaceOf = (file: string) => number | null;

function intervals(
  part: ComparedPowerPart,
  looks: ReadonlyMap<string, BatchLook>,
  palette: Palette,
  named: boolean,
  placeOf: PlaceOf,
): Drawn {
  const rows = [...looks.keys()].flatMap((batch) => part.samples.filter((one) => one.batch === batch));
  const ends: number[] = [];
  const bands: object[] = [];
  const traces = [...looks].flatMap(([batch, look]): Trace[] => {
    const own = rows.flatMap((one, row) =>
      one.batch === batch && one.left_out === null && one.quantity.value !== null
        ? [{ one, row, value: one.quantity.value }]
        : [],
    );
    const limits = rows.flatMap((one, row) =>
      one.batch === batch && one.limit !== null && one.quantity.value === null
        ? [{ one, row, limit: one.limit }]
        : [],
    );
    ends.push(
      ...own.flatMap(({ one }) => [one.quantity.low!, one.quantity.high!]),
      ...limits.map(({ limit }) => limit),
    );
    const mean = part.batches.find((entry) => entry.batch === batch)?.mean;
    if (own.length > 1 && mean !== undefined && mean.low !== null && mean.high !== null)
      bands.push({
        type: "rect",
        layer: "below",
        x0: mean.low,
        x1: mean.high,
        y0: own[0]!.row - 0.4,
        y1: own.at(-1)!.row + 0.4,
        fillcolor: look.colour,
        opacity: 0.16,
        line: { width: 0 },
      });
    return [
      {
        type: "scatter",
        name: batch,
        x: own.map(({ value }) => value),
        y: own.map(({ row }) => row),
        mode: "markers",
        marker: { size: own.map(() => 8), symbol: look.mark, color: look.colour },
        error_x: {
          type: "data",
          symmetric: false,
          array: own.map(({ one, value }) => one.quantity.high! - value),
          arrayminus: own.map(({ one, value }) => value - one.quantity.low!),
          color: look.colour,
          thickness: 1.5,
          width: 3,
        },
        customdata: own.map(({ one }) => placeOf(one.file)),
        text: own.map(
          ({ one }) =>
            `${one.sample}, batch ${one.batch}<br>${spreadInWords(one.quantity, part.unit)}${
              one.expected === null ? "" : `<br>expected ${formatNumber(one.expected, 3)}`
            }`,
        ),
        hovertemplate: "%{text}<extra></extra>",
        meta: { part: "levels" },
      },
      {
        type: "scatter",
        name: `${batch} limit`,
        x: limits.map(({ limit }) => limit),
        y: limits.map(({ row }) => row),
        mode: "markers",
        marker: { size: limits.map(() => 9), symbol: "triangle-left-open", color: look.colour },
        customdata: limits.map(({ one }) => placeOf(one.file)),
        text: limits.map(({ one, limit }) => `${one.sample}: below ${formatNumber(limit, 3)} ${part.unit}`),
        hovertemplate: "%{text}<extra></extra>",
        meta: { part: "levels" },
      },
    ];
  });
  const title = part.n === null ? TITLES[part.name] : TITLES[part.name].replace(" /", `, n = ${part.n} /`);
  return {
    traces,
    bands,
    x: axis(
      palette,
      title,
      part.logarithmic ? { ...logarithmic(ends), showgrid: false } : { nticks: 4, tickangle: 0 },
    ),
    y: axis(palette, "", {
      range: [rows.length - 0.4, -0.6],
      tickvals: rows.map((_, row) => row),
      ticktext: rows.map(({ sample }) => sample.slice(0, 18)),
      showticklabels: named,
      ticks: "",
      showline: false,
      showgrid: true,
    }),
  };
}

function againstN(
  { series }: ComparedPower,
  quantity: "saturation_per_uW" | "blockade_volume_um3",
  looks: ReadonlyMap<string, BatchLook>,
  palette: Palette,
  placeOf: PlaceOf,
): Drawn {
  const ends: number[] = [];
  const numbers = new Set<number>();
  const traces = series.flatMap((one, i): Trace[] => {
    const look = looks.get(one.batch);
    const lines = one.lines.filter((line) => line[quantity].value !== null);
    if (look === undefined || lines.length === 0) return [];
    const x = lines.map(({ n }) => besideN(n, i, series.length));
    const y = lines.map((line) => line[quantity].value!);
    lines.forEach((line) => {
      numbers.add(line.n);
      ends.push(line[quantity].low!, line[quantity].high!);
    });
    return [
      {
        type: "scatter",
        name: one.sample,
        x,
        y,
        mode: "lines",
        line: { width: 1.1, color: look.colour },
        opacity: 0.55,
        hoverinfo: "skip",
        meta: { part: "line" },
      },
      {
        type: "scatter",
        name: one.sample,
        x,
        y,
        mode: "markers",
        marker: { size: lines.map(() => 7), symbol: look.mark, color: look.colour },
        error_y: {
          type: "data",
          symmetric: false,
          array: lines.map((line) => line[quantity].high! - line[quantity].value!),
          arrayminus: lines.map((line) => line[quantity].value! - line[quantity].low!),
          color: look.colour,
          thickness: 1,
          width: 0,
        },
        customdata: lines.map(() => placeOf(one.file)),
        text: lines.map(({ n }) => `${one.sample}, n = ${n}`),
        hovertemplate: "%{text}: %{y:.3g}<extra></extra>",
        meta: { part: "levels" },
      },
    ];
  });
  const marks = [...numbers].sort((a, b) => a - b);
  const [low, high] = [marks[0] ?? 1, marks.at(-1) ?? 2];
  return {
    traces,
    bands: [],
    x: axis(palette, "Principal quantum number n", {
      type: "log",
      tickvals: marks,
      ticktext: marks.map((n) => (n <= 10 || n % 2 === 0 ? String(n) : "")),
      range: [Math.log10(low * 0.94), Math.log10(high * 1.06)],
    }),
    y: axis(palette, TITLES[quantity].replace(/^(\w+) (\w)/, "$1 $2ₙ"), logarithmic(ends)),
  };
}

/** What a figure's panel is about, for the window's ledger. */
export const powerPartTitle = (part: ComparedPowerPart): string => {
  const words = powerTitle(part);
  return `${words.slice(0, 1).toUpperCase()}${words.slice(1)}`;
};
