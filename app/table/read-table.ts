import { failure, success } from "../base/index.ts";
import type { Result } from "../base/index.ts";
import { chooseShape, sayDelimiter } from "./choose-shape.ts";
import type { ScoredShape } from "./choose-shape.ts";
import { splitColumnName } from "./column-name.ts";
import { commentMarkOf } from "./comment-mark.ts";
import { decodeText } from "./decode-text.ts";
import { findHeader, headingCells } from "./find-header.ts";
import type { FoundHeader } from "./find-header.ts";
import { factsOfLine } from "./header-fact.ts";
import { parseNumber } from "./number-text.ts";
import { readJcamp } from "./read-jcamp.ts";
import { readRows } from "./read-rows.ts";
import { isRow, rowLikeness, joinPairs } from "./row-shape.ts";
import { signatureOf, textSignatureOf } from "./signature.ts";
import { splitOne, splitRecords } from "./split-fields.ts";
import { lineText, splitLines } from "./text-lines.ts";
import type { TextLines } from "./text-lines.ts";
import { readRecords, wordsOf } from "./text-records.ts";
import type { TextRecord } from "./text-records.ts";
import type { HeaderFact, SkippedRow, Table, TableChoices, TableIssue, TableIssueCode } from "./types.ts";

const MOST_BYTES = 400_000_000;
const SAMPLE_ALL = 400;

/**
 * What      Bytes of an instrument's file to columns of numbers: text, lines, dialect, heading, rows, facts.
 *           Nothing is repaired in silence: `skipped` lists every line and cell of the table that gave no number.
 * Domain    Any bytes. A file that is no table gives one issue with file, line and what was found.
 */
export function readTable(
  file: string,
  bytes: Uint8Array,
  choices: TableChoices = {},
): Result<Table, TableIssue> {
  return readWith(file, bytes, choices, false);
}

/** `pairsByHeading`: the choices of delimiter and decimal mark come from the heading and not from the user. */
function readWith(
  file: string,
  bytes: Uint8Array,
  choices: TableChoices,
  pairsByHeading: boolean,
): Result<Table, TableIssue> {
  const refuse = (
    code: TableIssueCode,
    line: number | null,
    found: string,
    more: Readonly<Record<string, string | number | boolean | null>> = {},
  ): Result<Table, TableIssue> => failure({ code, facts: { ...more, file, line, found } });

  if (bytes.length === 0) return refuse("table/empty", null, "0 bytes");
  const signature = signatureOf(bytes);
  if (signature !== null) return refuse(signature.code, null, signature.found, { kind: signature.kind });
  if (bytes.length > MOST_BYTES)
    return refuse("table/too-large", null, `${Math.round(bytes.length / 1e6)} million bytes`);

  const decoded = decodeText(bytes, choices.encoding);
  const lines = splitLines(decoded.text);
  const strange = strangeCharacters(lines);
  if (strange !== null) return refuse("table/not-text", strange.line, strange.found, { kind: "data" });
  const marked = textSignatureOf(lines.text);
  if (marked?.kind === "jcamp") return readJcamp(file, bytes.length, lines, decoded);
  if (marked !== null) return refuse(marked.code, 1, marked.found, { kind: marked.kind });

  const sample = sampleLines(lines);
  if (sample.length === 0) {
    const blank = lines.text.trim() === "";
    return blank
      ? refuse("table/empty", null, "only blank lines")
      : refuse("table/only-text", 1, "comment lines and nothing else");
  }
  const shape = chooseShape(sample, choices);
  if (
    shape === null ||
    shape.columns < 2 ||
    (shape.score < 2 && shape.fitting < 2) ||
    singles(sample) > shape.fitting
  )
    return noTable(refuse, lines, sample, shape, choices);
  const wanted = choices.headerLine;
  if (wanted !== undefined && (wanted < 0 || wanted > lines.count || !Number.isInteger(wanted)))
    return refuse("table/no-such-line", null, `header line ${wanted} in a file of ${lines.count} lines`);

  const begin = findFirstRow(lines, shape, wanted ?? 0);
  if (begin === null)
    return wanted === undefined || wanted === 0
      ? refuse("table/only-text", 1, quote(sample[0]!))
      : refuse("table/no-such-line", wanted, "no rows of numbers below it");

  let { before } = begin;
  let firstRow = begin.firstRow;
  const columns = Math.min(shape.fields, Math.max(shape.columns, namedColumns(before, shape)));
  let header = findHeader(before, shape, columns, wanted);
  if (header.headerLine === null && wanted === undefined) {
    const spectraHead = headWithBlankCorner(lines, firstRow, shape, columns);
    if (spectraHead !== null) {
      header = spectraHead.header;
      before = [...before, spectraHead.record];
      firstRow = spectraHead.next;
    }
  }
  const headings = header.headers.filter((text) => text !== "").length;
  const halves =
    shape.delimiter === "," && shape.decimal === "." && shape.whole && headings * 2 === shape.fields;
  if (halves && headings >= 2 && choices.delimiter === undefined && choices.decimal === undefined)
    return readWith(file, bytes, { ...choices, delimiter: ",", decimal: "," }, true);
  const ambiguous =
    shape.delimiter === "," &&
    shape.decimal === "." &&
    shape.whole &&
    shape.fields % 2 === 0 &&
    headings < columns &&
    !sample.some((text) => text.includes('"')) &&
    !(choices.delimiter !== undefined && choices.decimal !== undefined);

  const facts: HeaderFact[] = [];
  const comments: string[] = [];
  const takeWords = (record: TextRecord): void => {
    const words = wordsOf(record);
    if (words === "") return;
    const found = factsOfLine(words, splitOne(words, shape.delimiter), record.line, shape.decimal);
    if (found.length > 0) facts.push(...found);
    else if (/[\p{L}\p{N}]/u.test(words)) comments.push(words.replace(/^"(.*)"$/s, "$1"));
  };
  const headingLines = new Set([header.headerLine, header.unitLine, ...header.usedLines]);
  const repeated = new Set<string>();
  const early: SkippedRow[] = [];
  for (const record of before) {
    const text = record.text.trim();
    if (text !== "") repeated.add(text);
    if (headingLines.has(record.line)) continue;
    // Numbers above the table that did not become rows are said, not dropped.
    const isData = record.mark === "" && text !== "" && isRow(cellsOf(record, shape), shape);
    const bad = header.badLines.includes(record.line);
    if (bad || isData)
      early.push({
        line: record.line,
        column: null,
        reason: bad ? "non-numeric" : "comment",
        found: text.slice(0, 80),
      });
    else takeWords(record);
  }

  const read = readRows(lines, firstRow, { ...shape, columns }, repeated, takeWords);
  if (read.rows < 2)
    return refuse(
      "table/too-few-rows",
      firstRow + 1,
      `${read.rows} row${read.rows === 1 ? "" : "s"} of numbers`,
    );

  return success({
    file,
    bytes: bytes.length,
    columns: read.values.map((values, j) => {
      const text = header.headers[j] ?? "";
      const own = splitColumnName(text);
      const below = header.unitLine === null ? "" : (header.units[j] ?? "");
      return {
        index: j + 1,
        header: text,
        name: below !== "" && own.unit === "" ? text : own.name,
        unit: own.unit === "" ? below : own.unit,
        values,
      };
    }),
    rows: read.rows,
    rowLines: read.rowLines,
    facts,
    comments,
    skipped: [...early, ...read.skipped],
    dialect: {
      encoding: decoded.encoding,
      byteOrderMark: decoded.byteOrderMark,
      delimiter: shape.delimiter,
      decimal: shape.decimal,
      thousands: read.thousands,
      lineEnding: lines.lineEnding,
      headerLine: header.headerLine,
      unitLine: header.unitLine,
      firstDataLine: read.rowLines[0]!,
      ambiguous,
      reasons: {
        encoding: decoded.reason,
        delimiter: pairsByHeading
          ? `${sayDelimiter(shape, {}, false)}; the heading names half as many columns as there are commas' fields, so every second comma is a decimal mark`
          : sayDelimiter(shape, choices, ambiguous),
        header: header.reason,
      },
    },
  });
}

export function quote(text: string): string {
  const plain = text.replace(/\s+/g, " ").trim();
  return plain.length > 60 ? `"${plain.slice(0, 57)}..."` : `"${plain}"`;
}

/** Characters that no text file holds, in the first part of the text. */
function strangeCharacters(lines: TextLines): { line: number; found: string } | null {
  const part = lines.text.slice(0, 65_536);
  let controls = 0;
  let lost = 0;
  let line = 1;
  let firstLine = 0;
  for (let i = 0; i < part.length; i++) {
    const code = part.charCodeAt(i);
    if (code === 10) line++;
    else if (code < 32 && code !== 9 && code !== 12 && code !== 11) {
      controls++;
      if (firstLine === 0) firstLine = line;
      if (code === 0) return { line, found: "bytes that are no text (a zero byte)" };
    } else if (code === 0xfffd) {
      lost++;
      if (firstLine === 0) firstLine = line;
    }
  }
  if (controls > Math.max(2, 0.005 * part.length))
    return { line: firstLine, found: `bytes that are no text (${controls} control characters)` };
  if (lost > Math.max(4, 0.05 * part.length))
    return {
      line: firstLine,
      found: `bytes that this encoding cannot hold (${lost} undecodable characters)`,
    };
  return null;
}

/** Lines that are neither blank nor comments: all of a short file, else from its start, its end and in between. */
function sampleLines(lines: TextLines): string[] {
  const picked: string[] = [];
  const take = (i: number): void => {
    const text = lineText(lines, i);
    if (text.trim() !== "" && commentMarkOf(text) === "") picked.push(text);
  };
  const n = lines.count;
  if (n <= SAMPLE_ALL) {
    for (let i = 0; i < n; i++) take(i);
    return picked;
  }
  const head = 100;
  const tail = 30;
  const between = SAMPLE_ALL - head - tail;
  for (let i = 0; i < head; i++) take(i);
  for (let k = 0; k < between; k++) take(head + Math.floor(((n - head - tail) * k) / between));
  for (let i = n - tail; i < n; i++) take(i);
  return picked;
}

/** Sampled lines that are one number and nothing else. */
function singles(sample: readonly string[]): number {
  let n = 0;
  for (const text of sample) {
    if (/[;\t]/.test(text.trim())) continue;
    if (
      Number.isFinite(parseNumber(text, ".", "")) ||
      (/\d,\d*[eE]/.test(text) && Number.isFinite(parseNumber(text, ",", "")))
    )
      n++;
  }
  return n;
}

type Refuse = (
  code: TableIssueCode,
  line: number | null,
  found: string,
  more?: Readonly<Record<string, string | number | boolean | null>>,
) => Result<Table, TableIssue>;

function noTable(
  refuse: Refuse,
  lines: TextLines,
  sample: readonly string[],
  shape: ScoredShape | null,
  choices: TableChoices,
): Result<Table, TableIssue> {
  const first = firstFilledLine(lines);
  const alone = sample.filter(
    (text) => Number.isFinite(parseNumber(text, ".", "")) || Number.isFinite(parseNumber(text, ",", "")),
  ).length;
  if (alone >= 2 || (shape !== null && shape.columns < 2 && shape.fitting >= 2))
    return refuse(
      "table/one-column",
      first,
      `${Math.max(alone, shape?.fitting ?? 0)} lines with one number each`,
    );
  const failing = failingCell(lines);
  if (failing !== null)
    return refuse("table/only-text", failing.line, failing.found, { reason: failing.reason });
  if (shape !== null && shape.score >= 0.9)
    return refuse(
      "table/too-few-rows",
      first,
      `${shape.fitting} line${shape.fitting === 1 ? "" : "s"} of numbers`,
    );
  const chosen = choices.delimiter !== undefined || choices.decimal !== undefined;
  if (!chosen && looksLikeHeading(sample))
    return refuse("table/only-header", lastFilledLine(lines), quote(sample.at(-1)!));
  return refuse(
    "table/only-text",
    first,
    `${sample.length} line${sample.length === 1 ? "" : "s"} of text beginning ${quote(sample[0]!)}`,
  );
}

/** The first line that begins with a number and has a cell that is none, or one with another decimal mark. */
function failingCell(lines: TextLines): { line: number; found: string; reason: "spoilt" | "mixed" } | null {
  for (let i = 0; i < Math.min(lines.count, 1000); i++) {
    const text = lineText(lines, i);
    if (!/^\s*[+-]?\d/.test(text) || text.length > 2000) continue;
    for (const delimiter of ["\t", ";", ","] as const) {
      const cells = splitOne(text, delimiter).map((cell) => cell.trim());
      if (cells.length < 2 || markOf(cells[0]!) === null) continue;
      const marks = cells.map(markOf);
      const bad = marks.findIndex((mark, j) => mark === null && cells[j] !== "");
      if (bad > 0)
        return {
          line: i + 1,
          found: `${quote(cells[bad]!)} in column ${bad + 1} where a number should be`,
          reason: "spoilt",
        };
      const point = marks.indexOf(".");
      const comma = marks.indexOf(",");
      if (delimiter !== "," && point >= 0 && comma >= 0)
        return {
          line: i + 1,
          found: `${quote(cells[point]!)} with a decimal point in column ${point + 1} and ${quote(cells[comma]!)} with a decimal comma in column ${comma + 1}`,
          reason: "mixed",
        };
      break;
    }
  }
  return null;
}

/** The decimal mark of a number, "" where it has none; null where the cell is no number. */
function markOf(cell: string): "." | "," | "" | null {
  const point = Number.isFinite(parseNumber(cell, ".", ""));
  const comma = Number.isFinite(parseNumber(cell, ",", ""));
  if (point && comma) return "";
  return point ? "." : comma ? "," : null;
}

function looksLikeHeading(sample: readonly string[]): boolean {
  const last = sample.at(-1)!;
  if (sample.length > 60) return false;
  for (const delimiter of ["\t", ";", ","] as const) {
    const cells = splitOne(last, delimiter).map((cell) => cell.trim());
    if (cells.length < 2 || cells.some((cell) => cell === "" || cell.length > 40)) continue;
    if (sample.length === 1 || cells.some((cell) => splitColumnName(cell).unit !== "")) return true;
  }
  return sample.length <= 2 && splitColumnName(last).unit !== "";
}

function firstFilledLine(lines: TextLines): number {
  for (let i = 0; i < lines.count; i++) if (lineText(lines, i).trim() !== "") return i + 1;
  return 1;
}

function lastFilledLine(lines: TextLines): number {
  for (let i = lines.count - 1; i >= 0; i--) if (lineText(lines, i).trim() !== "") return i + 1;
  return 1;
}

function cellsOf(record: TextRecord, shape: ScoredShape): string[] {
  const cells = splitOne(record.text, shape.delimiter);
  return shape.paired && !record.text.includes('"') ? joinPairs(cells) : cells;
}

/**
 * The first line, from `from` (0-based) on, that is a row and is followed by rows: of the next three lines that are
 * neither blank nor comments at least half are rows too, if perhaps with a bad cell or of another length.
 */
function findFirstRow(
  lines: TextLines,
  shape: ScoredShape,
  from: number,
): { before: TextRecord[]; firstRow: number } | null {
  const before: TextRecord[] = [...readRecords(lines, 0, from).records];
  let fallback: { before: TextRecord[]; firstRow: number } | null = null;
  let at = from;
  while (at < lines.count) {
    const block = readRecords(lines, at, Math.min(lines.count, at + 256));
    const ahead = readRecords(lines, block.next, Math.min(lines.count, block.next + 16)).records;
    const records = [...block.records, ...ahead];
    const plain = splitRecords(
      records.map((record) => record.text),
      shape.delimiter,
    );
    const rows = records.map((record, i) => {
      if (record.mark !== "" || record.text.trim() === "") return null;
      const cells = shape.paired && !record.text.includes('"') ? joinPairs(plain[i]!) : plain[i]!;
      return isRow(cells, shape) ? "row" : rowLikeness(cells, shape);
    });
    for (let i = 0; i < block.records.length; i++) {
      if (rows[i] === "row" || rows[i] === "like") {
        const next = rows.slice(i + 1, i + 24).filter((row) => row !== null);
        const three = next.slice(0, 3);
        const sound = rows[i] === "row" || three.includes("row");
        // `2 1000` above the heading counts columns and rows; it is no row.
        const after = records.slice(i + 1).find((_, k) => rows[i + 1 + k] !== null);
        const aboveHeading =
          three[0] === "no" &&
          three[1] === "row" &&
          headingCells(after!.text, shape.columns, shape.delimiter) !== null;
        if (sound && !aboveHeading && three.filter((row) => row !== "no").length * 2 >= three.length)
          return { before, firstRow: block.records[i]!.line - 1 };
      }
      if (rows[i] === "row" && fallback === null)
        fallback = { before: [...before], firstRow: block.records[i]!.line - 1 };
      before.push(block.records[i]!);
    }
    at = block.next;
  }
  return fallback;
}

/** How many columns the last line before the rows names: an empty column with a name is kept. */
function namedColumns(before: readonly TextRecord[], shape: ScoredShape): number {
  if (shape.delimiter === " " || shape.fields === shape.columns) return 0;
  const last = before.filter((record) => wordsOf(record) !== "").at(-1);
  if (last === undefined) return 0;
  const cells = splitOne(wordsOf(last), shape.delimiter);
  return cells.length <= shape.fields ? cells.reduce((n, cell, j) => (cell.trim() === "" ? n : j + 1), 0) : 0;
}

/** `;5;10;20` above rows of four numbers: the first line names the signals by value and leaves the axis blank. */
function headWithBlankCorner(
  lines: TextLines,
  firstRow: number,
  shape: ScoredShape,
  columns: number,
): { header: FoundHeader; record: TextRecord; next: number } | null {
  if (shape.delimiter === " ") return null;
  const { records, next } = readRecords(lines, firstRow, firstRow + 1);
  const record = records[0];
  if (record === undefined || next >= lines.count) return null;
  const cells = cellsOf(record, shape)
    .slice(0, columns)
    .map((cell) => cell.trim());
  const following = readRecords(lines, next, next + 1).records[0];
  if (following === undefined || cells[0] !== "" || cells.slice(1).some((cell) => cell === "")) return null;
  if (cellsOf(following, shape)[0]?.trim() === "") return null;
  const header: FoundHeader = {
    headerLine: record.line,
    unitLine: null,
    headers: cells,
    units: cells.map(() => ""),
    usedLines: [],
    badLines: [],
    reason: `line ${record.line} leaves the first column blank and names the others by a value`,
  };
  return { header, record, next };
}
