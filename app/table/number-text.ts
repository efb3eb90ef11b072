import type { DecimalMark } from "./types.ts";

/** Spaces that stand between groups of three digits: plain, non-breaking, narrow non-breaking, thin, figure. */
const GROUPED = /^([+-]?\d{1,3})((?:[ \u00a0\u202f\u2009\u2007'\u2019]\d{3})+)([.,]\d*)?([eEdD][+-]?\d+)?$/;
const MINUS = /[\u2212\u2013\u2010\u2011\ufe63\uff0d]/g;
const NOT_FINITE =
  /^[+-]?(?:nan(?:\([^)]*\)|q|s)?|[qs]nan|inf|infinity|\u221e|\d*[.,]#(?:inf|ind|qnan|snan|nan)\d*)$/i;

/**
 * What      A cell as a finite number, or NaN where it is not surely one.
 * Domain    Leading and trailing spaces, + and the minus signs of text processors, exponents with e, E, d, D and
 *           the three-digit exponent without a letter (1.0-103) are taken; so are digits in groups of three set
 *           apart by a space or an apostrophe. `group` is the comma or point between groups where the dialect has
 *           one ("" otherwise). Hexadecimal, words, NaN and infinities give NaN.
 */
export function parseNumber(cell: string, decimal: DecimalMark, group: string): number {
  let text = cell;
  const length = text.length;
  if (length === 0) return NaN;
  if (text.charCodeAt(0) <= 32 || text.charCodeAt(length - 1) <= 32 || text.charCodeAt(length - 1) > 126) {
    text = text.trim();
    if (text.length === 0) return NaN;
  }
  const second = text.charCodeAt(1) | 32;
  if (second === 120 || second === 98 || second === 111) return NaN;
  if (decimal === ",") {
    if (text.includes(".")) return slowNumber(text, decimal, group);
    const comma = text.indexOf(",");
    const value = Number(comma < 0 ? text : text.slice(0, comma) + "." + text.slice(comma + 1));
    return Number.isFinite(value) ? value : slowNumber(text, decimal, group);
  }
  const value = Number(text);
  return Number.isFinite(value) ? value : slowNumber(text, decimal, group);
}

function slowNumber(original: string, decimal: DecimalMark, group: string): number {
  let text = original.trim().replace(MINUS, "-");
  if (!/^[+-]?[\d.,]/.test(text)) return NaN;
  const grouped = GROUPED.exec(text);
  if (grouped !== null) {
    const separators = new Set(grouped[2]!.replace(/\d/g, ""));
    if (separators.size > 1) return NaN;
    text = grouped[1]! + grouped[2]!.replace(/\D/g, "") + (grouped[3] ?? "") + (grouped[4] ?? "");
  }
  if (group !== "" && text.includes(group)) {
    const pattern =
      group === "," ? /^[+-]?\d{1,3}(,\d{3})+(\.\d*)?([eE]|$)/ : /^[+-]?\d{1,3}(\.\d{3})+(,\d*)?([eE]|$)/;
    if (!pattern.test(text)) return NaN;
    text = text.replaceAll(group, "");
  }
  if (decimal === ",") {
    if (text.includes(".")) return NaN;
    text = text.replace(",", ".");
  }
  text = text
    .replace(/^([+-]?[\d.]+)[dD]([+-]?\d+)$/, "$1e$2")
    .replace(/^([+-]?\d*\.\d+)([+-]\d{3})$/, "$1e$2");
  if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(text)) return NaN;
  const value = Number(text);
  return Number.isFinite(value) ? value : NaN;
}

/** The mark between groups of three digits in a cell that is a number, "" where there is none. */
export function groupMarkOf(cell: string, group: string): string {
  // Most cells hold no such mark: look before matching.
  let plain = true;
  for (let i = 1; i < cell.length - 3 && plain; i++) {
    const code = cell.charCodeAt(i);
    plain = code > 39 && code < 127;
  }
  if (plain && group === "") return "";
  const grouped = GROUPED.exec(cell.trim().replace(MINUS, "-"));
  if (grouped !== null) return grouped[2]![0]!;
  return group !== "" && cell.includes(group) ? group : "";
}

const MISSING = /^(n\/?a\.?|#n\/a|na|null|none|missing|k\.?\s?a\.?|fehlt|[-\u2013\u2014]+|\*+|\?+|\.+)$/i;

/** Words and strokes by which a value is said to be missing. */
export function saysMissing(cell: string): boolean {
  return MISSING.test(cell.trim());
}

/** Why a cell that parseNumber refused holds no number. A number too large for a double counts as not finite. */
export function kindOfNoNumber(cell: string): "blank" | "not-finite" | "text" {
  const text = cell.trim();
  if (text === "") return "blank";
  const plain = text.replace(MINUS, "-");
  if (NOT_FINITE.test(plain)) return "not-finite";
  if (/^[+-]?\d+([.,]\d*)?[eEdD]\+?\d{3,}$/.test(plain)) return "not-finite";
  return "text";
}
