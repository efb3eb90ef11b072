/** One line of RFC 4180 (2005): fields quoted where they hold a comma, a quote or a line break; CRLF at the end. */
export function csvLine(fields: readonly (string | number | boolean | null)[]): string {
  return `${fields.map(csvField).join(",")}\r\n`;
}

function csvField(field: string | number | boolean | null): string {
  if (field === null) return "";
  // The shortest text that reads back to the same double: full precision without false digits.
  const text = String(field);
  return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
