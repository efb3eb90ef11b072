import { commentMarkOf, isCommentStart } from "./comment-mark.ts";
import { groupMarkOf, kindOfNoNumber, parseNumber, saysMissing } from "./number-text.ts";
import { filledLength, joinPairs } from "./row-shape.ts";
import type { RowShape } from "./row-shape.ts";
import { splitPlainBlock, splitRecords } from "./split-fields.ts";
import { lineText } from "./text-lines.ts";
import type { TextLines } from "./text-lines.ts";
import { readRecords } from "./text-records.ts";
import type { TextRecord } from "./text-records.ts";
import type { SkippedRow, SkipReason } from "./types.ts";

export interface RowsRead {
  readonly values: readonly Float64Array[];
  readonly rows: number;
  readonly rowLines: Int32Array;
  readonly skipped: readonly SkippedRow[];
  readonly thousands: string;
}

const BLOCK_LINES = 512;
/** An exponent, sign or decimal mark without what should follow, or a character cut in its middle. */
const CUT_NUMBER = /^[+-]?[.,]?$|[eEdD][+-]?$|\ufffd/;

/**
 * What      The rows of the table, block by block, so that only one block of cells is held as text at a time.
 * Shapes    values: one Float64Array (rows) a column; rowLines (rows).
 * Domain    A line is a row if it has the table's number of fields and at least one number; its other cells give NaN
 *           and an entry in `skipped`. A line that begins with words where numbers belong is no row. Blank lines
 *           after the last row are not listed. `free` is called for every comment and line of words, in order.
 */
export function readRows(
  lines: TextLines,
  firstRow: number,
  shape: RowShape,
  repeated: ReadonlySet<string>,
  free: (record: TextRecord) => void,
): RowsRead {
  const { columns, decimal, group, delimiter } = shape;
  const capacity = lines.count - firstRow;
  const values = Array.from({ length: columns }, () => new Float64Array(capacity));
  const rowLines = new Int32Array(capacity);
  const skipped: SkippedRow[] = [];
  const numbersIn = new Int32Array(columns);
  const wordColumn = (j: number): boolean => shape.wordColumns[j] === true;
  let axis = 0;
  while (axis < columns - 1 && wordColumn(axis)) axis++;
  let rows = 0;
  let thousands = "";
  const bad = new Int32Array(columns);
  // A column without numbers is listed once, so what is wrong with its cells waits until it has one.
  const silent: (SkippedRow[] | null)[] = Array.from({ length: columns }, () => []);

  const skip = (line: number, column: number | null, reason: SkipReason, found: string): void => {
    skipped.push({ line, column, reason, found: found.trim().slice(0, 80) });
  };

  const takeRow = (cells: readonly string[], line: number, text: () => string, unended: boolean): void => {
    let numbers = 0;
    let badCells = 0;
    let notFinite = 0;
    let words = 0;
    const n = Math.min(columns, cells.length);
    for (let j = 0; j < n; j++) {
      const value = parseNumber(cells[j]!, decimal, group);
      values[j]![rows] = value;
      if (value === value) {
        numbers++;
        continue;
      }
      bad[badCells++] = j;
    }
    if (numbers === 0) {
      for (const cell of cells) {
        const kind = kindOfNoNumber(cell);
        if (kind === "not-finite") notFinite++;
        else if (kind === "text") words++;
      }
      const found = text();
      if (words === 0) {
        if (unended && cells.length < columns && found.trim() !== "") skip(line, null, "truncated", found);
        else skip(line, null, notFinite > 0 ? "not-finite" : "blank", found);
      } else if (repeated.has(found.trim())) skip(line, null, "repeated-header", found);
      else if (unended && CUT_NUMBER.test(found.trim())) skip(line, null, "truncated", found);
      else {
        skip(line, null, "non-numeric", found);
        free({ line, text: found, mark: "" });
      }
      return;
    }
    if (cells.length < columns || (cells.length > columns && filledLength(cells) > columns)) {
      const found = text();
      if (repeated.has(found.trim())) skip(line, null, "repeated-header", found);
      else if (/^\s*\p{L}/u.test(found) && !wordColumn(0)) {
        skip(line, null, "non-numeric", found);
        free({ line, text: found, mark: "" });
      } else skip(line, null, unended && cells.length < columns ? "truncated" : "ragged", found);
      return;
    }
    if (badCells > 0) {
      if (repeated.has(text().trim())) {
        skip(line, null, "repeated-header", text());
        return;
      }
      const last = bad[badCells - 1]!;
      if (unended && last === columns - 1 && !wordColumn(last)) {
        const cell = cells[last]!.trim();
        const cut = cell === "" ? numbersIn[last]! > 0.5 * rows : CUT_NUMBER.test(cell);
        if (cut) {
          skip(line, null, "truncated", text());
          return;
        }
      }
      const head = cells[axis]!.trim();
      if (bad[0]! <= axis && values[axis]![rows] !== values[axis]![rows] && /^\p{L}/u.test(head)) {
        if (kindOfNoNumber(head) === "text" && !saysMissing(head)) {
          skip(line, null, "non-numeric", text());
          free({ line, text: text(), mark: "" });
          return;
        }
      }
      for (let k = 0; k < badCells; k++) {
        const j = bad[k]!;
        const kind = kindOfNoNumber(cells[j]!);
        const reason: SkipReason = kind === "text" ? "non-numeric" : kind;
        const waiting = silent[j]!;
        if (waiting === null) skip(line, j + 1, reason, cells[j]!);
        else if (waiting.length < 4096)
          waiting.push({ line, column: j + 1, reason, found: cells[j]!.trim().slice(0, 80) });
      }
    }
    for (let j = 0; j < columns; j++) {
      if (values[j]![rows] !== values[j]![rows]) continue;
      numbersIn[j] = numbersIn[j]! + 1;
      if (silent[j] !== null && !wordColumn(j)) {
        skipped.push(...silent[j]!);
        silent[j] = null;
      }
      if (thousands === "" && cells[j]!.length > 4) thousands = groupMarkOf(cells[j]!, group);
    }
    rowLines[rows++] = line;
  };

  const takeComment = (record: TextRecord): void => {
    const found = record.text;
    skip(record.line, null, repeated.has(found.trim()) ? "repeated-header" : "comment", found);
    if (!repeated.has(found.trim())) free(record);
  };

  let at = firstRow;
  while (at < lines.count) {
    const to = Math.min(lines.count, at + BLOCK_LINES);
    const block = lines.text.slice(lines.starts[at]!, lines.starts[to]! - 1);
    if (block.includes('"')) {
      const { records, next } = readRecords(lines, at, to);
      const cells = splitRecords(
        records.map((record) => (record.mark === "" ? record.text : "")),
        delimiter,
      );
      records.forEach((record, i) => {
        if (record.mark !== "") takeComment(record);
        else {
          const row = shape.paired && !record.text.includes('"') ? joinPairs(cells[i]!) : cells[i]!;
          const unended = !lines.endsWithNewline && next >= lines.count && i === records.length - 1;
          takeRow(row, record.line, () => record.text, unended);
        }
      });
      at = next;
      continue;
    }
    const cells = splitPlainBlock(block, delimiter);
    for (let i = at; i < to; i++) {
      const row = cells[i - at] ?? [""];
      const text = (): string => lineText(lines, i);
      if (startsComment(lines, i)) {
        const mark = commentMarkOf(text());
        if (mark !== "") {
          takeComment({ line: i + 1, text: text(), mark });
          continue;
        }
      }
      const unended = i === lines.count - 1 && !lines.endsWithNewline;
      takeRow(shape.paired ? joinPairs(row) : row, i + 1, text, unended);
    }
    at = to;
  }

  for (let j = 0; j < columns; j++) {
    const waiting = silent[j]!;
    if (waiting !== null && waiting.length > 0) skipped.push(waiting[0]!);
  }
  const lastLine = rows === 0 ? 0 : rowLines[rows - 1]!;
  const listed = skipped.filter(
    (entry) => entry.reason !== "blank" || entry.column !== null || entry.line < lastLine,
  );
  listed.sort((a, b) => a.line - b.line || (a.column ?? 0) - (b.column ?? 0));
  const cut = <T extends Float64Array | Int32Array>(array: T): T =>
    (rows === capacity ? array : array.slice(0, rows)) as T;
  return { values: values.map(cut), rows, rowLines: cut(rowLines), skipped: listed, thousands };
}

function startsComment(lines: TextLines, i: number): boolean {
  const { text, starts } = lines;
  const end = starts[i + 1]! - 1;
  let at = starts[i]!;
  while (at < end && text.charCodeAt(at) <= 32) at++;
  return at < end && isCommentStart(text.charCodeAt(at));
}
