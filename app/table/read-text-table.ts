import { decodeText } from "./decode-text.ts";
import { splitRecords } from "./split-fields.ts";
import type { Delimiter } from "./types.ts";

/** A small table of words with one header line; every cell as written, trimmed. */
export interface TextTable {
  readonly header: readonly string[];
  readonly rows: readonly (readonly string[])[];
}

const DELIMITERS: readonly Delimiter[] = ["\t", ";", ","];

/** Typed by hand or saved by a spreadsheet: the delimiter is the first of tab, semicolon, comma in the header line. */
export function readTextTable(bytes: Uint8Array): TextTable {
  const lines = decodeText(bytes)
    .text.replace(/^\uFEFF/, "")
    .split(/\r\n|\r|\n/)
    .filter((line) => line.trim() !== "" && !/^\s*#/.test(line));
  const first = lines[0] ?? "";
  const delimiter = DELIMITERS.find((one) => first.includes(one)) ?? ",";
  const [header = [], ...rows] = splitRecords(lines, delimiter).map((row) => row.map((cell) => cell.trim()));
  return { header, rows };
}
