/**
 * What      Colours of the window and of print: principal quantum number by one perceptually even scale from low to high
 *           log n, the same for every sample, on each ground by the stretch that stands out from it; power by lightness;
 *           batches by a set that colour-blind readers tell apart, each with a mark of its own.
 * Source    viridis: van der Walt and Smith, "A better default colormap for Matplotlib", SciPy 2015 (CC0), anchors of the
 *           published map; batches: Okabe and Ito, "Color Universal Design" (2008), lightened on a dark ground.
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
/** The ground that colours have to stand out from; print is light. */
export type Mode = "light" | "dark";

const STRETCH: Readonly<Record<Mode, readonly [number, number]>> = { light: [0.02, 0.56], dark: [0.34, 1] };
const LOWEST_N = 1.5;
const HIGHEST_N = 22;

export function colourOfN(n: number, mode: Mode): string {
  const share = Math.min(1, Math.max(0, Math.log(n / LOWEST_N) / Math.log(HIGHEST_N / LOWEST_N)));
  const [from, to] = STRETCH[mode];
  const at = (from + (to - from) * share) * (SCALE.length - 1);
  const i = Math.min(SCALE.length - 2, Math.floor(at));
  return hexOf(SCALE[i]!.map((low, k) => Math.round(low + (at - i) * (SCALE[i + 1]![k]! - low))));
}

export function paperColourOfN(n: number): string {
  return colourOfN(n, "light");
}

/** Levels of grey from the lowest power to the highest. */
const GREYS: Readonly<Record<Mode, readonly [number, number]>> = { light: [30, 150], dark: [235, 115] };

/** Power by lightness, without colour: colour belongs to n; the highest power wears the accent. */
export function colourOfPower(rank: number, count: number, mode: Mode, accent: string): string {
  const share = count < 2 ? 0 : rank / (count - 1);
  const [from, to] = GREYS[mode];
  const level = Math.round(from + (to - from) * share);
  return share === 1 ? accent : hexOf([level, level, level]);
}

function hexOf(channels: readonly number[]): string {
  return `#${channels.map((channel) => channel.toString(16).padStart(2, "0")).join("")}`;
}

export type Shape = "circle" | "square" | "triangle" | "diamond" | "down" | "cross" | "plus" | "star";

export interface BatchLook {
  readonly colour: string;
  readonly shape: Shape;
}
const BATCHES: readonly (Readonly<Record<Mode, string>> & { readonly shape: Shape })[] = [
  { light: "#0072b2", dark: "#2f9be0", shape: "circle" },
  { light: "#d55e00", dark: "#f07f2e", shape: "square" },
  { light: "#009e73", dark: "#21c598", shape: "triangle" },
  { light: "#cc79a7", dark: "#d98fb8", shape: "diamond" },
  { light: "#e69f00", dark: "#e69f00", shape: "down" },
  { light: "#56b4e9", dark: "#7cc6f0", shape: "cross" },
  { light: "#1c2126", dark: "#e8eaec", shape: "plus" },
  { light: "#9a8f00", dark: "#d6cb3c", shape: "star" },
];

/** From the ninth batch on colours and marks pair up anew. */
export function batchLook(i: number, mode: Mode = "light"): BatchLook {
  const round = Math.floor(i / BATCHES.length);
  return {
    colour: BATCHES[i % BATCHES.length]![mode],
    shape: BATCHES[(i + round) % BATCHES.length]!.shape,
  };
}

export const PAPER = "#ffffff";
export const INK = "#1c2126";
export const MUTED = "#5a636c";
export const GRID = "#e2e4e3";
export const DATA = "#8a939b";
export const ACCENT = "#b23a1e";
