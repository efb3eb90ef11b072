export type Align = "left" | "right";

/** Rows of text as columns of equal width, two spaces apart; width counted in characters. */
export function textTable(
  rows: readonly (readonly string[])[],
  align: readonly Align[],
  indent = "  ",
): string[] {
  const widths = align.map((_, j) => Math.max(0, ...rows.map((row) => characters(row[j] ?? ""))));
  return rows.map((row) =>
    (
      indent +
      align
        .map((side, j) => {
          const cell = row[j] ?? "";
          const gap = " ".repeat(widths[j]! - characters(cell));
          return side === "left" ? cell + gap : gap + cell;
        })
        .join("  ")
    ).trimEnd(),
  );
}

function characters(text: string): number {
  return Array.from(text).length;
}

/** Breaks a paragraph at spaces; later lines are indented to stand under the first word. */
export function wrap(text: string, indent: string, width = 100): string[] {
  const lines: string[] = [];
  let line = "";
  for (const word of text.split(/\s+/).filter((one) => one !== "")) {
    if (line !== "" && characters(indent) + characters(line) + 1 + characters(word) > width) {
      lines.push(line);
      line = word;
    } else line = line === "" ? word : `${line} ${word}`;
  }
  lines.push(line);
  return lines.map((one) => indent + one);
}

/** `Label     text`, the text wrapped under itself. */
export function labelled(label: string, text: string, labelWidth = 12): string[] {
  const lines = wrap(text, " ".repeat(labelWidth));
  lines[0] = label.padEnd(labelWidth) + lines[0]!.slice(labelWidth);
  return lines;
}
