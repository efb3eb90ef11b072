import { drawingToOutlines } from "./drawing-to-outlines.ts";
import { drawingToPdf } from "./drawing-to-pdf.ts";
import type { DrawingTools, FigureChoices, FigureKind, FigurePress } from "./figure-files.ts";
import type { Figure } from "./figure.ts";
import { figureFile } from "./figure-to-svg.ts";
import { layOut } from "./lay-out.ts";
import { markPng } from "./mark-png.ts";
import { resizeFigure } from "./resize-figure.ts";
import { Typefaces } from "./typefaces.ts";

const MM_PER_INCH = 25.4;

/** The press itself, with the packages that it needs. */
export function figurePress({ fonts, rasterise }: DrawingTools): FigurePress {
  const typefaces = new Typefaces(fonts);
  return {
    takeMissing: () => typefaces.takeMissing(),
    async make(figure: Figure, kind: FigureKind, { width_mm, dpi }: FigureChoices): Promise<Uint8Array> {
      const sized = width_mm === null ? figure : resizeFigure(figure, width_mm);
      if (kind === "svg") return new TextEncoder().encode(figureFile(sized));
      const drawing = layOut(sized);
      if (kind === "pdf") return drawingToPdf(drawing, typefaces);
      const dots = Math.round((sized.width_mm / MM_PER_INCH) * dpi);
      return markPng(await rasterise(drawingToOutlines(drawing, typefaces), dots), dpi);
    },
  };
}
