import type { Figure } from "./figure.ts";
import { drawingToSvg } from "./drawing-to-svg.ts";
import { layOut } from "./lay-out.ts";

/** By its beginning a file is known as a figure that may be replaced. */
export const FIGURE_SVG_MARK = '<?xml version="1.0" encoding="UTF-8"?>\n<!-- Rungline -->\n<svg ';

/** A figure as an SVG element; its ids begin with the prefix, so that several fit into one document. */
export function figureToSvg(figure: Figure, idPrefix = ""): string {
  return drawingToSvg(layOut(figure, idPrefix));
}

/** A figure alone as the text of a file. */
export function figureFile(figure: Figure): string {
  return `<?xml version="1.0" encoding="UTF-8"?>\n<!-- Rungline -->\n${figureToSvg(figure)}\n`;
}
