const LONGEST = 18;

/** A long name keeps its beginning and its end. */
export function shortName(name: string): string {
  const letters = Array.from(name);
  return letters.length <= LONGEST ? name : `${letters.slice(0, 9).join("")}…${letters.slice(-8).join("")}`;
}
