import { isKnownUnit, isStrongUnit } from "./unit-text.ts";

export interface ColumnName {
  readonly name: string;
  readonly unit: string;
}

/** Words in brackets that say something else than a unit. */
const NO_UNIT =
  /^(air|vac|vacuum|luft|vakuum|raw|corr|corrected|sample|probe|ref|reference|dark|up|down|left|right|avg|mean|std|err|error|norm|normalised|normalized|smoothed|fit|x|y|z|[a-e]|\d+)\.?$/i;

/**
 * What      A header cell as name and unit, in the ways instruments write them: `Energy (eV)`, `Energy [eV]`,
 *           `Energy / eV`, `Energy in eV`, `Energy, eV`, `energy_eV`, `Energy eV`, `eV`.
 * Domain    A value in the cell (`5 uW`, `P = 20 µW`, `T (5 uW)`) is no unit: the cell stays as written.
 */
export function splitColumnName(header: string): ColumnName {
  const text = header.replace(/\s+/g, " ").trim();
  if (text === "") return { name: "", unit: "" };
  if (isStrongUnit(text)) return { name: "", unit: text };
  const whole = /^[[({<]\s*(.*?)\s*[\])}>]$/.exec(text);
  if (whole !== null && isKnownUnit(whole[1]!)) return { name: "", unit: whole[1]! };
  return bracketed(text) ?? slashed(text) ?? worded(text) ?? { name: text, unit: "" };
}

function bracketed(text: string): ColumnName | null {
  const end = /^(.*\S)\s*([[({<])\s*([^[\](){}<>]*?)\s*[\])}>]$/.exec(text);
  if (end !== null) {
    const [, before, bracket, inside] = end as unknown as [string, string, string, string];
    if (isKnownUnit(inside)) return { name: before, unit: inside };
    // `Wavelength (nm, air)`: the unit, then a remark that must not be lost.
    const remark =
      /^([^,;]+)[,;]\s*(.+)$/.exec(inside) ?? /^(\S+)\s+(in |air|vac|luft|vak)(.*)$/i.exec(inside);
    if (remark !== null && isStrongUnit(remark[1]!))
      return { name: `${before} (${(remark[2]! + (remark[3] ?? "")).trim()})`, unit: remark[1]! };
    if (isFunction(before) || /\d\s*\S/.test(inside) || inside === "") return null;
    if (bracket === "[") return { name: before, unit: inside };
    if (/\s/.test(inside) || inside.length > 8 || NO_UNIT.test(inside)) return null;
    return /\s[[({<]/.test(text) ? { name: before, unit: inside } : null;
  }
  // `Wavelength (nm) air`, `T(%) corrected`
  const middle = /^(.*?\S)\s*[[({<]\s*([^[\](){}<>]*?)\s*[\])}>]\s*(\S.*)$/.exec(text);
  if (middle !== null && isKnownUnit(middle[2]!))
    return { name: `${middle[1]!} ${middle[3]!}`, unit: middle[2]! };
  return null;
}

function isFunction(before: string): boolean {
  return /(^|[^\p{L}])-?(log|log10|lg|ln|exp|sqrt|f)$/iu.test(before);
}

function slashed(text: string): ColumnName | null {
  // From the first slash on, because the unit may hold one itself: `alpha / 1/cm`.
  for (let at = text.indexOf("/"); at > 0; at = text.indexOf("/", at + 1)) {
    const name = text.slice(0, at).trim();
    const unit = text.slice(at + 1).trim();
    if (name === "" || unit === "" || hasValue(name)) continue;
    // 1/cm in `alpha 1/cm` is one unit; a lone letter after a tight slash (I/T) is more likely a quotient.
    if (/(^|[\s_])1$/.test(name)) continue;
    const spaced = /\s/.test(text[at - 1]!) || /\s/.test(text[at + 1]!);
    if (isStrongUnit(unit) || (isKnownUnit(unit) && (spaced || unit.length > 1 || unit === "K")))
      return { name, unit };
  }
  return null;
}

function worded(text: string): ColumnName | null {
  const inWord = /^(.*\S)\s+(?:in|en)\s+(\S+(?: units)?)$/i.exec(text);
  if (inWord !== null && isKnownUnit(inWord[2]!)) return { name: inWord[1]!, unit: inWord[2]! };
  const comma = /^(.*[^\s,])\s*,\s*(\S+)$/.exec(text);
  if (comma !== null && isKnownUnit(comma[2]!) && !hasValue(comma[1]!))
    return { name: comma[1]!, unit: comma[2]! };
  const per = /^(.*[^\s_])[\s_]per[\s_](cm|mm|um|m)$/i.exec(text);
  if (per !== null) return { name: per[1]!, unit: `per ${per[2]!}` };
  const underscore = /^(.*[^_])_([^_]+)$/.exec(text);
  if (underscore !== null && !hasValue(underscore[1]!)) {
    const unit = underscore[2]!;
    if (isStrongUnit(unit) || /^(percent|pct|uW|mW|µW|μW|K|cps|counts)$/.test(unit))
      return { name: underscore[1]!, unit };
    if (/^(invcm|cm1)$/i.test(unit)) return { name: underscore[1]!, unit: "cm-1" };
  }
  const space = /^(.*\S)\s+(\S+)$/.exec(text);
  if (space !== null && isStrongUnit(space[2]!) && !hasValue(space[1]!))
    return { name: space[1]!, unit: space[2]! };
  return null;
}

/** The text ends with a number, so that what follows is the unit of that value and not of the column. */
function hasValue(text: string): boolean {
  return /(^|[\s=:_~≈])[+-]?\d+([.,]\d+)?$/.test(text);
}
