/** A list of powers in µW as typed: `1, 2, 5` or `0,5; 1; 2`; "read" where nothing is typed, null where it is no such list. */
export function parsePowers(text: string): readonly number[] | "read" | null {
  if (text.trim() === "") return "read";
  // A comma between digits is a decimal mark where semicolons or spaces part the powers, else it parts them.
  const parts = (
    /[;\s]/.test(text) && !/,\s/.test(text) ? text.split(/[;\s]+/) : text.split(/[,;\s]+/)
  ).filter((part) => part !== "");
  const values = parts.map((part) => Number(part.replace(",", ".")));
  return values.length < 2 || values.some((value) => !Number.isFinite(value) || value < 0) ? null : values;
}
