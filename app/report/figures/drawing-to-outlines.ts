import { places, type Drawing, type Drawn } from "./drawing.ts";
import { drawingToSvg } from "./drawing-to-svg.ts";
import { outline, type Typefaces } from "./typefaces.ts";

/** A drawing as SVG whose texts are outlines: what it looks like depends on no machine's fonts. */
export function drawingToOutlines(drawing: Drawing, typefaces: Typefaces): string {
  return drawingToSvg(drawing, (text) => textAsPath(text, typefaces));
}

function textAsPath(text: Drawn & { kind: "text" }, typefaces: Typefaces): string {
  const { x, y, colour, turned } = text;
  const path = typefaces
    .set(text)
    .map((piece) => outline(piece, piece.along, piece.below))
    .join("");
  const turn = turned === true ? " rotate(-90)" : "";
  return `<path d="${path}" transform="translate(${places(x)} ${places(y)})${turn}" fill="${colour}"/>`;
}
