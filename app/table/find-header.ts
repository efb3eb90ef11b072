import { factKeyOf } from "./fact-label.ts";
import { factsOfLine } from "./header-fact.ts";
import { splitColumnName } from "./column-name.ts";
import { filledLength } from "./row-shape.ts";
import type { RowShape } from "./row-shape.ts";
import { splitOne } from "./split-fields.ts";
import { wordsOf } from "./text-records.ts";
import type { TextRecord } from "./text-records.ts";
import type { Delimiter } from "./types.ts";
import { isKnownUnit, isStrongUnit, unbracketed } from "./unit-text.ts";

export interface FoundHeader {
  readonly headerLine: number | null;
  readonly unitLine: number | null;
  /** One a column, "" where there is none. */
  readonly headers: readonly string[];
  readonly units: readonly string[];
  /** Lines of a third header row, joined to the names. */
  readonly usedLines: readonly number[];
  /** Lines below the heading that should be rows but begin with words. */
  readonly badLines: readonly number[];
  readonly reason: string;
}

const clean = (cell: string): string => cell.replace(/\s+/g, " ").trim();

/** A heading cut at single spaces has its units as fields of their own: put `(eV)`, `/ eV` and values back. */
function mergeSpaced(tokens: readonly string[]): string[] {
  const merged: string[] = [];
  let glue = false;
  for (const token of tokens) {
    const last = merged.length - 1;
    const joins: boolean =
      last >= 0 &&
      (glue || /^[[({/=]/.test(token) || /[[({]\S*$/.test(openPart(merged[last]!)) || token === "in");
    if (joins) merged[last] = `${merged[last]!} ${token}`;
    else merged.push(token);
    glue = joins ? token === "/" || token === "=" || token === "in" : false;
  }
  return merged;
}

/** What stands after the last bracket that is still open, "" if none is. */
function openPart(text: string): string {
  const at = Math.max(text.lastIndexOf("("), text.lastIndexOf("["), text.lastIndexOf("{"));
  return at >= 0 && !/[\])}]/.test(text.slice(at)) ? text.slice(at) : "";
}

/** Bare units go with the word before them: `Energy eV T %`. */
function mergeUnits(tokens: readonly string[]): string[] {
  const merged: string[] = [];
  for (const token of tokens) {
    const last = merged.length - 1;
    if (last >= 0 && isStrongUnit(unbracketed(token))) merged[last] = `${merged[last]!} ${token}`;
    else merged.push(token);
  }
  return merged;
}

/** The cells of a heading for `columns` columns, or null where the line does not cut into as many. */
export function headingCells(text: string, columns: number, delimiter: Delimiter): string[] | null {
  const fits = (cells: readonly string[]): string[] | null => {
    const trimmed = cells.map(clean);
    const n = filledLength(trimmed);
    return n === columns ? trimmed.slice(0, columns) : null;
  };
  if (delimiter === " ") {
    const tokens = splitOne(text, " ");
    const merged = mergeSpaced(tokens);
    const options = [
      text.trim().split(/\s*\t\s*/),
      text.trim().split(/ {2,}|\t/),
      splitOne(text, ";"),
      splitOne(text, ","),
      merged,
      mergeUnits(merged),
      tokens,
    ];
    for (const option of options) {
      const cells = fits(option.map((cell) => cell.trim().replace(/^"(.*)"$/, "$1")));
      if (cells !== null) return cells;
    }
    return null;
  }
  const own = splitOne(text, delimiter).map(clean);
  const n = filledLength(own);
  if (n === columns) return own.slice(0, columns);
  for (const other of ["\t", ";", ","] as const) {
    if (other === delimiter) continue;
    const cells = fits(splitOne(text, other));
    if (cells !== null) return cells;
  }
  const spaced = n === 1 ? fits(text.trim().split(/ {2,}|\t/)) : null;
  if (spaced !== null) return spaced;
  if (n >= 2 && n < columns) return [...own.slice(0, n), ...new Array<string>(columns - n).fill("")];
  if (n > columns && n <= columns + 2) return own.slice(0, columns);
  return null;
}

/** `Temperature, 4.2 K` and `Sample: A, run 3` are facts, not headings. */
function looksLikeFact(cells: readonly string[], text: string): boolean {
  const first = cells[0] ?? "";
  if (/^[^:=]*\p{L}[^:=]*[:=]\s*\S/u.test(first) && !/^\S{1,3}\s*=/.test(first)) return true;
  const filled = cells.filter((cell) => cell !== "");
  if (filled.length === 1) return true;
  if (filled.length > 3) return false;
  const second = filled[1] ?? "";
  const unit = /\d\s*(\S+)$/.exec(second)?.[1] ?? null;
  const name = splitColumnName(first);
  const key = factKeyOf(name.name, name.unit === "" ? unit : name.unit);
  if (key === "other") return false;
  if (/\d/.test(second) && /^[+\-~]?[\d.,]+(\s*\S{1,8})?$/.test(second)) return true;
  return ["sample", "batch", "date", "medium", "detector", "grating"].includes(key) && text.length > 0;
}

function isUnitRow(cells: readonly string[]): boolean {
  const filled = cells.filter((cell) => cell !== "");
  if (filled.length === 0) return false;
  const isUnit = (cell: string): boolean =>
    isKnownUnit(unbracketed(cell)) || /^[[(]\s*[-\d]?\s*[\])]$|^-+$/.test(cell);
  return filled.every(isUnit) && filled.some((cell) => isStrongUnit(unbracketed(cell)) || /^[[(]/.test(cell));
}

const hasUnit = (cells: readonly string[]): boolean =>
  cells.some((cell) => splitColumnName(cell).unit !== "");
const isNumber = (cell: string): boolean => /^[+-]?(\d+[.,]?\d*|[.,]\d+)([eE][+-]?\d+)?$/.test(cell);
const letters = (cells: readonly string[]): boolean => cells.some((cell) => /\p{L}|%|°/u.test(cell));

function withUnits(
  headerLine: number,
  headers: readonly string[],
  unitLine: number | null,
  unitRow: readonly string[] | null,
  used: readonly number[],
  reason: string,
): FoundHeader {
  const units = headers.map((_, j) => {
    const unit = unbracketed(unitRow?.[j] ?? "");
    return /^-*$/.test(unit) ? "" : unit;
  });
  return { headerLine, unitLine, headers, units, usedLines: used, badLines: [], reason };
}

/**
 * What      The heading of the table among the lines before its first row: the nearest line that cuts into as many
 *           cells as there are columns; a line of units below it; a third line of labels below both.
 *           A comment that cuts so and stands right above the rows is a heading too.
 */
export function findHeader(
  before: readonly TextRecord[],
  shape: RowShape,
  columns: number,
  wanted: number | undefined,
): FoundHeader {
  const none = new Array<string>(columns).fill("");
  const empty = (reason: string): FoundHeader => ({
    headerLine: null,
    unitLine: null,
    headers: none,
    units: none,
    usedLines: [],
    badLines: [],
    reason,
  });
  if (wanted === 0) return empty("the user says that there is no header");
  const filled = before.filter((record) => wordsOf(record) !== "");
  const cellsOf = (record: TextRecord | undefined): string[] | null =>
    record === undefined
      ? null
      : // Not trimmed: a leading tab is a blank first cell.
        headingCells(record.mark === "" ? record.text : wordsOf(record), columns, shape.delimiter);
  if (wanted !== undefined) {
    const at = filled.findIndex((record) => record.line === wanted);
    const record = filled[at];
    if (record === undefined) return empty(`line ${wanted}, chosen by the user, holds nothing`);
    const cells = cellsOf(record) ?? loose(record, columns, shape.delimiter);
    const next = filled[at + 1];
    const unitCells = cellsOf(next);
    const unitRow = unitCells !== null && isUnitRow(unitCells) ? unitCells : null;
    return withUnits(wanted, cells, unitRow === null ? null : next!.line, unitRow, [], "chosen by the user");
  }
  const usable = (record: TextRecord | undefined): string[] | null => {
    const cells = cellsOf(record);
    if (cells === null || record === undefined) return null;
    if (!letters(cells) || looksLikeFact(cells, record.text)) return null;
    if (record.mark !== "" && commentStatesFacts(record, cells)) return null;
    // Words under a mark of comment need some sign of a heading: short cells.
    return cells.every((cell) => cell.length <= 60) ? cells : null;
  };
  const last = filled.length - 1;
  const near = filled[last];
  const nearCells = usable(near);
  const nearUnits = cellsOf(near);
  const above = filled[last - 1];
  const aboveCells = usable(above);
  const how = (record: TextRecord): string => (record.mark === "" ? "line" : "comment line");
  if (near !== undefined && nearUnits !== null && isUnitRow(nearUnits)) {
    if (aboveCells !== null && !isUnitRow(aboveCells))
      return withUnits(
        above!.line,
        aboveCells,
        near.line,
        nearUnits,
        [],
        `names on ${how(above!)} ${above!.line}, units below`,
      );
    return withUnits(near.line, nearUnits, null, null, [], `${how(near)} ${near.line} holds units only`);
  }
  if (near !== undefined && nearUnits !== null && above !== undefined) {
    // Names, units, labels: the labels tell several signal columns apart.
    const units = cellsOf(above);
    const names = usable(filled[last - 2]);
    if (units !== null && isUnitRow(units) && names !== null && !isUnitRow(names)) {
      const joined = names.map((name, j) => clean(`${name} ${nearUnits[j]!}`));
      const top = filled[last - 2]!;
      return withUnits(
        top.line,
        joined,
        above.line,
        units,
        [near.line],
        `names on line ${top.line}, then units, then labels`,
      );
    }
  }
  if (near !== undefined && nearUnits !== null && aboveCells !== null && above !== undefined) {
    const rest = nearUnits.slice(1).filter((cell) => cell !== "");
    const numbers = rest.filter(isNumber);
    // Below names with units, or with a decimal mark in them, numbers belong to a row or to labels, not to names.
    const below = hasUnit(aboveCells)
      ? rest.length > 0 && numbers.length === rest.length
      : numbers.some((cell) => /[.,]\d/.test(cell));
    if (below && !aboveCells.some(isNumber)) {
      const first = splitColumnName(nearUnits[0]!);
      const labels = first.name === "" || factKeyOf(first.name, first.unit) !== "other";
      const named = [];
      for (const [j, name] of aboveCells.entries())
        named.push(
          j === 0 || !labels || columns < 3 ? name : clean(`${name} ${nearUnits[j]!} ${first.unit}`),
        );
      const reason = `line ${above.line} names the columns; numbers stand below it`;
      const found = withUnits(above.line, named, null, null, labels ? [near.line] : [], reason);
      return labels ? found : { ...found, badLines: [near.line] };
    }
  }
  if (near !== undefined && nearCells !== null)
    return withUnits(
      near.line,
      nearCells,
      null,
      null,
      [],
      `${how(near)} ${near.line}, right above the first row, names the columns`,
    );
  // A free line or a rule may stand between the heading and the rows: look three lines further up.
  for (let i = last - 1; i >= Math.max(0, last - 3); i--) {
    const record = filled[i]!;
    const cells = usable(record);
    if (cells === null) continue;
    if (!hasUnit(cells)) continue;
    return withUnits(
      record.line,
      cells,
      null,
      null,
      [],
      `${how(record)} ${record.line} names columns with units`,
    );
  }
  return empty(
    filled.length === 0
      ? "the rows begin at once"
      : "no line before the rows cuts into as many headings as columns",
  );
}

function commentStatesFacts(record: TextRecord, cells: readonly string[]): boolean {
  const facts = factsOfLine(wordsOf(record), cells, record.line, ".");
  return facts.length > 0 && facts.every((fact) => fact.key !== "other");
}

function loose(record: TextRecord, columns: number, delimiter: Delimiter): string[] {
  const cells = splitOne(wordsOf(record), delimiter).map(clean).slice(0, columns);
  while (cells.length < columns) cells.push("");
  return cells;
}
