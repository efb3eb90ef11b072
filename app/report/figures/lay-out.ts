import { richToPlain } from "../rich-text.ts";
import type { AxisDescription, Tick } from "./axis.ts";
import { GRID, INK, MUTED, PAPER } from "./colours.ts";
import { places, type Box, type Drawing, type Drawn } from "./drawing.ts";
import type { Figure, LegendEntry, Mark, Panel } from "./figure.ts";

const POINTS_PER_MM = 72 / 25.4;
const SMALL = 7;
const TITLE = 8;
const TICK = 3;
/** Width of a character over the size of the type, rounded up for any typeface without serifs: text is not measured here. */
const CAPITAL = 0.68;
const DIGIT = 0.6;
const STOP = 0.29;
const OTHER = 0.56;

/**
 * What      A figure at the size of print as paths, signs and texts at their places: the same input gives the same drawing.
 * Units     width and height in mm, places in points (1/72 inch).
 * Domain    Values that are null, not finite, or not positive on a logarithmic axis are left out. Numbers of an axis and
 *           labels that would run into each other at this size are thinned.
 */
export function layOut(figure: Figure, idPrefix = ""): Drawing {
  const width = figure.width_mm * POINTS_PER_MM;
  const height = figure.height_mm * POINTS_PER_MM;
  const left =
    Math.max(...figure.panels.map(({ y }) => widest(y) + (y.title === "" ? 0 : TITLE + 7))) + TICK + 4;
  const right = 6;
  const legend = layLegend(figure.legend, width - left - right);
  const top = 5 + legend.rows * 11;
  const below = figure.panels.map(
    ({ x }) => (x.ticks.some(({ label }) => label !== "") ? 12 : 5) + (x.title === "" ? 0 : 11),
  );
  const free = height - top - below.reduce((a, b) => a + b, 0) - 4 * (figure.panels.length - 1) - 2;
  const shares = figure.panels.reduce((sum, { share }) => sum + share, 0);
  const drawn: Drawn[] = [
    {
      kind: "path",
      path: `M0 0H${places(width)}V${places(height)}H0Z`,
      fill: { colour: PAPER },
    },
  ];
  let y = top;
  figure.panels.forEach((panel, i) => {
    const tall = (free * panel.share) / shares;
    const id = `${idPrefix}${figure.name}-${i}`.replace(/[^A-Za-z0-9-]/g, "-");
    drawn.push(...drawPanel(panel, { left, top: y, right: width - right, bottom: y + tall }, id));
    y += tall + below[i]! + 4;
  });
  drawn.push(...legend.draw(left, 9));
  return {
    title: richToPlain(figure.caption),
    width_mm: figure.width_mm,
    height_mm: figure.height_mm,
    width,
    height,
    drawn,
  };
}

function drawPanel(panel: Panel, box: Box, id: string): Drawn[] {
  const x = scale(panel.x, box.left, box.right);
  const y = scale(panel.y, box.bottom, box.top);
  const out: Drawn[] = [];
  const ticks = roomyTicks(panel.x, (at) => x(at) ?? NaN);
  if (panel.grid === "x")
    for (const { at, label } of ticks)
      if (label !== "")
        out.push(stroke(`M${places(x(at)!)} ${places(box.top)}V${places(box.bottom)}`, GRID, 0.5));
  if (panel.grid === "y")
    for (const { at, label } of panel.y.ticks)
      if (label !== "")
        out.push(stroke(`M${places(box.left)} ${places(y(at)!)}H${places(box.right)}`, GRID, 0.5));
  const within: Drawn[] = [];
  const texts: (Drawn & { kind: "text" })[] = [];
  for (const mark of panel.marks) {
    if (mark.kind !== "label") {
      within.push(...drawMark(mark, x, y, box));
      continue;
    }
    const [px, py] = [x(mark.x), y(mark.y)];
    if (px === null || py === null || px < box.left - 1 || px > box.right + 1) continue;
    const label = text(
      mark.text,
      px,
      Math.max(box.top + 5, py - (mark.lift ?? 0)),
      SMALL - 0.5,
      mark.anchor ?? "middle",
      mark.colour,
    );
    if (!texts.some((other) => runInto(label, other))) texts.push(label);
  }
  // A point of room above and below for what stands on an edge.
  out.push({ kind: "clip", id, box: { ...box, top: box.top - 1, bottom: box.bottom + 1 }, within }, ...texts);
  const path = [`M${places(box.left)} ${places(box.top)}V${places(box.bottom)}H${places(box.right)}`];
  for (const { at, label } of ticks) {
    const px = x(at);
    if (px === null || px < box.left - 0.1 || px > box.right + 0.1) continue;
    path.push(`M${places(px)} ${places(box.bottom)}v${label === "" ? TICK * 0.6 : TICK}`);
    if (label !== "") out.push(text(label, px, box.bottom + TICK + SMALL, SMALL, "middle", INK));
  }
  for (const { at, label } of panel.y.ticks) {
    const py = y(at);
    if (py === null || py < box.top - 0.1 || py > box.bottom + 0.1) continue;
    path.push(`M${places(box.left)} ${places(py)}h${-(label === "" ? TICK * 0.6 : TICK)}`);
    if (label !== "") out.push(text(label, box.left - TICK - 2, py + SMALL * 0.35, SMALL, "end", INK));
  }
  out.push(stroke(path.join(""), INK, 0.6));
  const middle = (box.left + box.right) / 2;
  if (panel.x.title !== "")
    out.push(text(panel.x.title, middle, box.bottom + TICK + SMALL + 10, TITLE, "middle", INK));
  if (panel.y.title !== "")
    out.push({
      ...text(panel.y.title, TITLE + 1, (box.top + box.bottom) / 2, TITLE, "middle", INK),
      turned: true,
    });
  return out;
}

/** Numbers that would run into each other: every second, third ... stays, the roundest first; the ticks all stay. */
function roomyTicks(axis: AxisDescription, place: (at: number) => number): readonly Tick[] {
  const numbered = axis.ticks.filter(({ label }) => label !== "");
  const fits = (some: readonly Tick[]): boolean =>
    some.every(
      (tick, i) =>
        i === 0 ||
        Math.abs(place(tick.at) - place(some[i - 1]!.at)) >=
          (wide(tick.label, SMALL) + wide(some[i - 1]!.label, SMALL)) / 2 + 2,
    );
  if (fits(numbered)) return axis.ticks;
  const pure = numbered.filter(({ at }) => Number.isInteger(Math.round(Math.log10(at) * 1e9) / 1e9));
  const among = axis.scale === "logarithmic" && pure.length > 1 ? pure : numbered;
  for (let every = among === pure ? 1 : 2; every < among.length; every++) {
    const choices = Array.from({ length: every }, (_, from) => among.filter((_, i) => i % every === from));
    const fitting = choices.filter(fits).sort((a, b) => digits(a) - digits(b) || b.length - a.length);
    const kept = fitting[0];
    if (kept !== undefined)
      return axis.ticks.map((tick) => (kept.includes(tick) ? tick : { ...tick, label: "" }));
  }
  return axis.ticks.map((tick) => (tick === numbered[0] ? tick : { ...tick, label: "" }));
}

/** Digits that the labels need, trailing zeros not counted. */
function digits(ticks: readonly Tick[]): number {
  return ticks.reduce((sum, { label }) => sum + label.replace(/(\.\d*?)0+$/, "$1").length, 0) / ticks.length;
}

function wide(marked: string, size: number): number {
  return Array.from(richToPlain(marked)).reduce(
    (sum, one) =>
      sum +
      size * (/\p{Lu}/u.test(one) ? CAPITAL : /\d/.test(one) ? DIGIT : /[.,:;\s]/.test(one) ? STOP : OTHER),
    0,
  );
}

function runInto(one: Drawn & { kind: "text" }, other: Drawn & { kind: "text" }): boolean {
  if (Math.abs(one.y - other.y) >= 0.8 * one.size) return false;
  const span = ({ marked, x, size, anchor }: Drawn & { kind: "text" }): readonly [number, number] => {
    const width = wide(marked, size);
    const from = anchor === "start" ? x : anchor === "end" ? x - width : x - width / 2;
    return [from, from + width];
  };
  const [[from, to], [low, high]] = [span(one), span(other)];
  return from < high && low < to;
}

type Place = (value: number | null) => number | null;

function scale(axis: AxisDescription, from: number, to: number): Place {
  const forward = axis.scale === "linear" ? (value: number) => value : Math.log;
  const [low, high] = [forward(axis.low), forward(axis.high)];
  return (value) => {
    if (value === null || !Number.isFinite(value) || (axis.scale === "logarithmic" && value <= 0))
      return null;
    // Far outside values would make numbers that some readers cannot draw.
    return from + (to - from) * Math.min(20, Math.max(-20, (forward(value) - low) / (high - low)));
  };
}

function drawMark(mark: Exclude<Mark, { kind: "label" }>, x: Place, y: Place, box: Box): Drawn[] {
  switch (mark.kind) {
    case "rule": {
      const at = mark.x === undefined ? y(mark.y!) : x(mark.x);
      if (at === null) return [];
      const path =
        mark.x === undefined
          ? `M${places(box.left)} ${places(at)}H${places(box.right)}`
          : `M${places(at)} ${places(box.top)}V${places(box.bottom)}`;
      return [stroke(path, mark.colour, 0.6, mark.dash)];
    }
    case "line": {
      const path = linePath(mark.x, mark.y, x, y);
      return path === "" ? [] : [stroke(path, mark.colour, mark.width ?? 0.9, mark.dash)];
    }
    case "band": {
      const upper = mark.x.map((one, i) => [x(one), y(mark.high[i]!)] as const);
      const lower = mark.x.map((one, i) => [x(one), y(mark.low[i]!)] as const).reverse();
      const points = [...upper, ...lower].filter(
        (p): p is [number, number] => p[0] !== null && p[1] !== null,
      );
      if (points.length < 3) return [];
      const path = points.map(([px, py], i) => `${i === 0 ? "M" : "L"}${places(px)} ${places(py)}`).join("");
      return [{ kind: "path", path: `${path}Z`, fill: { colour: mark.colour, opacity: mark.opacity } }];
    }
    case "points":
      return drawPoints(mark, x, y);
  }
}

/** How far, in tenths of a point, a curve may be from the path that stands for it: less than a print can show. */
const FLAT = 0.6;

/**
 * A curve as steps in tenths of a point (a thirtieth of a millimetre), without points that lie on the straight way between
 * their neighbours: a smooth curve of a thousand points becomes a path of a few dozen.
 */
function linePath(xs: ArrayLike<number>, ys: ArrayLike<number | null>, x: Place, y: Place): string {
  const out: string[] = [];
  let run: [number, number][] = [];
  const end = (): void => {
    if (run.length > 1) out.push(runPath(run));
    run = [];
  };
  for (let i = 0; i < xs.length; i++) {
    const [px, py] = [x(xs[i]!), y(ys[i] ?? null)];
    if (px === null || py === null) end();
    else run.push([10 * px, 10 * py]);
  }
  end();
  return out.join("");
}

function runPath(points: readonly (readonly [number, number])[]): string {
  let [atX, atY] = points[0]!.map(Math.round) as [number, number];
  let path = `M${atX / 10} ${atY / 10}l`;
  let from = 0;
  while (from < points.length - 1) {
    let to = from + 1;
    // As far as a straight way serves, but not so far that looking back becomes slow.
    while (to + 1 < points.length && to - from < 60 && isStraight(points, from, to + 1)) to++;
    const [toX, toY] = points[to]!.map(Math.round) as [number, number];
    path += step(toX - atX) + step(toY - atY);
    [atX, atY] = [toX, toY];
    from = to;
  }
  return path;
}

function step(tenths: number): string {
  const text = String(tenths / 10).replace(/^(-?)0\./, "$1.");
  return text.startsWith("-") ? text : ` ${text}`;
}

function isStraight(points: readonly (readonly [number, number])[], from: number, to: number): boolean {
  const [x0, y0] = points[from]!;
  const [x1, y1] = points[to]!;
  const length = Math.hypot(x1 - x0, y1 - y0);
  for (let i = from + 1; i < to; i++) {
    const [px, py] = points[i]!;
    const away =
      length === 0
        ? Math.hypot(px - x0, py - y0)
        : Math.abs((x1 - x0) * (py - y0) - (y1 - y0) * (px - x0)) / length;
    if (away > FLAT) return false;
  }
  return true;
}

function drawPoints(mark: Mark & { kind: "points" }, x: Place, y: Place): Drawn[] {
  const { along = "y", shape = "circle", size = 2.1 } = mark;
  return mark.x.flatMap((one, i): Drawn[] => {
    const [px, py] = [x(one), y(mark.y[i] ?? null)];
    if (px === null || py === null) return [];
    const colour = typeof mark.colour === "string" ? mark.colour : mark.colour[i]!;
    const whisker = (
      low: number | null | undefined,
      high: number | null | undefined,
      wide: number,
    ): Drawn[] => {
      if (low === null || high === null || low === undefined || high === undefined) return [];
      const place = along === "y" ? y : x;
      // On a logarithmic axis an interval may reach below zero: it then runs out of the picture.
      const [from, to] = [place(low) ?? (along === "y" ? 1e4 : -1e4), place(high)];
      if (to === null) return [];
      return [
        stroke(
          along === "y"
            ? `M${places(px)} ${places(from)}V${places(to)}`
            : `M${places(from)} ${places(py)}H${places(to)}`,
          colour,
          wide,
        ),
      ];
    };
    return [
      ...whisker(mark.outerLow?.[i], mark.outerHigh?.[i], 0.5),
      ...whisker(mark.low?.[i], mark.high?.[i], mark.outerLow === undefined ? 0.7 : 1.5),
      { kind: "sign", shape, x: px, y: py, radius: size, colour, hollow: mark.hollow?.[i] ?? false },
    ];
  });
}

function stroke(path: string, colour: string, width: number, dash?: string): Drawn {
  return { kind: "path", path, stroke: { colour, width, ...(dash !== undefined && { dash }) } };
}

function text(
  marked: string,
  x: number,
  y: number,
  size: number,
  anchor: "start" | "middle" | "end",
  colour: string,
): Drawn & { kind: "text" } {
  return { kind: "text", marked, x, y, size, anchor, colour };
}

function layLegend(
  entries: readonly LegendEntry[],
  width: number,
): { readonly rows: number; draw(left: number, top: number): Drawn[] } {
  const spots: { entry: LegendEntry; x: number; row: number }[] = [];
  let x = 0;
  let row = 0;
  for (const entry of entries) {
    const needs = 18 + wide(entry.text, SMALL);
    if (x > 0 && x + needs > width) {
      x = 0;
      row++;
    }
    spots.push({ entry, x, row });
    x += needs + 6;
  }
  return {
    rows: entries.length === 0 ? 0 : row + 1,
    draw: (left, top) =>
      spots.flatMap(({ entry, x: at, row: line }): Drawn[] => {
        const [px, py] = [left + at, top + line * 11];
        const { colour, shape } = entry;
        return [
          shape !== undefined
            ? { kind: "sign", shape, x: px + 6, y: py - 2.5, radius: 2.1, colour, hollow: false }
            : stroke(`M${places(px)} ${places(py - 2.5)}h12`, colour, 1, entry.dash),
          text(entry.text, px + 15, py, SMALL, "start", MUTED),
        ];
      }),
  };
}

function widest(axis: AxisDescription): number {
  return axis.ticks.reduce((most, { label }) => Math.max(most, wide(label, SMALL)), 0);
}
