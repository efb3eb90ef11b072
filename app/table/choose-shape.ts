import { groupMarkOf, kindOfNoNumber, parseNumber, saysMissing } from "./number-text.ts";
import { filledLength, joinPairs } from "./row-shape.ts";
import type { RowShape } from "./row-shape.ts";
import { splitRecords } from "./split-fields.ts";
import type { DecimalMark, Delimiter, TableChoices } from "./types.ts";

/** A shape with what spoke for it. */
export interface ScoredShape extends RowShape {
  /** Sum over the sampled lines of how well each reads as a row of numbers (1: every field is a number). */
  readonly score: number;
  /** Lines that read as rows of this shape, and lines looked at. */
  readonly fitting: number;
  readonly sampled: number;
  /** Every cell is a whole number without decimal mark. */
  readonly whole: boolean;
}

const DELIMITERS: readonly Delimiter[] = ["\t", ";", ",", " "];
const DECIMALS: readonly DecimalMark[] = [".", ","];

interface RowCredit {
  readonly credit: number;
  readonly whole: boolean;
}

/**
 * What one sampled line says for a pair: 1 where every field is a number (or blank, or not finite) and two are
 * filled; less where digits had to be taken as grouped; half where words stand beside two numbers; 0 otherwise.
 */
function creditOf(cells: readonly string[], decimal: DecimalMark, group: string): RowCredit {
  if (cells.length < 2) return { credit: 0, whole: true };
  let numbers = 0;
  let filled = 0;
  let words = 0;
  let factor = 1;
  let whole = true;
  for (const cell of cells) {
    if (Number.isFinite(parseNumber(cell, decimal, group))) {
      numbers++;
      filled++;
      const text = cell.trim();
      if (!/^[+-]?\d+$/.test(text)) {
        whole = false;
        const mark = groupMarkOf(text, group);
        if (mark === "," || mark === ".") factor = Math.min(factor, 0.9);
        else if (mark !== "") factor = Math.min(factor, 0.95);
        else if (text.endsWith(",")) factor = Math.min(factor, 0.9);
      }
      continue;
    }
    const kind = kindOfNoNumber(cell);
    if (kind === "not-finite") filled++;
    else if (kind === "text" && !saysMissing(cell)) words++;
  }
  if (numbers === 0) return { credit: 0, whole };
  if (words > 0) return { credit: numbers >= 2 ? 0.5 * factor : 0, whole };
  return { credit: filled >= 2 ? factor : 0.3, whole };
}

function scoreShape(
  rows: readonly (readonly string[])[],
  delimiter: Delimiter,
  decimal: DecimalMark,
  group: string,
  paired: boolean,
): ScoredShape | null {
  const byFields = new Map<number, { score: number; fitting: number }>();
  const credits = rows.map((cells) => creditOf(cells, decimal, group));
  rows.forEach((cells, i) => {
    const credit = credits[i]!.credit;
    if (credit === 0) return;
    const entry = byFields.get(cells.length) ?? { score: 0, fitting: 0 };
    entry.score += credit;
    entry.fitting++;
    byFields.set(cells.length, entry);
  });
  let fields = 0;
  let best = { score: 0, fitting: 0 };
  for (const [count, entry] of byFields) {
    if (entry.score > best.score || (entry.score === best.score && count > fields)) {
      best = entry;
      fields = count;
    }
  }
  if (fields === 0) return null;
  const wordCount = new Array<number>(fields).fill(0);
  let columns = 0;
  let whole = true;
  rows.forEach((cells, i) => {
    if (cells.length !== fields || credits[i]!.credit === 0) return;
    columns = Math.max(columns, filledLength(cells));
    if (!credits[i]!.whole) whole = false;
    cells.forEach((cell, j) => {
      if (!Number.isFinite(parseNumber(cell, decimal, group)) && kindOfNoNumber(cell) === "text")
        wordCount[j] = wordCount[j]! + 1;
    });
  });
  const wordColumns = wordCount.map((words) => words > 0.5 * best.fitting);
  const shape = { delimiter, decimal, group, paired, fields, columns, wordColumns, whole };
  return { ...shape, score: best.score, fitting: best.fitting, sampled: rows.length };
}

/** Some cell only reads as a number if the other mark groups its digits, and no long number is left ungrouped. */
function groupsDigits(rows: readonly (readonly string[])[], decimal: DecimalMark): boolean {
  const other = decimal === "." ? "," : ".";
  const pattern = other === "," ? /^[+-]?\d{1,3}(,\d{3})+(\.\d*)?$/ : /^[+-]?\d{1,3}(\.\d{3})+(,\d*)?$/;
  let grouped = 0;
  for (const cells of rows) {
    for (const cell of cells) {
      const text = cell.trim();
      if (pattern.test(text)) grouped++;
      else if (/^[+-]?\d{4,}([.,]\d*)?$/.test(text)) return false;
    }
  }
  return grouped >= 2;
}

/**
 * What      Delimiter and decimal mark, decided together: every pair is tried on the sampled lines and the one wins
 *           under which most lines have the same number of fields, all of them numbers.
 * Domain    Ties go to tab, semicolon, comma, spaces in this order, and to the point before the comma. A tab or a
 *           semicolon that explains seven tenths of what the best pair explains wins over a comma or spaces, since
 *           these occur inside numbers. Null where no pair makes a row of numbers.
 */
export function chooseShape(sample: readonly string[], choices: TableChoices): ScoredShape | null {
  const scored: ScoredShape[] = [];
  const joined = sample.join("\n");
  for (const delimiter of DELIMITERS) {
    if (choices.delimiter !== undefined && choices.delimiter !== delimiter) continue;
    if (
      choices.delimiter === undefined &&
      !(delimiter === " " ? /[ \t]/.test(joined) : joined.includes(delimiter))
    )
      continue;
    const paired =
      delimiter === "," && choices.delimiter === "," && choices.decimal === "," && !joined.includes('"');
    const split = splitRecords(sample, delimiter);
    const rows = paired ? split.map((cells) => joinPairs(cells)) : split;
    for (const decimal of DECIMALS) {
      if (choices.decimal !== undefined && choices.decimal !== decimal) continue;
      const plain = scoreShape(rows, delimiter, decimal, "", paired);
      if (plain !== null) scored.push(plain);
      if (!groupsDigits(rows, decimal)) continue;
      const grouped = scoreShape(rows, delimiter, decimal, decimal === "." ? "," : ".", paired);
      if (grouped !== null) scored.push(grouped);
    }
  }
  let best: ScoredShape | null = null;
  for (const shape of scored) if (best === null || shape.score > best.score) best = shape;
  if (best === null || best.delimiter === "\t" || best.delimiter === ";") return best;
  let clear: ScoredShape | null = null;
  for (const shape of scored) {
    if (shape.delimiter !== "\t" && shape.delimiter !== ";") continue;
    if (shape.score >= 0.7 * best.score && (clear === null || shape.score > clear.score)) clear = shape;
  }
  return clear ?? best;
}

const DELIMITER_WORDS: Readonly<Record<Delimiter, string>> = {
  ",": "comma",
  ";": "semicolon",
  "\t": "tab",
  " ": "spaces",
};
const MARK_WORDS: Readonly<Record<string, string>> = { ".": "point", ",": "comma" };

export function sayDelimiter(shape: ScoredShape, choices: TableChoices, ambiguous: boolean): string {
  const name = DELIMITER_WORDS[shape.delimiter];
  const chosen = [
    choices.delimiter === undefined ? "" : "the delimiter",
    choices.decimal === undefined ? "" : "the decimal mark",
  ].filter((word) => word !== "");
  const by = chosen.length === 0 ? "" : `; ${chosen.join(" and ")} chosen by the user`;
  const mark = shape.whole ? "no decimal mark in sight" : `decimal ${MARK_WORDS[shape.decimal]!}`;
  const lines = `${shape.fitting} of ${shape.sampled} sampled lines are ${shape.fields} numeric fields`;
  const doubt = ambiguous
    ? `; ambiguous: every field is a whole number, so the commas may be decimal marks instead (${
        shape.fields === 2 ? "one column" : `${shape.fields / 2} columns`
      }); set delimiter and decimal mark, or export with another separator`
    : "";
  return `${name} and ${mark}: ${lines}${by}${doubt}`;
}
