/** A number as people type it, with point or comma; null where it is none. */
export function parseNumber(text: string): number | null {
  const value = Number(text.replace(",", "."));
  return text === "" || !Number.isFinite(value) ? null : value;
}
