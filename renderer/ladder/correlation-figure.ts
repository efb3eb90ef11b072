import type { RunglineResult } from "../../app/protocol/index.ts";
import type { Palette } from "../plot/colours.ts";
import type { FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout } from "../plot/layout.ts";

const GROUPS: Readonly<Record<string, string>> = {
  energy: "energies",
  width: "widths",
  area: "areas",
  asymmetry: "q",
};
/** Correlations below this would be dust. */
const LEAST = 0.02;
/** Sides of all squares together, in pixels, at the size of a small window. */
const SIDES = 430;

/** Correlations of all parameters of the lines: squares by size, filled where positive, hollow where negative. */
export function correlationFigure(result: RunglineResult, palette: Palette): FigureDescription {
  const { names, matrix } = result.diagnostics?.correlation ?? { names: [], matrix: [] };
  const count = names.length;
  const largest = Math.max(3, Math.min(16, SIDES / Math.max(1, count)));
  const squares = (positive: boolean): Trace => {
    const x: number[] = [];
    const y: number[] = [];
    const size: number[] = [];
    const text: string[] = [];
    for (let i = 0; i < count; i++)
      for (let j = 0; j < i; j++) {
        const r = matrix[i]![j] ?? null;
        if (r === null || Math.abs(r) < LEAST || r > 0 !== positive) continue;
        x.push(j);
        y.push(i);
        size.push(Math.max(1.5, largest * Math.sqrt(Math.abs(r))));
        text.push(`${names[j]!}, ${names[i]!}: ${r.toFixed(3)}`);
      }
    return {
      type: "scatter",
      name: positive ? "positive" : "negative",
      x,
      y,
      mode: "markers",
      text,
      marker: {
        symbol: positive ? "square" : "square-open",
        size,
        opacity: 1,
        color: positive ? palette.accent : palette.ink,
        line: { width: positive ? 0 : 1 },
      },
      hovertemplate: "%{text}<extra></extra>",
      meta: { part: positive ? "positive" : "negative" },
    };
  };
  const groups = groupsOf(names);
  const ticks = {
    tickvals: groups.map(({ middle }) => middle),
    ticktext: groups.map(({ word }) => word),
    ticks: "",
  };
  const rules = groups
    .slice(1)
    .flatMap(({ from }) => [
      rule(palette, [from - 0.5, from - 0.5], [from - 0.5, count - 0.5]),
      rule(palette, [-0.5, from - 0.5], [from - 0.5, from - 0.5]),
    ]);
  return {
    summary:
      count === 0
        ? "No correlations: nothing was fitted"
        : `Correlations of ${count} parameters of the lines`,
    data: count === 0 ? [] : [...rules, squares(true), squares(false)],
    layout: {
      ...baseLayout(palette),
      hovermode: "closest",
      uirevision: `${result.source.sha256} correlations`,
      xaxis: axis(palette, "", { ...ticks, range: [-0.5, count - 0.5], constrain: "domain" }),
      yaxis: axis(palette, "", {
        ...ticks,
        range: [count - 0.5, -0.5],
        scaleanchor: "x",
        constrain: "domain",
        tickangle: -90,
      }),
    },
  };
}

function rule(palette: Palette, x: [number, number], y: [number, number]): Trace {
  return {
    type: "scatter",
    name: "between groups",
    x,
    y,
    mode: "lines",
    line: { width: 1, color: palette.grid },
    hoverinfo: "skip",
    meta: { part: "guide" },
  };
}

function groupsOf(names: readonly string[]): { word: string; from: number; middle: number }[] {
  const heads = names.map((name) => name.replace(/\[.*$/, ""));
  return [...new Set(heads)].map((head) => {
    const from = heads.indexOf(head);
    return { word: GROUPS[head] ?? head, from, middle: (from + heads.lastIndexOf(head)) / 2 };
  });
}
