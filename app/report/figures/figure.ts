import { escapeMarkup, richText, richToPlain } from "../rich-text.ts";
import type { AxisDescription } from "./axis.ts";
import { GRID, INK, MUTED, type Shape } from "./colours.ts";

export type Mark =
  | {
      readonly kind: "points";
      readonly x: readonly number[];
      readonly y: readonly (number | null)[];
      /** Ends of intervals; along x where `along` says so. */
      readonly low?: readonly (number | null)[];
      readonly high?: readonly (number | null)[];
      readonly along?: "x" | "y";
      /** A second, longer interval drawn thinner. */
      readonly outerLow?: readonly (number | null)[];
      readonly outerHigh?: readonly (number | null)[];
      readonly colour: string | readonly string[];
      readonly shape?: Shape;
      readonly hollow?: readonly boolean[];
      readonly size?: number;
    }
  | {
      readonly kind: "line";
      readonly x: ArrayLike<number>;
      readonly y: ArrayLike<number | null>;
      readonly colour: string;
      readonly width?: number;
      readonly dash?: string;
    }
  | {
      readonly kind: "band";
      readonly x: readonly number[];
      readonly low: readonly number[];
      readonly high: readonly number[];
      readonly colour: string;
      readonly opacity: number;
    }
  | {
      readonly kind: "rule";
      readonly x?: number;
      readonly y?: number;
      readonly colour: string;
      readonly dash?: string;
    }
  | {
      readonly kind: "label";
      readonly x: number;
      readonly y: number;
      readonly text: string;
      readonly colour: string;
      readonly anchor?: "start" | "middle" | "end";
      readonly lift?: number;
    };

export interface Panel {
  readonly x: AxisDescription;
  readonly y: AxisDescription;
  readonly marks: readonly Mark[];
  /** Share of the height. */
  readonly share: number;
  readonly grid?: "x" | "y";
}

export interface LegendEntry {
  readonly text: string;
  readonly colour: string;
  readonly shape?: Shape;
  readonly dash?: string;
}

/** A figure at the size of print: panels from top to bottom with one left margin. */
export interface Figure {
  /** For a file: letters, digits, hyphens. */
  readonly name: string;
  /** In the marks of rich-text.ts. */
  readonly caption: string;
  readonly width_mm: number;
  readonly height_mm: number;
  readonly panels: readonly Panel[];
  readonly legend: readonly LegendEntry[];
}

/** One column of a journal, and its full width. */
export const ONE_COLUMN_MM = 86;
export const FULL_WIDTH_MM = 178;

const POINTS_PER_MM = 72 / 25.4;
const SMALL = 7;
const TITLE = 8;
const TICK = 3;
/** Mean width of a character over the size of the type, rounded up: text cannot be measured here. */
const CHARACTER = 0.56;
const FONT = "'IBM Plex Sans','Helvetica Neue',Arial,'Liberation Sans','DejaVu Sans',sans-serif";

/**
 * What      A figure as a stand-alone SVG text: no script, no style sheet, no link; the same input gives the same text.
 * Units     width and height in mm, one unit of the picture is one point (1/72 inch).
 * Domain    Values that are null, not finite, or not positive on a logarithmic axis are left out.
 */
export function figureToSvg(figure: Figure, idPrefix = ""): string {
  const width = figure.width_mm * POINTS_PER_MM;
  const height = figure.height_mm * POINTS_PER_MM;
  const left =
    Math.max(
      ...figure.panels.map(({ y }) => longest(y) * SMALL * CHARACTER + (y.title === "" ? 0 : TITLE + 7)),
    ) +
    TICK +
    4;
  const right = 6;
  const legend = layLegend(figure.legend, width - left - right);
  const top = 5 + legend.rows * 11;
  const below = figure.panels.map(
    ({ x }) => (x.ticks.some(({ label }) => label !== "") ? 12 : 5) + (x.title === "" ? 0 : 11),
  );
  const free = height - top - below.reduce((a, b) => a + b, 0) - 4 * (figure.panels.length - 1) - 2;
  const shares = figure.panels.reduce((sum, { share }) => sum + share, 0);
  const parts: string[] = [];
  let y = top;
  figure.panels.forEach((panel, i) => {
    const tall = (free * panel.share) / shares;
    const id = `${idPrefix}${figure.name}-${i}`.replace(/[^A-Za-z0-9-]/g, "-");
    parts.push(drawPanel(panel, { left, top: y, right: width - right, bottom: y + tall }, id));
    y += tall + below[i]! + 4;
  });
  parts.push(...legend.draw(left, 9));
  const size = `width="${figure.width_mm}mm" height="${figure.height_mm}mm" viewBox="0 0 ${num(width)} ${num(height)}"`;
  return (
    `<svg xmlns="http://www.w3.org/2000/svg" ${size} role="img" aria-label="${escapeMarkup(richToPlain(figure.caption))}" ` +
    `font-family="${FONT}" font-size="${SMALL}" fill="${INK}">` +
    `<rect width="100%" height="100%" fill="#fff"/>${parts.join("")}</svg>`
  );
}

/** By its beginning a file is known as a figure that may be replaced. */
export const FIGURE_SVG_MARK = '<?xml version="1.0" encoding="UTF-8"?>\n<!-- Rungline -->\n<svg ';

/** A figure alone as the text of a file. */
export function figureFile(figure: Figure): string {
  return `<?xml version="1.0" encoding="UTF-8"?>\n<!-- Rungline -->\n${figureToSvg(figure)}\n`;
}

interface Box {
  readonly left: number;
  readonly top: number;
  readonly right: number;
  readonly bottom: number;
}

function drawPanel(panel: Panel, box: Box, id: string): string {
  const x = scale(panel.x, box.left, box.right);
  const y = scale(panel.y, box.bottom, box.top);
  const out: string[] = [
    `<clipPath id="${id}"><rect x="${num(box.left)}" y="${num(box.top - 1)}" width="${num(box.right - box.left)}" height="${num(box.bottom - box.top + 2)}"/></clipPath>`,
  ];
  if (panel.grid === "x")
    for (const { at, label } of panel.x.ticks)
      if (label !== "") out.push(stroke(`M${num(x(at)!)} ${num(box.top)}V${num(box.bottom)}`, GRID, 0.5));
  if (panel.grid === "y")
    for (const { at, label } of panel.y.ticks)
      if (label !== "") out.push(stroke(`M${num(box.left)} ${num(y(at)!)}H${num(box.right)}`, GRID, 0.5));
  out.push(`<g clip-path="url(#${id})">`);
  const texts: string[] = [];
  for (const mark of panel.marks) {
    if (mark.kind === "label") {
      const [px, py] = [x(mark.x), y(mark.y)];
      if (px !== null && py !== null && px >= box.left - 1 && px <= box.right + 1)
        texts.push(
          text(
            mark.text,
            px,
            Math.max(box.top + 5, py - (mark.lift ?? 0)),
            SMALL - 0.5,
            mark.anchor ?? "middle",
            mark.colour,
          ),
        );
    } else out.push(drawMark(mark, x, y, box));
  }
  out.push("</g>", ...texts);
  const path = [`M${num(box.left)} ${num(box.top)}V${num(box.bottom)}H${num(box.right)}`];
  for (const { at, label } of panel.x.ticks) {
    const px = x(at);
    if (px === null || px < box.left - 0.1 || px > box.right + 0.1) continue;
    path.push(`M${num(px)} ${num(box.bottom)}v${label === "" ? TICK * 0.6 : TICK}`);
    if (label !== "") out.push(text(label, px, box.bottom + TICK + SMALL, SMALL, "middle", INK));
  }
  for (const { at, label } of panel.y.ticks) {
    const py = y(at);
    if (py === null || py < box.top - 0.1 || py > box.bottom + 0.1) continue;
    path.push(`M${num(box.left)} ${num(py)}h${-(label === "" ? TICK * 0.6 : TICK)}`);
    if (label !== "") out.push(text(label, box.left - TICK - 2, py + SMALL * 0.35, SMALL, "end", INK));
  }
  out.push(stroke(path.join(""), INK, 0.6));
  const middle = (box.left + box.right) / 2;
  if (panel.x.title !== "")
    out.push(text(panel.x.title, middle, box.bottom + TICK + SMALL + 10, TITLE, "middle", INK));
  if (panel.y.title !== "")
    out.push(
      text(
        panel.y.title,
        0,
        0,
        TITLE,
        "middle",
        INK,
        `translate(${num(TITLE + 1)} ${num((box.top + box.bottom) / 2)}) rotate(-90)`,
      ),
    );
  return out.join("");
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

function drawMark(mark: Exclude<Mark, { kind: "label" }>, x: Place, y: Place, box: Box): string {
  switch (mark.kind) {
    case "rule": {
      const at = mark.x === undefined ? y(mark.y!) : x(mark.x);
      if (at === null) return "";
      const path =
        mark.x === undefined
          ? `M${num(box.left)} ${num(at)}H${num(box.right)}`
          : `M${num(at)} ${num(box.top)}V${num(box.bottom)}`;
      return stroke(path, mark.colour, 0.6, mark.dash);
    }
    case "line": {
      const path = linePath(mark.x, mark.y, x, y);
      return path === "" ? "" : stroke(path, mark.colour, mark.width ?? 0.9, mark.dash);
    }
    case "band": {
      const upper = mark.x.map((one, i) => [x(one), y(mark.high[i]!)] as const);
      const lower = mark.x.map((one, i) => [x(one), y(mark.low[i]!)] as const).reverse();
      const points = [...upper, ...lower].filter(
        (p): p is [number, number] => p[0] !== null && p[1] !== null,
      );
      if (points.length < 3) return "";
      const path = points.map(([px, py], i) => `${i === 0 ? "M" : "L"}${num(px)} ${num(py)}`).join("");
      return `<path d="${path}Z" fill="${mark.colour}" fill-opacity="${mark.opacity}"/>`;
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

function drawPoints(mark: Mark & { kind: "points" }, x: Place, y: Place): string {
  const { along = "y", shape = "circle", size = 2.1 } = mark;
  return mark.x
    .map((one, i) => {
      const [px, py] = [x(one), y(mark.y[i] ?? null)];
      if (px === null || py === null) return "";
      const colour = typeof mark.colour === "string" ? mark.colour : mark.colour[i]!;
      const whisker = (
        low: number | null | undefined,
        high: number | null | undefined,
        wide: number,
      ): string => {
        if (low === null || high === null || low === undefined || high === undefined) return "";
        const place = along === "y" ? y : x;
        // On a logarithmic axis an interval may reach below zero: it then runs out of the picture.
        const [from, to] = [place(low) ?? (along === "y" ? 1e4 : -1e4), place(high)];
        if (to === null) return "";
        return stroke(
          along === "y" ? `M${num(px)} ${num(from)}V${num(to)}` : `M${num(from)} ${num(py)}H${num(to)}`,
          colour,
          wide,
        );
      };
      return (
        whisker(mark.outerLow?.[i], mark.outerHigh?.[i], 0.5) +
        whisker(mark.low?.[i], mark.high?.[i], mark.outerLow === undefined ? 0.7 : 1.5) +
        drawShape(shape, px, py, size, colour, mark.hollow?.[i] ?? false)
      );
    })
    .join("");
}

function drawShape(shape: Shape, x: number, y: number, r: number, colour: string, hollow: boolean): string {
  const paint = `fill="${hollow ? "#fff" : colour}" stroke="${colour}" stroke-width="0.8"`;
  const p = (dx: number, dy: number): string => `${num(x + dx * r)} ${num(y + dy * r)}`;
  switch (shape) {
    case "circle":
      return `<circle cx="${num(x)}" cy="${num(y)}" r="${num(r)}" ${paint}/>`;
    case "square":
      return `<path d="M${p(-0.9, -0.9)}L${p(0.9, -0.9)}L${p(0.9, 0.9)}L${p(-0.9, 0.9)}Z" ${paint}/>`;
    case "triangle":
      return `<path d="M${p(0, -1.2)}L${p(1.1, 0.8)}L${p(-1.1, 0.8)}Z" ${paint}/>`;
    case "down":
      return `<path d="M${p(0, 1.2)}L${p(1.1, -0.8)}L${p(-1.1, -0.8)}Z" ${paint}/>`;
    case "diamond":
      return `<path d="M${p(0, -1.3)}L${p(1.1, 0)}L${p(0, 1.3)}L${p(-1.1, 0)}Z" ${paint}/>`;
    case "cross":
      return stroke(`M${p(-1, -1)}L${p(1, 1)}M${p(1, -1)}L${p(-1, 1)}`, colour, 1.1);
    case "plus":
      return stroke(`M${p(-1.2, 0)}L${p(1.2, 0)}M${p(0, -1.2)}L${p(0, 1.2)}`, colour, 1.1);
    case "bar":
      return stroke(`M${p(-1.2, 0)}L${p(1.2, 0)}`, colour, 1.8);
  }
}

function stroke(path: string, colour: string, width: number, dash?: string): string {
  const dashes = dash === undefined ? "" : ` stroke-dasharray="${dash}"`;
  return `<path d="${path}" fill="none" stroke="${colour}" stroke-width="${width}" stroke-linejoin="round"${dashes}/>`;
}

const ANCHORS = { start: "", middle: ' text-anchor="middle"', end: ' text-anchor="end"' } as const;

function text(
  marked: string,
  x: number,
  y: number,
  size: number,
  anchor: "start" | "middle" | "end",
  colour: string,
  transform?: string,
): string {
  let shift = 0;
  const runs = richText(marked).map(({ text: words, style }) => {
    const wanted = style === "sub" ? 0.22 * size : style === "sup" ? -0.36 * size : 0;
    const dy = wanted === shift ? "" : ` dy="${num(wanted - shift)}"`;
    shift = wanted;
    const look =
      style === "italic"
        ? ' font-style="italic"'
        : style === "plain"
          ? ""
          : ` font-size="${num(0.75 * size)}"`;
    return dy === "" && look === ""
      ? escapeMarkup(words)
      : `<tspan${dy}${look}>${escapeMarkup(words)}</tspan>`;
  });
  const place = transform === undefined ? `x="${num(x)}" y="${num(y)}"` : `transform="${transform}"`;
  const fill = colour === INK ? "" : ` fill="${colour}"`;
  return `<text ${place}${ANCHORS[anchor]}${size === SMALL ? "" : ` font-size="${num(size)}"`}${fill} xml:space="preserve">${runs.join("")}</text>`;
}

function layLegend(
  entries: readonly LegendEntry[],
  width: number,
): { readonly rows: number; draw(left: number, top: number): string[] } {
  const places: { entry: LegendEntry; x: number; row: number }[] = [];
  let x = 0;
  let row = 0;
  for (const entry of entries) {
    const wide = 18 + richToPlain(entry.text).length * SMALL * CHARACTER;
    if (x > 0 && x + wide > width) {
      x = 0;
      row++;
    }
    places.push({ entry, x, row });
    x += wide + 6;
  }
  return {
    rows: entries.length === 0 ? 0 : row + 1,
    draw: (left, top) =>
      places.map(({ entry, x: at, row: line }) => {
        const [px, py] = [left + at, top + line * 11];
        const key =
          entry.shape !== undefined
            ? drawShape(entry.shape, px + 6, py - 2.5, 2.1, entry.colour, false)
            : stroke(`M${num(px)} ${num(py - 2.5)}h12`, entry.colour, 1, entry.dash);
        return key + text(entry.text, px + 15, py, SMALL, "start", MUTED);
      }),
  };
}

function longest(axis: AxisDescription): number {
  return axis.ticks.reduce((most, { label }) => Math.max(most, Array.from(richToPlain(label)).length), 0);
}

/** Two decimals are a fortieth of a millimetre. */
function num(value: number): string {
  return String(Number(value.toFixed(2)));
}
