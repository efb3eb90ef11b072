/** `2-9, 11` to a list; empty: found by the program. */
export function parseList(text: string): number[] | "auto" | null {
  if (text === "" || text === "auto") return "auto";
  const list = new Set<number>();
  for (const part of text.split(/[\s,;]+/).filter((one) => one !== "")) {
    const match = /^(\d{1,2})(?:[-–](\d{1,2}))?$/.exec(part);
    if (match === null) return null;
    const from = Number(match[1]);
    const to = Number(match[2] ?? match[1]);
    if (from < 1 || to < from) return null;
    for (let n = from; n <= to; n++) list.add(n);
  }
  return [...list].sort((a, b) => a - b);
}
