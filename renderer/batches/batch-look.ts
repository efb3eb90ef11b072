import type { Mode } from "../plot/colours.ts";

/**
 * What      Colour and mark of each batch, told apart with any kind of colour sight and without colour; the same order of
 *           colours and marks as in the report.
 * Source    Okabe and Ito, "Color Universal Design" (2008); its black is white on a dark ground.
 */
const COLOURS: readonly { readonly light: string; readonly dark: string }[] = [
  { light: "#0072b2", dark: "#2f9be0" },
  { light: "#d55e00", dark: "#f07f2e" },
  { light: "#009e73", dark: "#21c598" },
  { light: "#cc79a7", dark: "#d98fb8" },
  { light: "#e69f00", dark: "#e69f00" },
  { light: "#56b4e9", dark: "#7cc6f0" },
  { light: "#1c2126", dark: "#e8eaec" },
  { light: "#9a8f00", dark: "#d6cb3c" },
];

export type BatchMark =
  "circle" | "square" | "triangle-up" | "diamond" | "triangle-down" | "x" | "cross" | "star";
const MARKS: readonly BatchMark[] = [
  "circle",
  "square",
  "triangle-up",
  "diamond",
  "triangle-down",
  "x",
  "cross",
  "star",
];

export interface BatchLook {
  readonly colour: string;
  readonly mark: BatchMark;
}

/** From the ninth batch on colours and marks pair up anew. */
export function batchLook(i: number, mode: Mode): BatchLook {
  const round = Math.floor(i / COLOURS.length);
  return { colour: COLOURS[i % COLOURS.length]![mode], mark: MARKS[(i + round) % MARKS.length]! };
}

/** The mark in a box of twelve, for keys and tables. */
export const MARK_PATHS: Readonly<Record<BatchMark, string>> = {
  circle: "M6 1.5a4.5 4.5 0 1 0 0 9a4.5 4.5 0 1 0 0 -9z",
  square: "M2 2h8v8h-8z",
  "triangle-up": "M6 1L11 10.5H1z",
  diamond: "M6 0.5L11 6L6 11.5L1 6z",
  "triangle-down": "M6 11L1 1.5H11z",
  x: "M1 3L3 1L6 4L9 1L11 3L8 6L11 9L9 11L6 8L3 11L1 9L4 6z",
  cross: "M4.4 1h3.2v3.4H11v3.2H7.6V11H4.4V7.6H1V4.4h3.4z",
  star: "M6 0.5l1.5 3.7 4 .3-3 2.6.9 3.9L6 8.9 2.6 11l.9-3.9-3-2.6 4-.3z",
};
