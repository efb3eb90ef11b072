import { commentMarkOf, withoutMark } from "./comment-mark.ts";
import { lineText } from "./text-lines.ts";
import type { TextLines } from "./text-lines.ts";

/** One line, or several where a quoted field holds line endings. */
export interface TextRecord {
  /** 1-based line where it begins. */
  readonly line: number;
  readonly text: string;
  /** The comment mark, "" where it is no comment. */
  readonly mark: string;
}

const MOST_JOINED = 6;

/** Records that begin on lines [from, to), 0-based; `next` is the first line not taken. */
export function readRecords(
  lines: TextLines,
  from: number,
  to: number,
): { readonly records: TextRecord[]; readonly next: number } {
  const records: TextRecord[] = [];
  let i = from;
  while (i < to) {
    const text = lineText(lines, i);
    const mark = commentMarkOf(text);
    const joined = mark === "" || mark === '"' ? joinQuoted(lines, i, text) : null;
    if (joined !== null) {
      records.push({ line: i + 1, text: joined.text, mark: "" });
      i += joined.count;
    } else {
      records.push({ line: i + 1, text, mark });
      i++;
    }
  }
  return { records, next: i };
}

/** A field opened by a quote and closed on a later line, before a separator or the end of that line. */
function joinQuoted(lines: TextLines, i: number, first: string): { text: string; count: number } | null {
  if (!first.includes('"') || first.split('"').length % 2 === 1) return null;
  if (!/(^|[,;\t ])"[^"]*$/.test(first)) return null;
  let text = first;
  for (let k = 1; k < MOST_JOINED && i + k < lines.count; k++) {
    const next = lineText(lines, i + k);
    text += "\n" + next;
    // A doubled quote is a character of the field and closes nothing.
    const bare = next.replace(/""/g, "");
    if (!bare.includes('"')) continue;
    return /^[^"]*" *([,;\t]|$)/.test(bare) && bare.split('"').length % 2 === 0
      ? { text, count: k + 1 }
      : null;
  }
  return null;
}

/** The words of a record, without its comment mark. */
export function wordsOf(record: TextRecord): string {
  return record.mark === "" ? record.text.trim() : withoutMark(record.text, record.mark);
}
