import { besideN, PARAMETER_TITLES, sampleLabels } from "../../app/report/index.ts";
import type {
  ComparedParameter,
  ComparedPart,
  ComparedSample,
  Comparison,
} from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { Axis, FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout, logarithmic } from "../plot/layout.ts";
import { batchLook, type BatchLook } from "./batch-look.ts";
import { MAIN_PARAMETERS, title, unitFor } from "./parameter-words.ts";

export type BatchesPanel = "main" | "lines" | "one";

interface Look {
  readonly batch: string;
  readonly look: BatchLook;
}

/**
 * The samples of a comparison beside each other, as plain data. `customdata` of a mark is the place of its sample in the
 * comparison, so that pointing at it lights its row.
 */
export function batchesFigure(
  comparison: Comparison,
  batches: readonly string[],
  palette: Palette,
  panel: BatchesPanel,
  one: ComparedParameter,
): FigureDescription {
  const looks = batches.map((batch, i): Look => ({ batch, look: batchLook(i, palette.mode) }));
  const data: Trace[] = [];
  const shapes: object[] = [];
  const layout: Record<string, unknown> = {
    ...baseLayout(palette),
    hovermode: "closest",
    uirevision: `batches ${panel} ${one} ${comparison.samples.map(({ sample }) => sample).join(" ")}`,
  };
  let count = 0;
  const place = (
    traces: readonly Trace[],
    x: Axis,
    y: Axis,
    across: readonly [number, number],
    up: readonly [number, number] = [0, 1],
  ): string => {
    const suffix = count === 0 ? "" : String(count + 1);
    count++;
    data.push(...traces.map((trace) => ({ ...trace, xaxis: `x${suffix}`, yaxis: `y${suffix}` })));
    layout[`xaxis${suffix}`] = { ...x, domain: across, anchor: `y${suffix}` };
    layout[`yaxis${suffix}`] = { ...y, domain: up, anchor: `x${suffix}` };
    return suffix;
  };
  if (panel === "lines") {
    for (const [quantity, across] of [
      ["width_eV", [0, 0.44]],
      ["area_n3", [0.56, 1]],
    ] as const) {
      const drawn = allLines(comparison, looks, palette, quantity);
      place(drawn.traces, drawn.x, drawn.y, across);
    }
  } else {
    const names = panel === "one" ? [one] : MAIN_PARAMETERS;
    const parts = names.flatMap((name) => comparison.parameters.filter((part) => part.name === name));
    const rows = inBatches(comparison, batches);
    const trend = panel === "one" && parts[0]?.trend !== undefined && parts[0].trend !== null;
    const reach = trend ? 0.46 : 1;
    const gap = 0.03;
    const width = (reach - gap * (parts.length - 1)) / Math.max(1, parts.length);
    parts.forEach((part, i) => {
      const from = i * (width + gap);
      const drawn = intervals(part, comparison, rows, looks, palette);
      const suffix = place(drawn.traces, drawn.x, namesAxis(rows, comparison, palette, i === 0), [
        from,
        Math.min(1, from + width),
      ]);
      shapes.push(...drawn.bands.map((band) => ({ ...band, xref: `x${suffix}`, yref: `y${suffix}` })));
    });
    if (trend) {
      const drawn = trendPlot(parts[0]!, comparison, looks, palette);
      place(drawn.traces, drawn.x, drawn.y, [0.6, 1]);
    }
    layout["margin"] = { l: leftMargin(rows, comparison), r: 16, t: 10, b: 46, pad: 0 };
  }
  layout["shapes"] = shapes;
  return { summary: summarise(comparison), data, layout };
}

function summarise({ samples }: Comparison): string {
  const batches = new Set(samples.map(({ batch }) => batch)).size;
  return `${samples.length} samples of ${batches} ${batches === 1 ? "batch" : "batches"} side by side`;
}

/** Places in the comparison, samples of one batch together. */
function inBatches({ samples }: Comparison, batches: readonly string[]): readonly number[] {
  return batches.flatMap((batch) => samples.flatMap((sample, i) => (sample.batch === batch ? [i] : [])));
}

const LONGEST_NAME = 18;
const MOST_NAMES = 24;

function shortName(name: string): string {
  const letters = Array.from(name);
  return letters.length <= LONGEST_NAME
    ? name
    : `${letters.slice(0, 9).join("")}…${letters.slice(-8).join("")}`;
}

function leftMargin(rows: readonly number[], comparison: Comparison): number {
  const labels = sampleLabels(comparison);
  const longest = Math.max(0, ...rows.map((i) => shortName(labels[i]!).length));
  return 24 + 6.5 * longest;
}

function namesAxis(rows: readonly number[], comparison: Comparison, palette: Palette, named: boolean): Axis {
  const labels = sampleLabels(comparison);
  return axis(palette, "", {
    range: [rows.length - 0.4, -0.6],
    tickvals: rows.map((_, row) => row),
    // Of very many samples only some names have room; the others are told by pointing.
    ticktext: rows.map((i, row) =>
      row % Math.ceil(rows.length / MOST_NAMES) === 0 ? shortName(labels[i]!) : "",
    ),
    showticklabels: named,
    ticks: "",
    showline: false,
    showgrid: true,
  });
}

interface Drawn {
  readonly traces: readonly Trace[];
  readonly x: Axis;
  readonly y: Axis;
}

/** Dot and interval of each sample: thick the statistical part, thin with the systematic one, a band the mean of a batch. */
function intervals(
  part: ComparedPart,
  comparison: Comparison,
  rows: readonly number[],
  looks: readonly Look[],
  palette: Palette,
): { readonly traces: readonly Trace[]; readonly x: Axis; readonly bands: readonly object[] } {
  const { samples } = comparison;
  const gap = part.name === "gap_eV";
  const centre = gap ? (part.mean.value ?? 0) : 0;
  const values = rows.flatMap((i) => {
    const value = samples[i]!.parameters[part.name]?.value ?? null;
    return value === null ? [] : [value - centre];
  });
  const { unit, scale } = unitFor(part, Math.max(0, ...values.map(Math.abs)));
  const traces: Trace[] = [];
  const bands: object[] = [];
  for (const { batch, look } of looks) {
    const own = rows.flatMap((i, row) => {
      const sample = samples[i]!;
      const one = sample.parameters[part.name];
      return sample.batch === batch && one !== undefined && one.value !== null
        ? [{ i, row, sample, one, value: one.value }]
        : [];
    });
    if (own.length === 0) continue;
    const x = own.map(({ value }) => (value - centre) * scale);
    const y = own.map(({ row }) => row);
    const statistical = own.map(({ one }) => (one.statistical ?? 0) * scale);
    const total = own.map(({ one }) => Math.hypot(one.statistical ?? 0, one.systematic ?? 0) * scale);
    traces.push(
      {
        type: "scatter",
        name: `${batch} total`,
        x,
        y,
        mode: "markers",
        marker: { size: 1, color: look.colour },
        error_x: { type: "data", array: total, color: look.colour, thickness: 1, width: 3 },
        hoverinfo: "skip",
        meta: { part: "total" },
      },
      {
        type: "scatter",
        name: batch,
        x,
        y,
        mode: "markers",
        marker: {
          size: own.map(() => 8),
          symbol: own.map(({ one }) => (one.left_out === null ? look.mark : `${look.mark}-open`)),
          color: look.colour,
          line: { width: 1.2, color: look.colour },
        },
        error_x: { type: "data", array: statistical, color: look.colour, thickness: 3.5, width: 0 },
        customdata: own.map(({ i }) => i),
        text: own.map(({ sample, one }) => hoverText(sample, one, unit, scale)),
        hovertemplate: "%{text}<extra></extra>",
        meta: { part: "levels" },
      },
    );
    const mean = part.batches.find((entry) => entry.batch === batch)?.mean;
    if (own.length > 1 && mean !== undefined && mean.low !== null && mean.high !== null)
      bands.push({
        type: "rect",
        layer: "below",
        x0: (mean.low - centre) * scale,
        x1: (mean.high - centre) * scale,
        y0: Math.min(...y) - 0.4,
        y1: Math.max(...y) + 0.4,
        fillcolor: look.colour,
        opacity: 0.16,
        line: { width: 0 },
      });
  }
  const name = gap ? "Gap − mean" : title(part.name);
  return {
    traces,
    x: axis(palette, unit === "" ? name : `${name} / ${unit}`, {
      nticks: 4,
      tickangle: 0,
      showgrid: false,
      zeroline: gap,
      zerolinecolor: palette.grid,
    }),
    bands,
  };
}

type Measured = NonNullable<ComparedSample["parameters"][ComparedParameter]>;

function hoverText(sample: ComparedSample, one: Measured, unit: string, scale: number): string {
  const size = (value: number | null): string =>
    value === null ? "not judged" : `±${Number((value * scale).toPrecision(2))} ${unit}`.trim();
  return [
    `${sample.sample}, batch ${sample.batch}`,
    `statistical ${size(one.statistical)}`,
    `systematic ${size(one.systematic)}`,
    ...(one.left_out === null ? [] : [`left out: ${one.left_out}`]),
  ].join("<br>");
}

/** Higher n crowd on a logarithmic axis. */
const NUMBERED: readonly number[] = [8, 10, 12, 15, 20, 25, 30, 40];

/** Widths or areas times n³ of all samples against n, each sample a line in the look of its batch. */
function allLines(
  comparison: Comparison,
  looks: readonly Look[],
  palette: Palette,
  quantity: "width_eV" | "area_n3",
): Drawn {
  const scale = quantity === "width_eV" ? 1e6 : 1;
  const all: number[] = [];
  const numbers = new Set<number>();
  const traces = comparison.samples.flatMap((sample, i): Trace[] => {
    const at = looks.findIndex(({ batch }) => batch === sample.batch);
    const lines = sample.lines.filter((line) => (line[quantity].value ?? 0) > 0);
    if (at < 0 || lines.length === 0) return [];
    const { look } = looks[at]!;
    const x = lines.map(({ n }) => besideN(n, i, comparison.samples.length));
    const y = lines.map((line) => line[quantity].value! * scale);
    all.push(...y);
    lines.forEach(({ n }) => numbers.add(n));
    return [
      {
        type: "scatter",
        name: sample.sample,
        x,
        y,
        mode: "lines",
        line: { width: 1.1, color: look.colour },
        opacity: 0.55,
        hoverinfo: "skip",
        meta: { part: "line", n: i },
      },
      {
        type: "scatter",
        name: sample.sample,
        x,
        y,
        mode: "markers",
        marker: { size: lines.map(() => 7), symbol: look.mark, color: look.colour },
        error_y: {
          type: "data",
          array: lines.map((line) => (line[quantity].sigma ?? 0) * scale),
          color: look.colour,
          thickness: 1,
          width: 0,
        },
        customdata: lines.map(() => i),
        text: lines.map(({ n }) => `${sample.sample}, n = ${n}`),
        hovertemplate: "%{text}: %{y:.4g}<extra></extra>",
        meta: { part: "levels" },
      },
    ];
  });
  const marks = [...numbers].sort((a, b) => a - b);
  const low = marks[0] ?? 1;
  const high = marks.at(-1) ?? 2;
  const unit = comparison.parameters.find((part) => part.name === "strength_coefficient")?.unit ?? "";
  const level = all.length > 0 && Math.max(...all) < 6 * Math.min(...all);
  return {
    traces,
    x: axis(palette, "Principal quantum number n", {
      type: "log",
      tickvals: marks,
      ticktext: marks.map((n) => (n <= 6 || NUMBERED.includes(n) ? String(n) : "")),
      tickangle: 0,
      range: [Math.log10(low * 0.9), Math.log10(high * 1.1)],
    }),
    y: axis(
      palette,
      quantity === "width_eV"
        ? "Width Γ / µeV"
        : `Area × n³${unit === "" ? "" : ` / ${unit.includes("/") ? `(${unit})` : unit}`}`,
      level ? { rangemode: "tozero" } : logarithmic(all),
    ),
  };
}

/** One parameter along what the user named, with the line through it. */
function trendPlot(
  part: ComparedPart,
  { samples }: Comparison,
  looks: readonly Look[],
  palette: Palette,
): Drawn {
  const trend = part.trend!;
  const gap = part.name === "gap_eV";
  const origin = gap ? (trend.at_centre.value ?? 0) : 0;
  const found = samples.flatMap((sample, i) => {
    const one = sample.parameters[part.name];
    return sample.against !== null && one !== undefined && one.value !== null
      ? [{ i, sample, one, value: one.value, at: sample.against }]
      : [];
  });
  const { unit, scale } = unitFor(part, Math.max(0, ...found.map(({ value }) => Math.abs(value - origin))));
  const traces = looks.flatMap(({ batch, look }): Trace[] => {
    const own = found.filter(({ sample }) => sample.batch === batch);
    if (own.length === 0) return [];
    return [
      {
        type: "scatter",
        name: batch,
        x: own.map(({ at }) => at),
        y: own.map(({ value }) => (value - origin) * scale),
        mode: "markers",
        marker: { size: own.map(() => 8), symbol: look.mark, color: look.colour },
        error_y: {
          type: "data",
          array: own.map(({ one }) => (one.sigma ?? 0) * scale),
          color: look.colour,
          thickness: 1,
          width: 0,
        },
        customdata: own.map(({ i }) => i),
        text: own.map(({ sample, one }) => hoverText(sample, one, unit, scale)),
        hovertemplate: "%{text}<extra></extra>",
        meta: { part: "levels" },
      },
    ];
  });
  const ends = [Math.min(...found.map(({ at }) => at)), Math.max(...found.map(({ at }) => at))];
  const { slope, at_centre: middle, centre } = trend;
  if (slope.value !== null && middle.value !== null)
    traces.unshift({
      type: "scatter",
      name: "trend",
      x: ends,
      y: ends.map((at) => (middle.value! - origin + slope.value! * (at - centre)) * scale),
      mode: "lines",
      line: { width: 1.2, color: palette.ink, dash: trend.seen ? "solid" : "dot" },
      hoverinfo: "skip",
      meta: { part: "trend" },
    });
  const name = gap ? "gap − its mean" : PARAMETER_TITLES[part.name];
  return {
    traces,
    x: axis(palette, trend.unit === "" ? trend.against : `${trend.against} / ${trend.unit}`),
    y: axis(palette, unit === "" ? name : `${name} / ${unit}`),
  };
}
