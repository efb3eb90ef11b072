import type { Palette } from "./colours.ts";
import type { Axis, FigureLayout } from "./figure-description.ts";

const TEXT_FACE = "'IBM Plex Sans', 'DejaVu Sans', sans-serif";

/** What all figures share: ticks outside, no boxes, no title, nothing of the library's own. */
export function baseLayout(palette: Palette): FigureLayout {
  return {
    autosize: true,
    paper_bgcolor: palette.ground,
    plot_bgcolor: palette.ground,
    font: { family: TEXT_FACE, size: 12, color: palette.ink },
    margin: { l: 68, r: 16, t: 14, b: 46, pad: 0 },
    showlegend: false,
    dragmode: "zoom",
    hoverlabel: {
      bgcolor: palette.ground,
      bordercolor: palette.muted,
      font: { family: TEXT_FACE, size: 12, color: palette.ink },
    },
    // Zoom and pan survive a redraw as long as the file is the same.
    uirevision: "same",
  };
}

/** Quantity / unit (ISO 80000-1); `more` overrides. */
export function axis(palette: Palette, title: string, more: Axis = {}): Axis {
  return {
    title: { text: title, standoff: 8, font: { size: 12, color: palette.ink } },
    ticks: "outside",
    ticklen: 5,
    tickcolor: palette.muted,
    tickfont: { size: 11, color: palette.muted },
    linecolor: palette.muted,
    linewidth: 1,
    showline: true,
    mirror: false,
    zeroline: false,
    showgrid: false,
    gridcolor: palette.grid,
    automargin: false,
    exponentformat: "power",
    separatethousands: false,
    ...more,
  };
}

export function signalTitle(unit: "1/cm" | "1"): string {
  return unit === "1/cm" ? "Absorption coefficient / cm⁻¹" : "Optical depth";
}
