import Papa from "papaparse";
import type { Delimiter } from "./types.ts";

/** Runs of spaces and tabs outside quotes become one space. */
function collapseSpaces(text: string): string {
  if (!text.includes('"')) return text.replace(/[ \t]+/g, " ");
  return text.replace(/"[^"]*"|[ \t]+/g, (part) => (part.startsWith('"') ? part : " "));
}

/** With spaces between fields, what stands before the first and after the last is no field. */
function dropOuterBlanks(row: string[]): string[] {
  if (row.length > 1 && row[0] === "") row.shift();
  if (row.length > 1 && row[row.length - 1] === "") row.pop();
  return row;
}

/** Fields of a block of lines without quotes, joined by line feeds: one row a line. */
export function splitPlainBlock(block: string, delimiter: Delimiter): string[][] {
  const spaces = delimiter === " ";
  const text = spaces ? collapseSpaces(block) : block;
  const rows = Papa.parse(text, { delimiter, newline: "\n", fastMode: true }).data;
  if (spaces) for (const row of rows) dropOuterBlanks(row);
  return rows;
}

/** Without the blanks that stand between a separator and the quotes of a field; what stands in quotes is left alone. */
function withoutPadding(text: string): string {
  return text.replace(
    /(^|[,;\t]) *("(?:[^"]|"")*") *(?=[,;\t]|$)/g,
    (_, before: string, field: string) => before + field,
  );
}

/** Quotes that never close are plain characters: they stay in their cell, which then is no number, and swallow nothing. */
export function splitOne(record: string, delimiter: Delimiter): string[] {
  const spaces = delimiter === " ";
  let text = spaces ? collapseSpaces(record.trim()) : record;
  const quotes = text.split('"').length - 1;
  // A quote may follow padding: `1.5, "2.5"`.
  if (quotes > 0 && quotes % 2 === 0 && !spaces) text = withoutPadding(text);
  const rows = Papa.parse(text, {
    delimiter,
    newline: "\n",
    fastMode: quotes === 0 || quotes % 2 === 1,
  }).data;
  const row = rows.length === 1 ? rows[0]! : rows.flat();
  return spaces ? dropOuterBlanks(row) : row;
}

/** Fields of records, one row a record, whatever their quotes do. */
export function splitRecords(records: readonly string[], delimiter: Delimiter): string[][] {
  if (records.length === 0) return [];
  const block = records.join("\n");
  if (!block.includes('"')) {
    const rows = splitPlainBlock(block, delimiter);
    // The splitter drops a last row that is empty.
    while (rows.length < records.length) rows.push([""]);
    return rows;
  }
  if (delimiter !== " " && !/[,;\t] +"|" +[,;\t\n]/.test(block)) {
    const parsed = Papa.parse(block, { delimiter, newline: "\n" });
    const sound = parsed.errors.every((e) => e.type !== "Quotes") && parsed.data.length === records.length;
    if (sound) return parsed.data;
  }
  return records.map((record) => splitOne(record, delimiter));
}
