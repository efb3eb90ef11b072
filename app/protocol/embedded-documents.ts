const EMBEDDED = /<script\b[^>]*\btype=["']?application\/json["']?[^>]*>([\s\S]*?)<\/script>/gi;

/** The JSON documents in a text: the text itself, or the data parts of an HTML file. Throws SyntaxError where it is neither. */
export function embeddedDocuments(text: string): readonly unknown[] {
  const bare = text.replace(/^\uFEFF/, "");
  if (!bare.trimStart().startsWith("<")) return [JSON.parse(bare)];
  return Array.from(bare.matchAll(EMBEDDED), (match): unknown => JSON.parse(match[1]!));
}
