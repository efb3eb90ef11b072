import { readTable } from "../../../app/table/index.ts";
import type { Table, TableChoices, TableIssue } from "../../../app/table/index.ts";

export function tableOf(text: string, choices: TableChoices = {}): Table {
  const result = readTable("test.csv", new TextEncoder().encode(text), choices);
  if (!result.ok) throw new Error(JSON.stringify(result.issues));
  return result.value;
}

export function issueOf(input: string | Uint8Array, choices: TableChoices = {}): TableIssue {
  const bytes = typeof input === "string" ? new TextEncoder().encode(input) : input;
  const result = readTable("test.csv", bytes, choices);
  if (result.ok) throw new Error("read as a table");
  return result.issues[0]!;
}

export function rowsOf(table: Table): number[][] {
  return Array.from({ length: table.rows }, (_, i) => table.columns.map((column) => column.values[i]!));
}

/** Skipped entries as [line, column, reason]. */
export function skippedOf(table: Table): (string | number | null)[][] {
  return table.skipped.map((entry) => [entry.line, entry.column, entry.reason]);
}
