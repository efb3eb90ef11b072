import { failure, nearestWord, success, type Result } from "../base/index.ts";
import type { Table, TableColumn } from "../table/index.ts";
import { plainWords } from "./header-words.ts";
import type { SpectrumIssue } from "./issue.ts";

/** The column that the choices name by its 1-based number, its header as written, or its name without the unit. */
export function findColumn(
  table: Table,
  key: string,
  wanted: number | string,
): Result<TableColumn, SpectrumIssue> {
  const number = typeof wanted === "number" ? wanted : null;
  const found =
    number !== null
      ? table.columns.find((column) => column.index === number)
      : (table.columns.find((column) => column.header === wanted) ??
        table.columns.find((column) => column.name === wanted) ??
        table.columns.find((column) => sameWords(column.header, wanted as string)) ??
        table.columns.find((column) => sameWords(column.name, wanted as string)));
  if (found !== undefined) return success(found);
  const names = table.columns.flatMap((column) => [column.header, column.name]);
  return failure({
    code: "spectrum/unknown-column",
    facts: {
      file: table.file,
      key,
      found: wanted,
      nearest:
        number !== null
          ? null
          : nearestWord(
              String(wanted),
              names.filter((name) => name !== ""),
            ),
      columns: table.columns.map(describeColumn).join(", "),
    },
  });
}

function sameWords(a: string, b: string): boolean {
  return a !== "" && plainWords(a) === plainWords(b);
}

/** `column 2 "T (%)"`, or `column 2` where there is no header. */
export function describeColumn(column: TableColumn): string {
  return column.header === "" ? `column ${column.index}` : `column ${column.index} "${column.header}"`;
}
