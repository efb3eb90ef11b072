import { success, type Result } from "../base/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { SkippedRow } from "../table/index.ts";
import { readFile, type FileRequest, type TaskIssue } from "./analyse-file.ts";

/** How a file was read: for `rungline inspect` and the stage Read. Plain data, fit for a message. */
export interface Inspection {
  readonly file: string;
  readonly rows: number;
  readonly headers: readonly string[];
  /** The first rows as read, for a look at the table. */
  readonly preview: readonly (readonly number[])[];
  readonly skipped: readonly SkippedRow[];
  readonly spectrum: Spectrum;
}

const PREVIEW_ROWS = 12;

export function inspectFile(request: FileRequest): Result<Inspection, TaskIssue> {
  const read = readFile(request);
  if (!read.ok) return read;
  const { table, spectrum } = read.value;
  const rows = Math.min(table.rows, PREVIEW_ROWS);
  return success({
    file: request.file,
    rows: table.rows,
    headers: table.columns.map((column) => column.header),
    preview: Array.from({ length: rows }, (_, i) => table.columns.map((column) => column.values[i]!)),
    skipped: table.skipped,
    spectrum,
  });
}
