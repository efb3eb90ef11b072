import { type Mode } from "../../app/report/index.ts";

export { colourOfN, type Mode } from "../../app/report/index.ts";

/** The colours of a figure; the style sheet holds the same for the rest of the window. */
export interface Palette {
  readonly mode: Mode;
  readonly ground: string;
  readonly ink: string;
  readonly muted: string;
  readonly grid: string;
  readonly data: string;
  readonly accent: string;
  readonly band: string;
  /** One standard deviation around a signal. */
  readonly noise: string;
  readonly tail: string;
}

export const PALETTES: Readonly<Record<Mode, Palette>> = {
  light: {
    mode: "light",
    ground: "#ffffff",
    ink: "#1c2126",
    muted: "#5a636c",
    grid: "#e4e6e4",
    data: "#7d868e",
    accent: "#b23a1e",
    band: "rgba(90,99,108,0.10)",
    noise: "rgba(178,58,30,0.30)",
    tail: "rgba(178,58,30,0.13)",
  },
  dark: {
    mode: "dark",
    ground: "#15191d",
    ink: "#e8eaec",
    muted: "#a3acb5",
    grid: "#2b3238",
    data: "#8f9aa4",
    accent: "#ff8a6b",
    band: "rgba(163,172,181,0.13)",
    noise: "rgba(255,138,107,0.36)",
    tail: "rgba(255,138,107,0.16)",
  },
};
