import { doubt, type Note } from "../base/index.ts";
import type { Table } from "../table/index.ts";

/** Above this part of all rows, or with this many lines in a row, what was not read is no slip any more. */
const LARGE_PART = 0.05;
const LONG_BLOCK = 10;
/** A line that begins like a row of numbers. */
const LIKE_ROW = /^["'\s]*[+\-\u2212]?[.,]?\d/;

/** A doubt where many lines that look like rows gave none: a change of the decimal mark, another number of fields. */
export function skippedRows(table: Table): readonly Note[] {
  const skipped = table.skipped.filter(
    ({ column, reason, found }) =>
      column === null &&
      (reason === "non-numeric" || reason === "ragged" || reason === "truncated") &&
      LIKE_ROW.test(found),
  );
  if (skipped.length === 0) return [];
  let block = 1;
  let longest = 1;
  for (let i = 1; i < skipped.length; i++) {
    block = skipped[i]!.line === skipped[i - 1]!.line + 1 ? block + 1 : 1;
    longest = Math.max(longest, block);
  }
  const all = table.rows + skipped.length;
  if (skipped.length <= LARGE_PART * all && longest < LONG_BLOCK) return [];
  const first = skipped[0]!;
  const cells =
    first.reason === "ragged"
      ? "the number of cells of the other rows"
      : "numbers written like those of the other rows";
  return [
    doubt(
      "rows-not-read",
      "source",
      `${skipped.length} of ${all} lines that look like rows ${skipped.length === 1 ? "was" : "were"} not read${longest > 1 ? ` (${longest} of them together)` : ""}, for want of ${cells}; the first is line ${first.line}: "${first.found.replaceAll("\t", " ")}"`,
      "write all rows with the same decimal mark, delimiter and number of cells; rungline inspect lists what was left out",
    ),
  ];
}
