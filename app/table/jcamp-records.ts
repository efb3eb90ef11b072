import { lineText, type TextLines } from "./text-lines.ts";

/** One labelled data record: `##LABEL= text`, with the lines that follow it. */
export interface LabelledRecord {
  /** Capitals without spaces, hyphens, slashes and underlines: by this two labels are the same. */
  readonly label: string;
  readonly written: string;
  /** Text behind the label and below it, comments taken off; one entry a line, with its number. */
  readonly lines: readonly { readonly line: number; readonly text: string }[];
  readonly line: number;
}

export interface JcampBlock {
  readonly title: string;
  readonly line: number;
  readonly records: readonly LabelledRecord[];
  readonly ended: boolean;
}

/**
 * Blocks from `##TITLE=` to `##END=`, those inside others too, in the order of their titles, and the comments
 * (`$$ text`, `##= text`).
 */
export function readRecords(lines: TextLines): {
  blocks: readonly JcampBlock[];
  comments: readonly string[];
} {
  type Open = { title: string; line: number; records: LabelledRecord[]; ended: boolean };
  const blocks: Open[] = [];
  const open: Open[] = [];
  const comments: string[] = [];
  let into: { line: number; text: string }[] | null = null;
  for (let i = 0; i < lines.count; i++) {
    const whole = lineText(lines, i);
    const dollars = whole.indexOf("$$");
    const text = dollars < 0 ? whole : whole.slice(0, dollars);
    if (dollars >= 0 && whole.slice(dollars + 2).trim() !== "")
      comments.push(whole.slice(dollars + 2).trim());
    const start = /^\s*##([^=]*)=(.*)$/.exec(text);
    if (start === null) {
      if (text.trim() !== "") into?.push({ line: i + 1, text: text.trim() });
      continue;
    }
    const written = start[1]!.trim();
    const label = written.toUpperCase().replace(/[\s\-/\\_]/g, "");
    const value = start[2]!.trim();
    into = null;
    if (label === "") {
      if (value !== "") comments.push(value);
    } else if (label === "TITLE") {
      const block: Open = { title: value, line: i + 1, records: [], ended: false };
      blocks.push(block);
      open.push(block);
    } else if (label === "END") {
      const block = open.pop();
      if (block !== undefined) block.ended = true;
    } else {
      into = value === "" ? [] : [{ line: i + 1, text: value }];
      open.at(-1)?.records.push({ label, written, lines: into, line: i + 1 });
    }
  }
  return { blocks, comments };
}
