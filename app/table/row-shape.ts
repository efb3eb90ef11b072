import { kindOfNoNumber, parseNumber, saysMissing } from "./number-text.ts";
import type { DecimalMark, Delimiter } from "./types.ts";

/** How a line of this table is cut into cells, and what its cells may be. */
export interface RowShape {
  readonly delimiter: Delimiter;
  readonly decimal: DecimalMark;
  /** Comma or point between groups of three digits, "" where the table has none. */
  readonly group: string;
  /** Unquoted fields are joined in pairs by a decimal comma. */
  readonly paired: boolean;
  /** Fields of an ordinary line, empty ones at its end included. */
  readonly fields: number;
  /** Fields that hold something. */
  readonly columns: number;
  /** Columns of words (times, labels): they do not speak against a line being a row. */
  readonly wordColumns: readonly boolean[];
}

/** Fields up to the last that holds something. */
export function filledLength(cells: readonly string[]): number {
  let n = cells.length;
  while (n > 0 && cells[n - 1]!.trim() === "") n--;
  return n;
}

export function joinPairs(cells: readonly string[]): string[] {
  const pairs: string[] = [];
  for (let i = 0; i + 1 < cells.length; i += 2) pairs.push(`${cells[i]!.trim()},${cells[i + 1]!.trim()}`);
  if (cells.length % 2 === 1) pairs.push(cells[cells.length - 1]!);
  return pairs;
}

/** The line has the table's number of fields, at least one number, and words only in columns of words. */
export function isRow(cells: readonly string[], shape: RowShape): boolean {
  if (cells.length < shape.columns || filledLength(cells) > shape.columns) return false;
  let numbers = 0;
  for (let j = 0; j < shape.columns; j++) {
    const cell = cells[j]!;
    if (Number.isFinite(parseNumber(cell, shape.decimal, shape.group))) numbers++;
    else if (shape.wordColumns[j] !== true && kindOfNoNumber(cell) === "text" && !saysMissing(cell))
      return false;
  }
  return numbers > 0;
}

/**
 * Of a line that is no row: `like` where it has the right number of fields and begins with a number, so that only
 * other cells are bad; `ragged` where it begins with a number but has another number of fields; else `no`.
 */
export function rowLikeness(cells: readonly string[], shape: RowShape): "like" | "ragged" | "no" {
  let axis = 0;
  while (axis < shape.columns - 1 && shape.wordColumns[axis] === true) axis++;
  if (!Number.isFinite(parseNumber(cells[axis] ?? "", shape.decimal, shape.group))) return "no";
  if (cells.length >= shape.columns && filledLength(cells) <= shape.columns) return "like";
  return cells.length > 1 ? "ragged" : "no";
}
