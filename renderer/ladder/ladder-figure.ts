import type { Quantity } from "../../app/base/index.ts";
import type { LineResult, RunglineResult } from "../../app/protocol/index.ts";
import { colourOfN, type Palette } from "../plot/colours.ts";
import { composePanels, type Drawn, type Place } from "../plot/compose-panels.ts";
import type { Axis, FigureDescription, Trace } from "../plot/figure-description.ts";
import { axis, baseLayout, logarithmic } from "../plot/layout.ts";

export type LadderPanel = "all" | "levels" | "widths" | "strengths" | "asymmetries" | "ranges";
export type RangeQuantity = "gap" | "rydberg" | "defect";

type PanelName = "levels" | "offsets" | "widths" | "strengths" | "asymmetries" | "ranges";
type Places = Partial<Record<PanelName, Place>>;

const WIDE: readonly [number, number] = [0, 1];
const PLACES: Readonly<Record<LadderPanel, Places>> = {
  all: {
    levels: { x: [0, 0.53], y: [0.46, 1] },
    offsets: { x: [0, 0.53], y: [0, 0.32] },
    widths: { x: [0.67, 1], y: [0.74, 1] },
    strengths: { x: [0.67, 1], y: [0.37, 0.62] },
    ranges: { x: [0.67, 1], y: [0, 0.25] },
  },
  levels: { levels: { x: WIDE, y: [0.44, 1] }, offsets: { x: WIDE, y: [0, 0.31] } },
  widths: { widths: { x: WIDE, y: [0, 1] } },
  strengths: { strengths: { x: WIDE, y: [0, 1] } },
  asymmetries: { asymmetries: { x: WIDE, y: [0, 1] } },
  ranges: { ranges: { x: WIDE, y: [0, 1] } },
};

/** The plots a referee asks of a series: levels, their distance to the law, widths, strengths, ranges of n. */
export function ladderFigure(
  result: RunglineResult,
  palette: Palette,
  panel: LadderPanel,
  ranged: RangeQuantity,
): FigureDescription {
  const panels = Object.entries(PLACES[panel]) as [PanelName, Place][];
  const series = result.series;
  return {
    summary:
      series === null
        ? "No series was seen"
        : `Series plots of ${result.lines.length} lines, law fitted from n = ${series.fit_n[0]} to ${series.fit_n[1]}`,
    ...composePanels(
      panels.map(([name, place]) => ({ place, drawn: draw(name) })),
      {
        ...baseLayout(palette),
        hovermode: "closest",
        uirevision: `${result.source.sha256} ${panel} ${ranged}`,
      },
    ),
  };

  function draw(name: PanelName): Drawn {
    switch (name) {
      case "levels":
        return levels(result, palette);
      case "offsets":
        return offsets(result, palette);
      case "widths":
        return widths(result, palette);
      case "strengths":
        return strengths(result, palette);
      case "asymmetries":
        return asymmetries(result, palette);
      case "ranges":
        return ranges(result, palette, ranged);
    }
  }
}

/** n - delta_n with the total shift of the result: delta_0 + delta_2/(n - delta_0)^2. */
function effectiveN(n: number, result: RunglineResult): number {
  const first = result.series?.defect0.value ?? 0;
  const second = result.series?.defect2.value ?? 0;
  return n - first - second / (n - first) ** 2;
}

function levels(result: RunglineResult, palette: Palette): { data: Trace[]; x: Axis; y: Axis } {
  const x = (line: LineResult): number => effectiveN(line.n, result) ** -2;
  const gap = result.series?.gap_eV.value ?? null;
  const rydberg = result.series?.rydberg_eV.value ?? null;
  const data: Trace[] = [];
  const widest = Math.max(...result.lines.map(x), 0);
  if (gap !== null && rydberg !== null)
    data.push(guide("level law", [0, 1.04 * widest], [gap, gap - 1.04 * widest * rydberg], palette));
  data.push(points("levels", result.lines, x, (line) => line.energy_eV, 1, palette, "eV"));
  return {
    data,
    x: axis(palette, "1/(n − δ)²", { rangemode: "tozero" }),
    y: axis(palette, "Level energy / eV"),
  };
}

function offsets(result: RunglineResult, palette: Palette): { data: Trace[]; x: Axis; y: Axis } {
  const x = (line: LineResult): number => line.n;
  return {
    data: [points("levels", result.lines, x, (line) => line.law_offset_eV, 1e6, palette, "µeV")],
    x: axis(palette, "n", { dtick: result.lines.length > 14 ? 2 : 1, ...ends(result) }),
    y: axis(palette, "Level − law / µeV", {
      zeroline: true,
      zerolinecolor: palette.accent,
      zerolinewidth: 1.5,
      range: offsetRange(result),
    }),
  };
}

/** Levels outside the fitted range may lie far off and would press the others flat. */
function offsetRange(result: RunglineResult): [number, number] {
  let reach = 0;
  for (const { in_level_fit: fitted, law_offset_eV: offset } of result.lines)
    if (fitted && offset.value !== null)
      reach = Math.max(reach, Math.abs(offset.value) + 1.5 * (offset.sigma ?? 0));
  const limit = reach > 0 ? 1.3e6 * reach : 10;
  return [-limit, limit];
}

function widths(result: RunglineResult, palette: Palette): { data: Trace[]; x: Axis; y: Axis } {
  const law = result.width_law;
  const data: Trace[] = [];
  const n = range(result);
  const coefficient = law?.coefficient_eV.value ?? null;
  const first = result.lines.find((line) => line.width_eV.value !== null);
  if (first !== undefined && first.width_eV.value !== null) {
    const start = first.width_eV.value * first.n ** 3 * 1e6;
    data.push({
      ...guide(
        "n⁻³",
        n,
        n.map((one) => start * one ** -3),
        palette,
      ),
      line: dashed(palette),
    });
  }
  if (law !== null && coefficient !== null && law.exponent.value !== null && law.base !== "p-envelope") {
    const delta = law.base === "n-delta" ? (result.series?.defect0.value ?? 0) : 0;
    const exponent = law.exponent.value;
    const floor = law.floor_eV.value ?? 0;
    data.push(
      guide(
        "width law",
        n,
        n.map((one) => 1e6 * (floor + coefficient * (one - delta) ** -exponent)),
        palette,
      ),
    );
  }
  data.push(
    points(
      "levels",
      result.lines,
      (line) => line.n,
      (line) => line.width_eV,
      1e6,
      palette,
      "µeV",
    ),
  );
  return {
    data,
    x: logN(palette, result),
    y: axis(palette, "Width (FWHM) / µeV", logarithmic(shownValues(result, "width_eV", 1e6))),
  };
}

function strengths(result: RunglineResult, palette: Palette): { data: Trace[]; x: Axis; y: Axis } {
  const unit = result.reading.signal_unit === "1/cm" ? "meV/cm" : "meV";
  const law = result.strength_law;
  const data: Trace[] = [];
  const n = range(result);
  const coefficient = law?.coefficient.value ?? null;
  if (law !== null && coefficient !== null) {
    const delta = law.base === "n-delta" ? (result.series?.defect0.value ?? 0) : 0;
    const shape = (one: number): number =>
      law.law === "p-envelope"
        ? (one ** 2 - 1) / one ** 5
        : law.law === "sheet"
          ? (one - 0.5) ** -3
          : (one - delta) ** -3;
    data.push(
      guide(
        "strength law",
        n,
        n.map((one) => 1e3 * coefficient * shape(one)),
        palette,
      ),
    );
  }
  data.push(
    points(
      "levels",
      result.lines,
      (line) => line.n,
      (line) => line.area,
      1e3,
      palette,
      unit,
    ),
  );
  return {
    data,
    x: logN(palette, result),
    y: axis(
      palette,
      `Area / ${unit === "meV" ? unit : `(${unit})`}`,
      logarithmic(shownValues(result, "area", 1e3)),
    ),
  };
}

/** q of every line: worth a look where each has its own. */
function asymmetries(result: RunglineResult, palette: Palette): { data: Trace[]; x: Axis; y: Axis } {
  const data = points(
    "levels",
    result.lines,
    (line) => line.n,
    (line) => line.asymmetry,
    1,
    palette,
    "",
  );
  return {
    data: [data],
    x: axis(palette, "n", { dtick: result.lines.length > 14 ? 2 : 1, ...ends(result) }),
    y: axis(palette, "Asymmetry q", { zeroline: true, zerolinecolor: palette.muted }),
  };
}

const RANGED = {
  gap: { key: "gap_eV", title: "Gap − chosen / µeV", scale: 1e6 },
  rydberg: { key: "rydberg_eV", title: "Rydberg energy / meV", scale: 1e3 },
  defect: { key: "defect0", title: "Quantum defect", scale: 1 },
} as const;

function ranges(
  result: RunglineResult,
  palette: Palette,
  which: RangeQuantity,
): { data: Trace[]; x: Axis; y: Axis } {
  const { key, title, scale } = RANGED[which];
  const series = result.series;
  const steps = series?.ranges.filter((step) => step.n_max === series.fit_n[1]) ?? [];
  const chosen = series?.[key].value ?? 0;
  const origin = which === "gap" ? chosen : 0;
  const x: number[] = [];
  const y: number[] = [];
  const error: number[] = [];
  for (const step of steps) {
    const quantity = step[key];
    if (quantity.value === null) continue;
    x.push(step.n_min);
    y.push((quantity.value - origin) * scale);
    error.push((quantity.sigma ?? 0) * scale);
  }
  const data: Trace[] = [];
  if (x.length > 0)
    data.push(
      guide(
        "chosen",
        [x[0]! - 0.5, x[x.length - 1]! + 0.5],
        [(chosen - origin) * scale, (chosen - origin) * scale],
        palette,
      ),
    );
  const fitted = series?.fit_n[0];
  data.push({
    type: "scatter",
    name: "ranges",
    x,
    y,
    mode: "markers",
    marker: {
      size: 8,
      symbol: x.map((n) => (n === fitted ? "diamond" : "circle-open")),
      color: x.map((n) => (n === fitted ? palette.accent : palette.muted)),
      line: { width: 1.5, color: palette.muted },
    },
    error_y: { type: "data", array: error, thickness: 1, width: 0, color: palette.muted },
    hovertemplate: "n from %{x}<br>%{y:.5g}<extra></extra>",
    meta: { part: "ranges" },
  });
  return {
    data,
    x: axis(palette, "Lowest n in the fit", { dtick: x.length > 9 ? 2 : 1, tickangle: 0 }),
    y: axis(palette, title, { nticks: 5, ...rangedReach(x, y, error, fitted, (chosen - origin) * scale) }),
  };
}

/** Ranges that begin with lines off the law lie far away; those from the chosen one upward set the scale. */
function rangedReach(
  x: readonly number[],
  y: readonly number[],
  error: readonly number[],
  fitted: number | undefined,
  chosen: number,
): Axis {
  let reach = 0;
  x.forEach((n, i) => {
    if (fitted !== undefined && n >= fitted && n <= fitted + 4)
      reach = Math.max(reach, Math.abs(y[i]! - chosen) + 1.5 * error[i]!);
  });
  return reach > 0 ? { range: [chosen - 1.8 * reach, chosen + 1.8 * reach] } : {};
}

function points(
  part: string,
  lines: readonly LineResult[],
  x: (line: LineResult) => number,
  quantity: (line: LineResult) => Quantity,
  scale: number,
  palette: Palette,
  unit: string,
): Trace {
  const shown = lines.filter((line) => quantity(line).value !== null);
  return {
    type: "scatter",
    name: part,
    x: shown.map(x),
    y: shown.map((line) => quantity(line).value! * scale),
    mode: "markers",
    customdata: shown.map((line) => line.n),
    marker: {
      opacity: 1,
      size: shown.map(() => 8),
      symbol: shown.map((line) => (line.in_level_fit ? "circle" : "circle-open")),
      color: shown.map((line) => colourOfN(line.n, palette.mode)),
      line: { width: 1.5, color: shown.map((line) => colourOfN(line.n, palette.mode)) },
    },
    error_y: {
      type: "data",
      array: shown.map((line) => (quantity(line).sigma ?? 0) * scale),
      thickness: 1,
      width: 0,
      color: palette.muted,
    },
    hovertemplate: `n = %{customdata}<br>%{y:.6g} ${unit}<extra></extra>`,
    meta: { part },
  };
}

function guide(name: string, x: readonly number[], y: readonly number[], palette: Palette): Trace {
  return {
    type: "scatter",
    name,
    x,
    y,
    mode: "lines",
    line: { width: 1.5, color: palette.accent },
    hoverinfo: "skip",
    meta: { part: "law" },
  };
}

const dashed = (palette: Palette): object => ({ width: 1, color: palette.muted, dash: "dash" });

function range(result: RunglineResult): number[] {
  const first = result.lines[0]?.n ?? 1;
  const last = result.lines[result.lines.length - 1]?.n ?? 10;
  return Array.from({ length: 40 }, (_, i) => first * (last / first) ** (i / 39));
}

function ends(result: RunglineResult): Axis {
  const first = result.lines[0]?.n ?? 1;
  const last = result.lines[result.lines.length - 1]?.n ?? 10;
  return { range: [first - 0.7, last + 0.7] };
}

function logN(palette: Palette, result: RunglineResult): Axis {
  const first = result.lines[0]?.n ?? 1;
  const last = result.lines[result.lines.length - 1]?.n ?? 10;
  const ticks = [1, 2, 3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30, 40].filter((n) => n >= first && n <= last);
  return axis(palette, "n", {
    type: "log",
    tickvals: ticks,
    ticktext: ticks.map(String),
    range: [Math.log10(first * 0.9), Math.log10(last * 1.1)],
  });
}

function shownValues(result: RunglineResult, key: "width_eV" | "area", scale: number): number[] {
  return result.lines.flatMap((line) => (line[key].value === null ? [] : [line[key].value * scale]));
}
