import { open, readFile } from "node:fs/promises";
import {
  COMPARISON_SCHEMA,
  RESULT_SCHEMA,
  PROTOCOL_SCHEMA,
  parseResult,
  type RunglineResult,
} from "../../app/protocol/index.ts";
import {
  COMPARISON_CSV_MARK,
  COMPARISON_LATEX_MARK,
  COMPARISON_TEXT_MARK,
  CURVES_CSV_MARK,
  FIGURE_PDF_MARK,
  FIGURE_PNG_MARK,
  FIGURE_SVG_MARK,
  REPORT_HTML_MARK,
  RESULT_CSV_MARK,
  RESULT_LATEX_MARK,
  RESULT_TEXT_MARK,
  SERIES_CURVES_CSV_MARK,
  SUMMARY_MARK,
  SUMMARY_SCHEMA,
} from "../../app/report/index.ts";
import { pathKind } from "./files.ts";

export const FAILURES_SCHEMA = "rungline-failures/1";

export type OutputKind =
  "result" | "protocol" | "summary" | "failures" | "comparison" | "report" | "figure" | "curves";

/** Whether something may be written here: nothing stands there yet, or what stands there is of the same kind. */
export async function mayReplace(file: string, kind: OutputKind): Promise<boolean> {
  const found = await pathKind(file);
  if (found === "none" || found === "other") return true;
  if (found === "folder") return false;
  return (await kindOf(file)) === kind;
}

/** What an existing file is, by its beginning; null where it is none of Rungline's. */
async function kindOf(file: string): Promise<OutputKind | null> {
  const start = await beginning(file);
  if (start === null) return null;
  if (start.startsWith(RESULT_TEXT_MARK) || start.startsWith(RESULT_CSV_MARK)) return "result";
  if (start.startsWith(RESULT_LATEX_MARK)) return "result";
  if (start.startsWith(COMPARISON_LATEX_MARK)) return "comparison";
  if (start.startsWith(REPORT_HTML_MARK)) return "report";
  if (start.startsWith(FIGURE_SVG_MARK)) return "figure";
  if (start.startsWith("%PDF-") && start.includes(FIGURE_PDF_MARK)) return "figure";
  if (start.startsWith("PNG", 1) && start.includes(FIGURE_PNG_MARK)) return "figure";
  if (start.startsWith(CURVES_CSV_MARK) || start.startsWith(SERIES_CURVES_CSV_MARK)) return "curves";
  if (start.startsWith(SUMMARY_MARK)) return "summary";
  if (start.startsWith(COMPARISON_TEXT_MARK) || start.startsWith(COMPARISON_CSV_MARK)) return "comparison";
  const schema = /^\s*\[?\s*\{\s*"schema"\s*:\s*"([^"]*)"/.exec(start)?.[1] ?? "";
  const family = schema.slice(0, schema.lastIndexOf("/"));
  if (family === familyOf(RESULT_SCHEMA)) return "result";
  if (family === familyOf(PROTOCOL_SCHEMA)) return "protocol";
  if (family === familyOf(COMPARISON_SCHEMA)) return "comparison";
  if (family === familyOf(SUMMARY_SCHEMA)) return "summary";
  return family === familyOf(FAILURES_SCHEMA) ? "failures" : null;
}

function familyOf(schema: string): string {
  return schema.slice(0, schema.lastIndexOf("/"));
}

const BEGINNING_BYTES = 1024;

async function beginning(file: string): Promise<string | null> {
  try {
    const handle = await open(file, "r");
    try {
      const { bytesRead, buffer } = await handle.read(Buffer.alloc(BEGINNING_BYTES), 0, BEGINNING_BYTES, 0);
      return buffer.toString("utf8", 0, bytesRead);
    } finally {
      await handle.close();
    }
  } catch {
    return null;
  }
}

/** A result file read back; null where it is absent or breaks the schema. */
export async function readResultFile(file: string): Promise<RunglineResult | null> {
  try {
    const parsed = parseResult(JSON.parse(await readFile(file, "utf8")));
    return parsed.ok ? parsed.value : null;
  } catch {
    return null;
  }
}
