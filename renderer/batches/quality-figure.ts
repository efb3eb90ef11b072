import { formatNumber, PARAMETER_TITLES, sampleLabels } from "../../app/report/index.ts";
import type { ComparedParameter, Comparison } from "../../app/protocol/index.ts";
import type { Mode, Palette } from "../plot/colours.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";
import { batchLook } from "./batch-look.ts";
import { PARAMETER_SYMBOLS } from "./parameter-words.ts";

/** Parts are no batches: their colours start where few batches reach. */
const PARTS_FROM = 3;
/** Share of the axis below which a bar has no room for its symbol. */
const ROOM = 0.03;

export function partColour(k: number, mode: Mode): string {
  return batchLook(k + PARTS_FROM, mode).colour;
}

/** Marks of the plot library for subscripts are styled inline, which the content policy refuses: digits lowered, words beside. */
function plainSymbol(name: ComparedParameter): string {
  const { letter, below } = PARAMETER_SYMBOLS[name];
  if (below === undefined) return letter;
  return /^\d$/.test(below)
    ? `${letter}${String.fromCodePoint(0x2080 + Number(below))}`
    : `${letter} ${below}`;
}

/** The figure of quality of each sample as the sum of its parts: bars end to end to either side, the sum with its error. */
export function qualityFigure(
  comparison: Comparison,
  quality: NonNullable<Comparison["quality"]>,
  batches: readonly string[],
  palette: Palette,
): FigureDescription {
  const labels = sampleLabels(comparison);
  const rows = quality.samples
    .map((sample, i) => ({ ...sample, i, label: labels[i]! }))
    .sort((a, b) => (b.figure.value ?? -Infinity) - (a.figure.value ?? -Infinity));
  const shapes: object[] = [];
  const bars: { x: number; row: number; name: ComparedParameter; width: number; i: number; hover: string }[] =
    [];
  let [low, high] = [0, 0];
  rows.forEach(({ contributions, figure, i, sample }, row) => {
    let above = 0;
    let below = 0;
    quality.parts.forEach(({ name, weight }, k) => {
      const size = contributions[name];
      if (size === undefined) return;
      const from = size >= 0 ? above : below;
      const to = from + size;
      if (size >= 0) above = to;
      else below = to;
      shapes.push({
        type: "rect",
        layer: "below",
        x0: from,
        x1: to,
        y0: row - 0.36,
        y1: row + 0.36,
        fillcolor: partColour(k, palette.mode),
        opacity: palette.mode === "light" ? 0.4 : 0.5,
        line: { width: 0 },
      });
      bars.push({
        x: (from + to) / 2,
        row,
        i,
        width: Math.abs(size),
        name,
        hover: `${sample}: ${PARAMETER_TITLES[name]} × ${weight} gives ${formatNumber(size, 3)}`,
      });
    });
    low = Math.min(low, below, figure.low ?? 0);
    high = Math.max(high, above, figure.high ?? 0);
  });
  // One symbol a part, in its widest bar: in every bar they would hide the figure.
  const widest = new Map<ComparedParameter, (typeof bars)[number]>();
  for (const bar of bars) if (bar.width > (widest.get(bar.name)?.width ?? 0)) widest.set(bar.name, bar);
  const room = 0.04 * (high - low || 1);
  const known = rows.flatMap((one, row) =>
    one.figure.value === null ? [] : [{ ...one, row, value: one.figure.value }],
  );
  const data: Trace[] = [
    {
      type: "scatter",
      name: "parts",
      x: bars.map(({ x }) => x),
      y: bars.map(({ row }) => row),
      mode: "text",
      text: bars.map((bar) =>
        widest.get(bar.name) === bar && bar.width > ROOM * (high - low) ? plainSymbol(bar.name) : "",
      ),
      textfont: { size: 11, color: palette.ink },
      customdata: bars.map(({ i }) => i),
      hovertext: bars.map(({ hover }) => hover),
      hoverinfo: "text",
      meta: { part: "parts" },
    },
    ...batches.flatMap((batch, b): Trace[] => {
      const own = known.filter((one) => one.batch === batch);
      const look = batchLook(b, palette.mode);
      return own.length === 0
        ? []
        : [
            {
              type: "scatter",
              name: batch,
              x: own.map(({ value }) => value),
              y: own.map(({ row }) => row),
              mode: "markers",
              marker: {
                size: own.map(() => 9),
                symbol: look.mark,
                color: look.colour,
                line: { width: 1, color: palette.ground },
              },
              error_x: {
                type: "data",
                array: own.map(({ figure }) => figure.sigma ?? 0),
                color: palette.ink,
                thickness: 1.5,
                width: 3,
              },
              customdata: own.map(({ i }) => i),
              text: own.map(({ sample, value }) => `${sample}: ${formatNumber(value, 3)}`),
              hovertemplate: "%{text}<extra></extra>",
              meta: { part: "levels" },
            },
          ];
    }),
  ];
  const longest = Math.max(0, ...rows.map(({ label }) => Math.min(18, label.length)));
  return {
    summary: `Figure of quality of ${known.length} samples as the sum of ${quality.parts.length} parts`,
    data,
    layout: {
      ...baseLayout(palette),
      hovermode: "closest",
      uirevision: `quality ${quality.parts.map(({ name }) => name).join(" ")}`,
      shapes,
      margin: { l: 24 + 6.5 * longest, r: 16, t: 10, b: 46, pad: 0 },
      xaxis: axis(palette, "Figure of quality, in spreads of the samples", {
        range: [low - room, high + room],
        zeroline: true,
        zerolinecolor: palette.muted,
      }),
      yaxis: axis(palette, "", {
        range: [rows.length - 0.4, -0.6],
        tickvals: rows.map((_, row) => row),
        ticktext: rows.map(({ label }, row) =>
          row % Math.ceil(rows.length / 24) === 0 ? label.slice(0, 18) : "",
        ),
        ticks: "",
        showline: false,
      }),
    },
  };
}
