import type { LineResult } from "../protocol/index.ts";

type Quantity = LineResult["energy_eV"];

/** One cell: words, or a number with its error in the unit of its column or in one of its own. */
export type Cell =
  | { readonly kind: "text"; readonly text: string }
  | {
      readonly kind: "quantity";
      readonly quantity: Quantity;
      /** Null: the unit stands in the head of the column. */
      readonly unit: string | null;
      /** Behind the number, for a footnote. */
      readonly mark: string;
    }
  | { readonly kind: "number"; readonly value: number | null; readonly digits: number };

export interface DataColumn {
  /** Quantity, in the marks of rich-text.ts. */
  readonly head: string;
  /** "" where the column has none or each cell its own. */
  readonly unit: string;
  /** Numbers in one unit are lined up at the decimal mark. */
  readonly kind: "text" | "numbers";
}

/** A table as in a paper, the same for HTML and LaTeX. */
export interface DataTable {
  /** For a file and a label: letters, digits, hyphens. */
  readonly name: string;
  readonly title: string;
  readonly columns: readonly DataColumn[];
  readonly rows: readonly (readonly Cell[])[];
  readonly remarks: readonly string[];
}

export function words(text: string): Cell {
  return { kind: "text", text };
}

export function count(value: number | null, digits = 6): Cell {
  return { kind: "number", value, digits };
}

/** In the unit of the column, or in `unit` where one is given; `factor` turns the quantity into that unit. */
export function measured(quantity: Quantity, factor = 1, unit: string | null = null, mark = ""): Cell {
  const times = (value: number | null): number | null => (value === null ? null : value * factor);
  return {
    kind: "quantity",
    quantity: {
      value: times(quantity.value),
      sigma: times(quantity.sigma),
      low: times(quantity.low),
      high: times(quantity.high),
    },
    unit,
    mark,
  };
}

export function textColumn(head: string): DataColumn {
  return { head, unit: "", kind: "text" };
}

export function numberColumn(head: string, unit = ""): DataColumn {
  return { head, unit, kind: "numbers" };
}
