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
    // Powers of ten would be set with inline styles, which the content policy refuses.
    exponentformat: "e",
    separatethousands: false,
    ...more,
  };
}

export function signalTitle(unit: "1/cm" | "1"): string {
  return unit === "1/cm" ? "Absorption coefficient / cm⁻¹" : "Optical depth";
}

const SUPERSCRIPT = "⁰¹²³⁴⁵⁶⁷⁸⁹";

/** A logarithmic axis with marks at 1 and, over few decades, 2 and 5; powers beyond a thousand as 10ⁿ. */
export function logarithmic(values: readonly number[]): Axis {
  const positive = values.filter((value) => value > 0 && Number.isFinite(value));
  if (positive.length === 0) return { type: "log" };
  const low = Math.log10(Math.min(...positive)) - 0.15;
  const high = Math.log10(Math.max(...positive)) + 0.15;
  const steps = high - low < 1.6 ? [1, 2, 5] : [1];
  const tickvals: number[] = [];
  const ticktext: string[] = [];
  for (let power = Math.floor(low); power <= Math.ceil(high); power++)
    for (const step of steps) {
      tickvals.push(step * 10 ** power);
      ticktext.push(logLabel(step, power));
    }
  return { type: "log", tickvals, ticktext, range: [low, high], showgrid: true };
}

function logLabel(step: number, power: number): string {
  if (power >= -2 && power <= 3) return String(Number((step * 10 ** power).toPrecision(3)));
  const digits = Array.from(String(power), (c) => (c === "-" ? "⁻" : SUPERSCRIPT[Number(c)]!)).join("");
  return `${step === 1 ? "" : `${step}·`}10${digits}`;
}
