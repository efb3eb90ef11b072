import type { Figure } from "./figure.ts";

/** Narrower, the numbers of an axis no longer find room; wider, no page holds it. */
export const NARROWEST_MM = 60;
export const WIDEST_MM = 260;

/**
 * What      A figure at another width: type and lines keep their size in print, the height follows less than the width does,
 *           so that a narrow figure does not become flat and a wide one not tall. Rows of names keep their height.
 * Units     mm; the height is rounded to whole ones.
 */
export function resizeFigure(figure: Figure, width_mm: number): Figure {
  const ratio = width_mm / figure.width_mm;
  const named = figure.panels.some(({ y }) => y.title === "");
  const height_mm = named
    ? figure.height_mm
    : Math.round(figure.height_mm * ratio ** (ratio > 1 ? 0.5 : 0.25));
  return { ...figure, width_mm, height_mm };
}
