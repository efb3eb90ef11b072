import { escapeMarkup, richText } from "../rich-text.ts";
import { INK } from "./colours.ts";
import { places, SCRIPT_SIZE, scriptShift, signPath, type Drawing, type Drawn } from "./drawing.ts";

const FONT = "'IBM Plex Sans','Helvetica Neue',Arial,'Liberation Sans','DejaVu Sans',sans-serif";
/** The size that most texts have and need not name. */
const COMMON_SIZE = 7;

/** A drawing as a stand-alone SVG text: no script, no style sheet, no link; its texts stay texts. */
export function drawingToSvg(
  drawing: Drawing,
  writeText: (text: Drawn & { kind: "text" }) => string = text,
): string {
  const { width_mm, height_mm, width, height } = drawing;
  const size = `width="${places(width_mm)}mm" height="${places(height_mm)}mm" viewBox="0 0 ${places(width)} ${places(height)}"`;
  return (
    `<svg xmlns="http://www.w3.org/2000/svg" ${size} role="img" aria-label="${escapeMarkup(drawing.title)}" ` +
    `font-family="${FONT}" font-size="${COMMON_SIZE}" fill="${INK}">${all(drawing.drawn, writeText)}</svg>`
  );
}

function all(drawn: readonly Drawn[], writeText: (text: Drawn & { kind: "text" }) => string): string {
  return drawn
    .map((one) => {
      switch (one.kind) {
        case "path": {
          const { path, stroke, fill } = one;
          const opacity = fill?.opacity === undefined ? "" : ` fill-opacity="${fill.opacity}"`;
          const filled = fill === undefined ? ' fill="none"' : ` fill="${fill.colour}"${opacity}`;
          const dashes = stroke?.dash === undefined ? "" : ` stroke-dasharray="${stroke.dash}"`;
          const stroked =
            stroke === undefined
              ? ""
              : ` stroke="${stroke.colour}" stroke-width="${stroke.width}" stroke-linejoin="round"${dashes}`;
          return `<path d="${path}"${filled}${stroked}/>`;
        }
        case "sign":
          return sign(one);
        case "text":
          return writeText(one);
        case "clip": {
          const { left, top, right, bottom } = one.box;
          const box = `x="${places(left)}" y="${places(top)}" width="${places(right - left)}" height="${places(bottom - top)}"`;
          return `<clipPath id="${one.id}"><rect ${box}/></clipPath><g clip-path="url(#${one.id})">${all(one.within, writeText)}</g>`;
        }
      }
    })
    .join("");
}

function sign({ shape, x, y, radius, colour, hollow }: Drawn & { kind: "sign" }): string {
  const paint = `fill="${hollow ? "#fff" : colour}" stroke="${colour}" stroke-width="0.8"`;
  if (shape === "circle")
    return `<circle cx="${places(x)}" cy="${places(y)}" r="${places(radius)}" ${paint}/>`;
  const { path, strokes } = signPath(shape, x, y, radius);
  return strokes === null
    ? `<path d="${path}" ${paint}/>`
    : `<path d="${path}" fill="none" stroke="${colour}" stroke-width="${strokes}" stroke-linejoin="round"/>`;
}

const ANCHORS = { start: "", middle: ' text-anchor="middle"', end: ' text-anchor="end"' } as const;

function text({ marked, x, y, size, anchor, colour, turned }: Drawn & { kind: "text" }): string {
  let shift = 0;
  const runs = richText(marked).map(({ text: words, style }) => {
    const wanted = scriptShift(style) * size;
    const dy = wanted === shift ? "" : ` dy="${places(wanted - shift)}"`;
    shift = wanted;
    const look =
      style === "italic"
        ? ' font-style="italic"'
        : style === "plain"
          ? ""
          : ` font-size="${places(SCRIPT_SIZE * size)}"`;
    return dy === "" && look === ""
      ? escapeMarkup(words)
      : `<tspan${dy}${look}>${escapeMarkup(words)}</tspan>`;
  });
  const place =
    turned === true
      ? `transform="translate(${places(x)} ${places(y)}) rotate(-90)"`
      : `x="${places(x)}" y="${places(y)}"`;
  const fill = colour === INK ? "" : ` fill="${colour}"`;
  const sized = size === COMMON_SIZE ? "" : ` font-size="${places(size)}"`;
  return `<text ${place}${ANCHORS[anchor]}${sized}${fill} xml:space="preserve">${runs.join("")}</text>`;
}
