import { batchLook as lookOf, type Shape } from "../../app/report/index.ts";
import type { Mode } from "../plot/colours.ts";

/** Marks as the plot library names them. */
export type BatchMark =
  "circle" | "square" | "triangle-up" | "diamond" | "triangle-down" | "x" | "cross" | "star";

const MARKS: Readonly<Record<Shape, BatchMark>> = {
  circle: "circle",
  square: "square",
  triangle: "triangle-up",
  diamond: "diamond",
  down: "triangle-down",
  cross: "x",
  plus: "cross",
  star: "star",
};

export interface BatchLook {
  readonly colour: string;
  readonly mark: BatchMark;
}

/** Colour and mark of each batch, those of the report. */
export function batchLook(i: number, mode: Mode): BatchLook {
  const { colour, shape } = lookOf(i, mode);
  return { colour, mark: MARKS[shape] };
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
