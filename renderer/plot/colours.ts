/**
 * What      Colour of principal quantum number n: one perceptually even scale from low n to high n, by log n, the
 *           same for every sample. Each mode uses the stretch of the scale that stands out from its ground.
 * Source    viridis: van der Walt and Smith, "A better default colormap for Matplotlib", SciPy 2015 (CC0); ten
 *           anchors of the published map, straight lines between them.
 */
const SCALE: readonly (readonly [number, number, number])[] = [
  [68, 1, 84],
  [72, 40, 120],
  [62, 74, 137],
  [49, 104, 142],
  [38, 130, 142],
  [31, 158, 137],
  [53, 183, 121],
  [109, 205, 89],
  [180, 222, 44],
  [253, 231, 37],
];

export type Mode = "light" | "dark";

const STRETCH: Readonly<Record<Mode, readonly [number, number]>> = { light: [0.02, 0.56], dark: [0.34, 1] };
const LOWEST_N = 1.5;
const HIGHEST_N = 22;

export function colourOfN(n: number, mode: Mode): string {
  const [from, to] = STRETCH[mode];
  const share = Math.log(n / LOWEST_N) / Math.log(HIGHEST_N / LOWEST_N);
  return scaleColour(from + (to - from) * Math.min(1, Math.max(0, share)));
}

export function scaleColour(share: number): string {
  const at = Math.min(1, Math.max(0, share)) * (SCALE.length - 1);
  const i = Math.min(SCALE.length - 2, Math.floor(at));
  const mix = SCALE[i]!.map((low, k) => Math.round(low + (at - i) * (SCALE[i + 1]![k]! - low)));
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
