/**
 * The mark by which a line says that it is a comment, "" if it is none. A semicolon or a star before numbers may be
 * an empty first field, and a quote usually opens one, so these count only where the rest is words.
 */
export function commentMarkOf(line: string): string {
  const text = line.trimStart();
  const first = text.charCodeAt(0);
  if (first === 35) return /^#+/.exec(text)![0];
  if (first === 37) return /^%+/.exec(text)![0];
  if (first === 33) return "!";
  if (first === 47 && text.charCodeAt(1) === 47) return "//";
  if (first === 42) return /^\*+/.exec(text)![0];
  if (first === 59)
    return /^;+\s*(?:[\d.,+-]|nan|inf|;|"|$)/i.test(text) || text.split(";").length > 2 ? "" : ";";
  if (first === 34) return text.split('"').length === 2 ? '"' : "";
  return "";
}

export function isCommentStart(code: number): boolean {
  return (
    code === 35 || code === 37 || code === 33 || code === 47 || code === 42 || code === 59 || code === 34
  );
}

/** The comment without its mark; `%T` is a header of per cent transmission and keeps its sign. */
export function withoutMark(line: string, mark: string): string {
  const text = line.trim();
  if (mark === "%" && /^%\s?[TRA]\b/.test(text)) return text;
  return text.slice(mark.length).trim();
}
