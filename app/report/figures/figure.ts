import type { AxisDescription } from "./axis.ts";
import type { Shape } from "./colours.ts";

export type Mark =
  | {
      readonly kind: "points";
      readonly x: readonly number[];
      readonly y: readonly (number | null)[];
      /** Ends of intervals; along x where `along` says so. */
      readonly low?: readonly (number | null)[];
      readonly high?: readonly (number | null)[];
      readonly along?: "x" | "y";
      /** A second, longer interval drawn thinner. */
      readonly outerLow?: readonly (number | null)[];
      readonly outerHigh?: readonly (number | null)[];
      readonly colour: string | readonly string[];
      readonly shape?: Shape;
      readonly hollow?: readonly boolean[];
      readonly size?: number;
    }
  | {
      readonly kind: "line";
      readonly x: ArrayLike<number>;
      readonly y: ArrayLike<number | null>;
      readonly colour: string;
      readonly width?: number;
      readonly dash?: string;
    }
  | {
      readonly kind: "band";
      readonly x: readonly number[];
      readonly low: readonly number[];
      readonly high: readonly number[];
      readonly colour: string;
      readonly opacity: number;
    }
  | {
      readonly kind: "rule";
      readonly x?: number;
      readonly y?: number;
      readonly colour: string;
      readonly dash?: string;
    }
  | {
      readonly kind: "label";
      readonly x: number;
      readonly y: number;
      readonly text: string;
      readonly colour: string;
      readonly anchor?: "start" | "middle" | "end";
      readonly lift?: number;
    };

export interface Panel {
  readonly x: AxisDescription;
  readonly y: AxisDescription;
  readonly marks: readonly Mark[];
  /** Share of the height. */
  readonly share: number;
  readonly grid?: "x" | "y";
}

export interface LegendEntry {
  readonly text: string;
  readonly colour: string;
  readonly shape?: Shape;
  readonly dash?: string;
}

/** A figure at the size of print: panels from top to bottom with one left margin. */
export interface Figure {
  /** For a file: letters, digits, hyphens. */
  readonly name: string;
  /** In the marks of rich-text.ts. */
  readonly caption: string;
  readonly width_mm: number;
  readonly height_mm: number;
  readonly panels: readonly Panel[];
  readonly legend: readonly LegendEntry[];
}

/** One column of a journal, and its full width. */
export const ONE_COLUMN_MM = 85;
export const FULL_WIDTH_MM = 178;
