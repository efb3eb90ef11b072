import { readdirSync, readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { readTable, wordTableIssue } from "../../../app/table/index.ts";

const FOLDER = new URL("../../../fixtures/broken/", import.meta.url);
const bytesOf = (name: string): Uint8Array => new Uint8Array(readFileSync(new URL(name, FOLDER)));

type Skip = readonly [line: number, column: number | null, reason: string];

/** rows read, entries skipped, and what else the file must show. */
interface Read {
  readonly rows: number;
  readonly skipped?: readonly Skip[];
  readonly last?: readonly number[];
  readonly dialect?: Readonly<Record<string, unknown>>;
  readonly header?: readonly string[];
}

const UP_TO_2_21 = [2.21, 0.45];

// Derived: the files hold twelve points, 2.10 to 2.21 eV; what is left out is the defect that names the file.
const READ: Readonly<Record<string, Read>> = {
  "blank-cell.csv": { rows: 12, skipped: [[5, 2, "blank"]], last: UP_TO_2_21 },
  "blank-lines-inside.csv": {
    rows: 12,
    skipped: [
      [5, null, "blank"],
      [6, null, "blank"],
    ],
    last: UP_TO_2_21,
  },
  "comment-inside.csv": { rows: 12, skipped: [[8, null, "comment"]], last: UP_TO_2_21 },
  "cut-number-last-line.csv": { rows: 12, last: [2.21, 0] },
  "decimal-comma-in-comma-file.csv": {
    rows: 12,
    dialect: { ambiguous: true, delimiter: "," },
    last: [2, 211, 0, 451],
  },
  "decimal-comma-in-comma-file-with-heading.csv": {
    rows: 12,
    dialect: { ambiguous: false, decimal: "," },
    last: [2.211, 0.451],
  },
  "doubled-carriage-returns.csv": {
    rows: 12,
    dialect: { lineEnding: "CRLF", firstDataLine: 2 },
    last: UP_TO_2_21,
  },
  "end-of-file-mark.csv": { rows: 12, last: UP_TO_2_21 },
  "footer-text.csv": {
    rows: 12,
    skipped: [
      [15, null, "non-numeric"],
      [16, null, "non-numeric"],
    ],
    last: UP_TO_2_21,
  },
  "fortran-exponents.dat": { rows: 12, last: UP_TO_2_21 },
  "header-cut-into-two-lines.csv": {
    rows: 12,
    header: ["Energy (eV)", "T"],
    dialect: { headerLine: 1, firstDataLine: 3 },
  },
  "latin1-micro-sign.csv": { rows: 12, dialect: { encoding: "iso-8859-1", decimal: "," }, last: UP_TO_2_21 },
  "lone-carriage-returns.csv": { rows: 12, dialect: { lineEnding: "CR" }, last: UP_TO_2_21 },
  "mixed-line-endings.csv": { rows: 12, dialect: { lineEnding: "mixed" }, last: UP_TO_2_21 },
  "no-header.csv": {
    rows: 12,
    header: ["", ""],
    dialect: { headerLine: null, firstDataLine: 1 },
    last: UP_TO_2_21,
  },
  "non-numeric-axis.csv": { rows: 12, skipped: [[5, 1, "non-numeric"]], last: UP_TO_2_21 },
  "non-numeric-cell.csv": { rows: 12, skipped: [[5, 2, "non-numeric"]], last: UP_TO_2_21 },
  "not-a-number-words.csv": {
    rows: 12,
    skipped: [
      [2, 2, "not-finite"],
      [3, 2, "not-finite"],
      [4, 2, "not-finite"],
      [5, 2, "not-finite"],
    ],
    last: UP_TO_2_21,
  },
  "ragged-long-row.csv": { rows: 11, skipped: [[7, null, "ragged"]], last: UP_TO_2_21 },
  "ragged-short-row.csv": { rows: 11, skipped: [[7, null, "ragged"]], last: [2.21, 0.45, 0.01] },
  "repeated-header.csv": {
    rows: 12,
    skipped: [
      [9, null, "repeated-header"],
      [10, null, "repeated-header"],
    ],
    last: UP_TO_2_21,
  },
  "thousands-spaces.txt": { rows: 12, dialect: { thousands: "\u202f" }, last: [17311.5, 0.45] },
  "trailing-separators.csv": { rows: 12, header: ["Energy (eV)", "T"], last: UP_TO_2_21 },
  "truncated-after-separator.csv": { rows: 11, skipped: [[13, null, "truncated"]], last: [2.2, 0.46] },
  "truncated-exponent.csv": { rows: 11, skipped: [[13, null, "truncated"]], last: [2.2, 0.46] },
  "truncated-last-line.csv": { rows: 11, skipped: [[13, null, "truncated"]], last: [2.2, 0.46] },
  "unclosed-quote.csv": { rows: 12, skipped: [[6, 2, "non-numeric"]], last: UP_TO_2_21 },
  "unicode-minus.csv": { rows: 12, last: [5.5, 21] },
  "utf16-odd-byte.txt": {
    rows: 11,
    skipped: [[13, null, "truncated"]],
    dialect: { encoding: "utf-16le" },
    last: [2.2, 0.46],
  },
  "utf16-without-mark.txt": {
    rows: 12,
    dialect: { encoding: "utf-16le", byteOrderMark: false, decimal: "," },
    last: UP_TO_2_21,
  },
  "utf8-cut-character.csv": {
    rows: 12,
    skipped: [[15, null, "comment"]],
    dialect: { encoding: "utf-8" },
    last: UP_TO_2_21,
  },
  "windows1252-dash.csv": { rows: 12, dialect: { encoding: "windows-1252" }, last: UP_TO_2_21 },
};

const REFUSED: Readonly<
  Record<string, readonly [code: string, line: number | null, words: RegExp, help: RegExp]>
> = {
  "binary.dat": ["table/not-text", 3, /bytes that are no text/, /encoding/],
  "document.csv": ["table/not-text", null, /PDF/, /Export/],
  "empty.csv": ["table/empty", null, /0 bytes/, /right file/],
  "image.csv": ["table/not-text", null, /PNG image/, /picture/],
  "jcamp.jdx": ["table/jcamp", 3, /without a number in ##FIRSTX=/, /export it again/],
  "json.csv": ["table/markup", 1, /JSON/, /result or protocol/],
  "one-column.txt": ["table/one-column", 1, /12 lines with one number/, /axis and a signal/],
  "one-row.csv": ["table/too-few-rows", 1, /1 line of numbers/, /Two rows/],
  "only-blank-lines.csv": ["table/empty", null, /blank lines/, /right file/],
  "only-header.csv": ["table/only-header", 2, /Energy \(eV\),T/, /measurement was stored/],
  "only-text.txt": ["table/only-text", 1, /The cryostat was cold/, /delimiter/],
  "web-page.csv": ["table/markup", 1, /web page/, /data file itself/],
  "workbook.csv": ["table/not-text", null, /spreadsheet/, /CSV/],
};

describe("a broken file is read as far as it goes, and what was left out is located", () => {
  for (const [name, expected] of Object.entries(READ))
    it(name, () => {
      const result = readTable(name, bytesOf(name));
      expect(result.ok).toBe(true);
      if (!result.ok) return;
      const table = result.value;
      expect(table.rows).toBe(expected.rows);
      expect(table.skipped.map((entry) => [entry.line, entry.column, entry.reason])).toEqual(
        expected.skipped ?? [],
      );
      expect(table.rowLines).toHaveLength(table.rows);
      for (const column of table.columns) expect(column.values).toHaveLength(table.rows);
      if (expected.last) expect(table.columns.map((column) => column.values.at(-1))).toEqual(expected.last);
      if (expected.dialect) expect(table.dialect).toMatchObject(expected.dialect);
      if (expected.header) expect(table.columns.map((column) => column.header)).toEqual(expected.header);
    });
});

describe("a file that is no table is refused with file, line, what was found and what would help", () => {
  for (const [name, [code, line, words, help]] of Object.entries(REFUSED))
    it(name, () => {
      const result = readTable(name, bytesOf(name));
      expect(result.ok).toBe(false);
      if (result.ok) return;
      const issue = result.issues[0]!;
      expect(issue.code).toBe(code);
      expect(issue.facts).toMatchObject({ file: name, line });
      const { message, remedy } = wordTableIssue(issue);
      expect(message).toContain(line === null ? name : `${name}, line ${line}`);
      expect(message).toMatch(words);
      expect(remedy).toMatch(help);
    });
});

it("every file of the folder has its expectation here", () => {
  const named = [...Object.keys(READ), ...Object.keys(REFUSED), "SOURCES.md"].sort();
  expect(readdirSync(FOLDER).sort()).toEqual(named);
});
