/**
 * What      Colour of principal quantum number n: one perceptually even scale from low n to high n, by log n, the
 *           same for every sample. Each mode uses the stretch of the scale that stands out from its ground.
 * Source    cividis: Nuñez, Anderton and Renslow, PLoS ONE 13, e0199239 (2018); eleven anchors of the published map.
 */
const CIVIDIS: readonly (readonly [number, number, number])[] = [
  [0, 34, 78],
  [18, 53, 112],
  [59, 73, 108],
  [87, 93, 109],
  [112, 113, 115],
  [138, 134, 120],
  [165, 156, 116],
  [195, 179, 105],
  [225, 204, 85],
  [243, 218, 68],
  [254, 232, 56],
];

export type Mode = "light" | "dark";

const STRETCH: Readonly<Record<Mode, readonly [number, number]>> = { light: [0, 0.56], dark: [0.36, 1] };
const HIGHEST_N = 30;

export function colourOfN(n: number, mode: Mode): string {
  const [from, to] = STRETCH[mode];
  const share = Math.min(1, Math.max(0, Math.log(n) / Math.log(HIGHEST_N)));
  return cividis(from + (to - from) * share);
}

export function cividis(share: number): string {
  const at = Math.min(1, Math.max(0, share)) * (CIVIDIS.length - 1);
  const i = Math.min(CIVIDIS.length - 2, Math.floor(at));
  const mix = CIVIDIS[i]!.map((low, k) => Math.round(low + (at - i) * (CIVIDIS[i + 1]![k]! - low)));
  return `#${mix.map((channel) => channel.toString(16).padStart(2, "0")).join("")}`;
}

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
    tail: "rgba(255,138,107,0.16)",
  },
};
