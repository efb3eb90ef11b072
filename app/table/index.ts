export * from "./types.ts";
export { readTable } from "./read-table.ts";
export { wordTableIssue } from "./wording.ts";
export { splitColumnName } from "./column-name.ts";
export type { ColumnName } from "./column-name.ts";
export { makeFact } from "./header-fact.ts";
export { readTextTable, type TextTable } from "./read-text-table.ts";
