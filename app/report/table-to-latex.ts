import type { Cell, DataColumn, DataTable } from "./data-table.ts";
import { formatNumber, formatQuantity, NOT_DETERMINED_WORDS } from "./format-quantity.ts";
import { richText } from "./rich-text.ts";

/** Tables for a paper under a first line that names them: they need the packages siunitx (version 3) and booktabs. */
export function tablesToLatex(mark: string, tables: readonly DataTable[]): string {
  return `${mark}\n% \\usepackage{siunitx,booktabs}\n${tables.map(tableToLatex).join("\n")}`;
}

export function tableToLatex(table: DataTable): string {
  const cells = table.rows.map((row) => row.map((cell, i) => cellToLatex(cell, table.columns[i]!)));
  const kinds = table.columns.map((column, i) =>
    column.kind === "numbers" ? `S[table-format=${tableFormat(cells.map((row) => row[i]!))}]` : "l",
  );
  const head = table.columns.map((column) => `{${headOf(column)}}`);
  return [
    "\\begin{table}",
    `  \\caption{${richToLatex(table.title)}${table.remarks.length > 0 ? "." : ""}${table.remarks.map((remark) => ` ${richToLatex(remark)}`).join("")}}`,
    `  \\label{tab:${table.name}}`,
    `  \\begin{tabular}{${kinds.join(" ")}}`,
    "    \\toprule",
    `    ${head.join(" & ")} \\\\`,
    "    \\midrule",
    ...cells.map((row) => `    ${row.join(" & ")} \\\\`),
    "    \\bottomrule",
    "  \\end{tabular}",
    "\\end{table}",
    "",
  ].join("\n");
}

function headOf({ head, unit }: DataColumn): string {
  return unit === "" ? richToLatex(head) : `${richToLatex(head)} / ${unitToLatex(unit, "\\unit")}`;
}

function cellToLatex(cell: Cell, column: DataColumn): string {
  const inNumbers = column.kind === "numbers";
  const asText = (text: string): string => (inNumbers ? `{${escapeLatex(text)}}` : escapeLatex(text));
  switch (cell.kind) {
    case "text":
      return asText(cell.text);
    case "number": {
      const text = numberOf(formatNumber(cell.value, cell.digits));
      return cell.value === null ? asText(NOT_DETERMINED_WORDS) : inNumbers ? text : `\\num{${text}}`;
    }
    case "quantity": {
      const number = latexNumber(cell.quantity.value, cell.quantity.sigma);
      if (number === null) return asText(NOT_DETERMINED_WORDS);
      if (inNumbers)
        return cell.mark === "" ? number : `${number}\\textsuperscript{${escapeLatex(cell.mark.trim())}}`;
      const shown =
        cell.unit === null || cell.unit === ""
          ? `\\num{${number}}`
          : `\\qty{${number}}${unitToLatex(cell.unit, "")}`;
      return `${shown}${heldOrUnknown(cell.quantity.sigma)}`;
    }
  }
}

/** In a cell of its own a number without an error says why it has none. */
function heldOrUnknown(sigma: number | null): string {
  return sigma === null ? " (uncertainty unknown)" : sigma > 0 ? "" : " (held)";
}

/**
 * What      A value with its standard error as siunitx reads it: `2.17204979(15)`, `98.7 +- 1.2` where the error reaches
 *           across the decimal mark, `1.23(4)e-7`. Rounded as formatQuantity rounds. Null where not determined.
 * Source    J. Wright, siunitx: A comprehensive (SI) units package, version 3, section "Numbers".
 */
export function latexNumber(value: number | null, sigma: number | null): string | null {
  if (value === null || !Number.isFinite(value)) return null;
  const text = numberOf(
    formatQuantity(value, sigma, "", { groupSpace: "" }).replace(/ \((exact|uncertainty unknown)\)$/, ""),
  );
  const parts = /^(-?[\d.]+)\(([\d.]+)\)(.*)$/.exec(text);
  if (parts === null) return text;
  const [, number, error, power] = parts as unknown as [string, string, string, string];
  // In siunitx a bracket counts in units of the last place.
  const crosses = error.includes(".") || (number.includes(".") ? false : error.length > 0);
  return crosses && error.includes(".") ? `${number} +- ${error}${power}` : `${number}(${error})${power}`;
}

const SUPERSCRIPTS = "⁰¹²³⁴⁵⁶⁷⁸⁹";

/** ` × 10⁻⁷` as `e-7`, a true minus as a hyphen. */
function numberOf(text: string): string {
  return text
    .replace(/ × 10([⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+)/, (_, power: string) => {
      const digits = Array.from(power, (c) => (c === "⁻" ? "-" : String(SUPERSCRIPTS.indexOf(c)))).join("");
      return `e${digits}`;
    })
    .replace(/^−/, "-");
}

/** Room for the widest number of a column: digits before and after the mark, of the error, of the power. */
function tableFormat(cells: readonly string[]): string {
  let [whole, decimals, error, power, sign] = [1, 0, 0, 0, ""];
  for (const cell of cells) {
    const match = /^(-?)(\d+)(?:\.(\d+))?(?:\((\d+)\)| \+- ([\d.]+))?(?:e(-?\d+))?/.exec(cell);
    if (match === null) continue;
    if (match[1] === "-") sign = "-";
    whole = Math.max(whole, match[2]!.length);
    decimals = Math.max(decimals, match[3]?.length ?? 0);
    error = Math.max(error, (match[4] ?? match[5]?.replace(".", "") ?? "").length);
    power = Math.max(power, match[6]?.length ?? 0);
  }
  return `${sign}${whole}${decimals > 0 ? `.${decimals}` : ""}${error > 0 ? `(${error})` : ""}${power > 0 ? `e${power > 1 ? "-" : ""}${Math.max(1, power - 1)}` : ""}`;
}

const UNITS: Readonly<Record<string, string>> = {
  eV: "\\electronvolt",
  meV: "\\milli\\electronvolt",
  µeV: "\\micro\\electronvolt",
  nm: "\\nano\\metre",
  µm: "\\micro\\metre",
  cm: "\\centi\\metre",
  ps: "\\pico\\second",
  K: "\\kelvin",
  µW: "\\micro\\watt",
  uW: "\\micro\\watt",
};

/** `eV/cm`, `1/cm`, `µm^3`, `1/µW` in the macros of siunitx; what is not known is set as words. */
export function unitToLatex(unit: string, command: string): string {
  const [over, under] = unit.replace(/[(){}]/g, "").split("/") as [string, string | undefined];
  const macro = (part: string): string | null => {
    const match = /^(\p{L}+)(?:\^(\d)|([²³]))?$/u.exec(part.trim());
    const known = match === null ? undefined : UNITS[match[1]!];
    if (known === undefined) return null;
    const power = match![2] ?? (match![3] === "²" ? "2" : match![3] === "³" ? "3" : "");
    return power === ""
      ? known
      : power === "2"
        ? `${known}\\squared`
        : power === "3"
          ? `${known}\\cubed`
          : `${known}\\tothe{${power}}`;
  };
  const top = over.trim() === "1" ? "" : macro(over);
  const bottom = under === undefined ? "" : macro(under);
  if (top === null || bottom === null) return `${command}{\\text{${escapeLatex(unit)}}}`;
  return `${command}{${top}${bottom === "" ? "" : `\\per${bottom}`}}`;
}

const GREEK: Readonly<Record<string, string>> = {
  δ: "\\delta ",
  Γ: "\\Gamma ",
  α: "\\alpha ",
  σ: "\\sigma ",
  τ: "\\tau ",
  Θ: "\\Theta ",
  β: "\\beta ",
};

export function richToLatex(marked: string): string {
  return richText(marked)
    .map(({ text, style }) => {
      const math = text.replace(/[δΓασ τΘβ]/g, (c) => GREEK[c] ?? c).replaceAll("−", "-");
      if (style === "plain") return escapeLatex(text);
      if (style === "italic") return `$${math.trim()}$`;
      return `$${style === "sub" ? "_" : "^"}{${/^[a-z]$/i.test(text) || /\d/.test(text) ? math : `\\mathrm{${math}}`}}$`;
    })
    .join("")
    .replaceAll("$$", "");
}

const SPECIAL: Readonly<Record<string, string>> = {
  "\\": "\\textbackslash{}",
  "~": "\\textasciitilde{}",
  "^": "\\textasciicircum{}",
  "−": "$-$",
  "±": "$\\pm$",
  "×": "$\\times$",
  µ: "\\textmu{}",
  "\u00a0": "~",
};

/** Words as they are: every mark that LaTeX would obey is set as a character, in one pass. */
export function escapeLatex(text: string): string {
  return text.replace(/[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+|[\\~^&%$#_{}−±×µ\u00a0]/g, (part) => {
    const raised = Array.from(part, (c) => (c === "⁻" ? "-" : SUPERSCRIPTS.indexOf(c)));
    if (raised.every((digit) => digit !== -1)) return `$^{${raised.join("")}}$`;
    return SPECIAL[part] ?? `\\${part}`;
  });
}
