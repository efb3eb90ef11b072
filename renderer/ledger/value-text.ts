import { formatQuantity, scaleQuantity } from "../../app/report/index.ts";
import type { LedgerEntry } from "./ledger-entry.ts";

export const THIN = "\u2009";

/** Value with its uncertainty, and the unit apart, so that each can have its own type. */
export function valueText(entry: Pick<LedgerEntry, "quantity" | "scale" | "unit" | "plain">): {
  readonly value: string;
  readonly unit: string;
} {
  if (entry.plain !== undefined) return { value: entry.plain, unit: entry.unit };
  if (entry.quantity.value === null) return { value: "not determined", unit: "" };
  const { value, sigma, low, high } = scaleQuantity(entry.quantity, entry.scale);
  return { value: formatQuantity(value, sigma, "", { low, high, groupSpace: THIN }), unit: entry.unit };
}
