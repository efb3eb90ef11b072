/** A run of characters in one style. */
export interface TextRun {
  readonly text: string;
  readonly style: "plain" | "italic" | "sub" | "sup";
}

/**
 * What      A title as runs: `*E*` italic (symbols of quantities, ISO 80000-1), `_{n}` below, `^{-1}` above the line.
 *           One spelling for figures, HTML and LaTeX.
 */
export function richText(marked: string): readonly TextRun[] {
  const runs: TextRun[] = [];
  for (const match of marked.matchAll(/\*([^*]+)\*|_\{([^}]*)\}|\^\{([^}]*)\}|([^*_^]+|[*_^])/g)) {
    const [, italic, sub, sup, plain] = match;
    if (italic !== undefined) runs.push({ text: italic, style: "italic" });
    else if (sub !== undefined) runs.push({ text: sub, style: "sub" });
    else if (sup !== undefined) runs.push({ text: sup, style: "sup" });
    else runs.push({ text: plain!, style: "plain" });
  }
  return runs;
}

export function escapeMarkup(text: string): string {
  return text
    .replaceAll("&", "&amp;")
    .replaceAll("<", "&lt;")
    .replaceAll(">", "&gt;")
    .replaceAll('"', "&quot;");
}

const HTML_TAGS = { italic: "i", sub: "sub", sup: "sup" } as const;

export function richToHtml(marked: string): string {
  return richText(marked)
    .map(({ text, style }) =>
      style === "plain"
        ? escapeMarkup(text)
        : `<${HTML_TAGS[style]}>${escapeMarkup(text)}</${HTML_TAGS[style]}>`,
    )
    .join("");
}

/** The same without any marks, for names of files and for readers of the screen. */
export function richToPlain(marked: string): string {
  return richText(marked)
    .map(({ text }) => text)
    .join("");
}
