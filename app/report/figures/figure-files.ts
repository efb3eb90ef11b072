import type { Figure } from "./figure.ts";
import type { FontFiles } from "./typefaces.ts";

export const FIGURE_KINDS = ["svg", "pdf", "png"] as const;
export type FigureKind = (typeof FIGURE_KINDS)[number];

/** Stands within the first thousand bytes of a PDF of ours. */
export const FIGURE_PDF_MARK = "/Producer (Rungline)";
/** Stands within the first thousand bytes of a PNG of ours. */
export const FIGURE_PNG_MARK = "Software\0Rungline";

/** What a shell lends for drawing: files of typefaces, and what turns vector graphics into dots. */
export interface DrawingTools {
  readonly fonts: FontFiles;
  /** An SVG without texts, so many dots wide, as PNG. */
  readonly rasterise: (svg: string, width: number) => Promise<Uint8Array>;
}

export interface FigureChoices {
  /** In mm, from NARROWEST_MM to WIDEST_MM; null for each figure's own. */
  readonly width_mm: number | null;
  /** Dots an inch of PNG. */
  readonly dpi: number;
}

export const FIGURE_DPI = [300, 600] as const;
export const OWN_SIZE: FigureChoices = { width_mm: null, dpi: 600 };

/** Makes files of figures, one after the other; the same figure and choices give the same bytes. */
export interface FigurePress {
  make(figure: Figure, kind: FigureKind, choices: FigureChoices): Promise<Uint8Array>;
  /** Characters of PDF and PNG figures that no typeface has, met since this was asked last; U+FFFD stands for them. */
  takeMissing(): readonly string[];
}

/** Loaded when the first figure is asked for: what writes PDF and opens typefaces is larger than all the rest. */
export async function makeFigurePress(tools: DrawingTools): Promise<FigurePress> {
  const { figurePress } = await import("./figure-press.ts");
  return figurePress(tools);
}
