import { splitColumnName } from "./column-name.ts";
import { factKeyOf, WORDY } from "./fact-label.ts";
import { parseNumber } from "./number-text.ts";
import type { DecimalMark, HeaderFact } from "./types.ts";
import { isKnownUnit } from "./unit-text.ts";

const NUMBER = /^([+\-\u2212]?(?:\d[\d.,\u00a0\u202f\u2009]*|[.,]\d+)(?:[eE][+\-\u2212]?\d+)?)(?:\(\d+\))?/;

/** A number of the header, in either decimal mark; null where it could be read in two ways. */
export function factNumber(text: string, decimal: DecimalMark): number | null {
  const other = decimal === "." ? "," : ".";
  const digits = text.replace(/[\u00a0\u202f\u2009]/g, "").replace(/[.,]$/, "");
  let value: number;
  if (!digits.includes(other)) value = parseNumber(digits, decimal, "");
  else if (digits.includes(decimal))
    value =
      digits.lastIndexOf(other) > digits.lastIndexOf(decimal)
        ? parseNumber(digits, other, decimal)
        : parseNumber(digits, decimal, other);
  // 9,000 may be nine thousand or nine.
  else if (new RegExp(`^[+-]?[1-9]\\d{0,2}(\\${other}\\d{3})+$`).test(digits)) return null;
  else value = parseNumber(digits, other, "");
  return Number.isFinite(value) ? value : null;
}

function readValue(text: string, decimal: DecimalMark): { value: number | null; unit: string | null } {
  const bare = text.replace(/^[~≈<>=]\s*/, "");
  const match = NUMBER.exec(bare);
  if (match === null) return { value: null, unit: null };
  const rest = bare.slice(match[0].length).trim();
  const value = factNumber(match[1]!, decimal);
  if (rest === "") return { value, unit: null };
  if (isKnownUnit(rest)) return { value, unit: rest };
  const bracket = /^[[(]\s*([^\])]+?)\s*[\])]/.exec(rest);
  if (bracket !== null && isKnownUnit(bracket[1]!)) return { value, unit: bracket[1]! };
  const uncertainty = /^(?:±|\+\/?-|\+-)\s*[\d.,]+\s*(\S*)$/.exec(rest);
  if (uncertainty !== null) return { value, unit: uncertainty[1] === "" ? null : uncertainty[1]! };
  const first = /^(\S+?)[,;]?\s+(.*)$/.exec(rest);
  if (first !== null && isKnownUnit(first[1]!)) return { value, unit: first[1]! };
  if (/^[^\d\s:/\-–.][^\s:]{0,11}$/.test(rest) && /^\s/.test(bare.slice(match[0].length)))
    return { value, unit: rest };
  return { value: null, unit: null };
}

/** One statement from its label and its text; a unit may stand with either. */
export function makeFact(label: string, text: string, line: number, decimal: DecimalMark): HeaderFact {
  const own = splitColumnName(label);
  const read = readValue(text, decimal);
  const unit = read.value === null ? null : (read.unit ?? (own.unit === "" ? null : own.unit));
  const key = factKeyOf(own.name === "" ? label : own.name, unit);
  const words = WORDY.has(key) && !/^[+-]?\d+([.,]\d+)?$/.test(text);
  return { key, label, text, value: words ? null : read.value, unit: words ? null : unit, line };
}

const LABEL = /^(?=[^:=]*\p{L})[^:=]{1,60}$/u;

function statement(text: string, line: number, decimal: DecimalMark): HeaderFact | null {
  const at = text.search(/[:=]/);
  if (at <= 0) return null;
  const label = text.slice(0, at).trim();
  const value = text
    .slice(at + 1)
    .replace(/^[:=>]/, "")
    .trim();
  if (!LABEL.test(label) || value === "" || /^[\\/]/.test(value)) return null;
  return makeFact(label, unquoted(value), line, decimal);
}

function unquoted(text: string): string {
  return text.replace(/^"(.*)"$/s, "$1").trim();
}

/**
 * What      The facts that one free line states: `key: value`, `key = value`, `key, value` in the file's separator
 *           or a tab, several of them on a line, and `key value unit` where the key is one we know.
 * Domain    `cells` are the line's fields in the table's own delimiter. No fact gives an empty list.
 */
export function factsOfLine(
  text: string,
  cells: readonly string[],
  line: number,
  decimal: DecimalMark,
): readonly HeaderFact[] {
  const plain = unquoted(text.trim()).replace(/[,;\t\s]+$/, "");
  if (plain === "") return [];
  const pieces = plain.split(/[;|\t]|,(?!\d)/).map((piece) => piece.trim());
  if (pieces.length > 1) {
    const several = pieces.map((piece) => statement(unquoted(piece), line, decimal));
    if (several.every((fact) => fact !== null)) return several;
  }
  const filled = cells.map((cell) => unquoted(cell)).filter((cell) => cell !== "");
  for (const fields of [filled, plain.split("\t").map(unquoted), plain.split(/\s*;\s*/).map(unquoted)]) {
    const [label, value, unit] = fields.filter((field) => field !== "");
    if (label === undefined || value === undefined || fields.length > 3) continue;
    const bare = label.replace(/\s*[:=]$/, "");
    if (!LABEL.test(bare)) continue;
    if (unit === undefined) return [makeFact(bare, value, line, decimal)];
    if (isKnownUnit(unit)) return [makeFact(bare, `${value} ${unit}`, line, decimal)];
  }
  const one = statement(plain, line, decimal);
  if (one !== null) return [one];
  const fields = plain.split(/\s*,\s+|,(?!\d)/).map(unquoted);
  if (fields.length === 2 && LABEL.test(fields[0]!) && fields[1] !== "")
    return [makeFact(fields[0]!, fields[1]!, line, decimal)];
  const spaced = /^(.*?\p{L}.*?)\s+([+-]?\d.*)$/u.exec(plain);
  if (spaced !== null) {
    const fact = makeFact(spaced[1]!, spaced[2]!, line, decimal);
    if (fact.key !== "other" && fact.value !== null) return [fact];
  }
  return [];
}
