import type { Shape } from "./colours.ts";

/** Something drawn; lengths in points from the upper left corner, y downwards. */
export type Drawn =
  | {
      readonly kind: "path";
      /** Path data of SVG: M, L, H, V, l, h, v, Z. */
      readonly path: string;
      readonly stroke?: { readonly colour: string; readonly width: number; readonly dash?: string };
      readonly fill?: { readonly colour: string; readonly opacity?: number };
    }
  | {
      readonly kind: "sign";
      readonly shape: Shape;
      readonly x: number;
      readonly y: number;
      readonly radius: number;
      readonly colour: string;
      readonly hollow: boolean;
    }
  | {
      readonly kind: "text";
      /** In the marks of rich-text.ts. */
      readonly marked: string;
      readonly x: number;
      readonly y: number;
      readonly size: number;
      readonly anchor: "start" | "middle" | "end";
      readonly colour: string;
      /** Read from below to above, around its own place. */
      readonly turned?: boolean;
    }
  | {
      readonly kind: "clip";
      readonly id: string;
      readonly box: Box;
      readonly within: readonly Drawn[];
    };

export interface Box {
  readonly left: number;
  readonly top: number;
  readonly right: number;
  readonly bottom: number;
}

/** A figure laid out: what SVG, PDF and PNG are all made from, so that they are one picture. */
export interface Drawing {
  /** In words, for readers of the screen and the facts of a file. */
  readonly title: string;
  readonly width_mm: number;
  readonly height_mm: number;
  /** In points. */
  readonly width: number;
  readonly height: number;
  readonly drawn: readonly Drawn[];
}

/** One size below: text in sub- and superscripts over the text around. */
export const SCRIPT_SIZE = 0.75;

/** How far, over the size of the text, a script stands below or above the line; downwards is positive. */
export function scriptShift(style: "plain" | "italic" | "sub" | "sup"): number {
  return style === "sub" ? 0.22 : style === "sup" ? -0.36 : 0;
}

/** Points at 1.3 and 0.52 of the size in turn, clockwise from the top. */
const STAR = [
  [0, -1.3],
  [0.31, -0.42],
  [1.24, -0.4],
  [0.49, 0.16],
  [0.76, 1.05],
  [0, 0.52],
  [-0.76, 1.05],
  [-0.49, 0.16],
  [-1.24, -0.4],
  [-0.31, -0.42],
] as const;

/** The outline of a sign as path data, and whether it is an area or strokes of a width. */
export function signPath(
  shape: Shape,
  x: number,
  y: number,
  r: number,
): { readonly path: string; readonly strokes: number | null } {
  const p = (dx: number, dy: number): string => `${places(x + dx * r)} ${places(y + dy * r)}`;
  switch (shape) {
    case "circle":
      return {
        path: `M${p(-1, 0)}A${places(r)} ${places(r)} 0 1 0 ${p(1, 0)}A${places(r)} ${places(r)} 0 1 0 ${p(-1, 0)}Z`,
        strokes: null,
      };
    case "square":
      return { path: `M${p(-0.9, -0.9)}L${p(0.9, -0.9)}L${p(0.9, 0.9)}L${p(-0.9, 0.9)}Z`, strokes: null };
    case "triangle":
      return { path: `M${p(0, -1.2)}L${p(1.1, 0.8)}L${p(-1.1, 0.8)}Z`, strokes: null };
    case "down":
      return { path: `M${p(0, 1.2)}L${p(1.1, -0.8)}L${p(-1.1, -0.8)}Z`, strokes: null };
    case "diamond":
      return { path: `M${p(0, -1.3)}L${p(1.1, 0)}L${p(0, 1.3)}L${p(-1.1, 0)}Z`, strokes: null };
    case "cross":
      return { path: `M${p(-1, -1)}L${p(1, 1)}M${p(1, -1)}L${p(-1, 1)}`, strokes: 1.1 };
    case "plus":
      return { path: `M${p(-1.2, 0)}L${p(1.2, 0)}M${p(0, -1.2)}L${p(0, 1.2)}`, strokes: 1.1 };
    case "star":
      return { path: `M${STAR.map(([dx, dy]) => p(dx, dy)).join("L")}Z`, strokes: null };
  }
}

/** Two decimals of a point are a three-hundredth of a millimetre. */
export function places(value: number): string {
  return String(Number(value.toFixed(2)));
}
