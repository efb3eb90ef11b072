import { formatNumber, formatQuantity, scaleQuantity } from "../../app/report/index.ts";
import type { LedgerEntry } from "./ledger-entry.ts";

export const THIN = "\u2009";

/** Value with its uncertainty, and the unit apart, so that each can have its own type. */
export function valueText(
  entry: Pick<LedgerEntry, "quantity" | "scale" | "unit" | "plain" | "exactWord" | "exactDigits">,
): {
  readonly value: string;
  readonly unit: string;
} {
  if (entry.plain !== undefined) return { value: withMinus(entry.plain), unit: entry.unit };
  if (entry.quantity.value === null) return { value: "not determined", unit: "" };
  const { value, sigma, low, high } = scaleQuantity(entry.quantity, entry.scale);
  if (value !== null && (sigma === null || sigma === 0)) {
    // A column of numbers has no room for a clause: a question mark stands for an unknown uncertainty.
    const plain = withMinus(formatNumber(value, sigma === null ? 4 : (entry.exactDigits ?? 8)));
    const word = `(${entry.exactWord ?? "exact"})`;
    const exact = entry.unit === "" ? word : `${entry.unit} ${word}`;
    return sigma === null ? { value: `${plain}(?)`, unit: entry.unit } : { value: plain, unit: exact };
  }
  const text = formatQuantity(value, sigma, "", { low, high, groupSpace: THIN });
  return { value: withMinus(text), unit: entry.unit };
}

/** The minus sign that the axes of the figures use, as wide as a digit; words keep their hyphens. */
export function withMinus(text: string): string {
  return text.replace(/(^|[\s(/])-(?=\d)/g, "$1−");
}

/** What another program reads: plain spaces and hyphens. */
export function plainText(text: string): string {
  return text.replaceAll(THIN, " ").replaceAll("−", "-");
}
