import type { LineEnding } from "./types.ts";

/** Text with every line ending turned into a line feed, and where each line begins. */
export interface TextLines {
  readonly text: string;
  readonly count: number;
  /** (count + 1): start of each line; the last entry is one past the end of the last line's line feed. */
  readonly starts: Int32Array;
  readonly lineEnding: LineEnding;
  /** False where the file stops without a line ending. */
  readonly endsWithNewline: boolean;
}

export function lineText(lines: TextLines, i: number): string {
  return lines.text.slice(lines.starts[i]!, lines.starts[i + 1]! - 1);
}

function nameEnding(text: string): LineEnding {
  let crlf = 0;
  let cr = 0;
  let lf = 0;
  for (let at = text.indexOf("\r"); at >= 0; at = text.indexOf("\r", at + 1)) {
    const next = text.charCodeAt(at + 1);
    if (next === 10) crlf++;
    else if (next !== 13) cr++;
  }
  for (let at = text.indexOf("\n"); at >= 0; at = text.indexOf("\n", at + 1)) lf++;
  lf -= crlf;
  const kinds = Number(crlf > 0) + Number(cr > 0) + Number(lf > 0);
  if (kinds === 0) return "none";
  if (kinds > 1) return "mixed";
  return crlf > 0 ? "CRLF" : cr > 0 ? "CR" : "LF";
}

/** CRLF, CR and LF each end a line; a carriage return doubled before a line feed is one ending. */
export function splitLines(original: string): TextLines {
  let text = original;
  // The end-of-file mark of old systems is no content.
  while (text.endsWith("\u001a") || text.endsWith("\0")) text = text.slice(0, -1);
  let lineEnding: LineEnding;
  if (text.includes("\r")) {
    lineEnding = nameEnding(text);
    text = text.replace(/\r+\n|\r/g, "\n");
  } else lineEnding = text.includes("\n") ? "LF" : "none";
  let starts = new Int32Array(Math.max(16, Math.ceil(text.length / 16)));
  let count = 0;
  let from = 0;
  const push = (start: number): void => {
    if (count + 1 >= starts.length) {
      const larger = new Int32Array(starts.length * 2);
      larger.set(starts);
      starts = larger;
    }
    starts[count++] = start;
  };
  for (let at = text.indexOf("\n"); at >= 0; at = text.indexOf("\n", from)) {
    push(from);
    from = at + 1;
  }
  const endsWithNewline = from === text.length && count > 0;
  if (from < text.length) {
    push(from);
    from = text.length + 1;
  }
  starts[count] = from;
  return { text, count, starts: starts.subarray(0, count + 1), lineEnding, endsWithNewline };
}
