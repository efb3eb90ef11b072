/**
 * What      The header nearest to a word by edit distance, or null where none is near.
 * Source    Levenshtein, Sov. Phys. Dokl. 10, 707 (1966).
 */
export function nearestHeader(word: string, headers: readonly string[]): string | null {
  let best: string | null = null;
  let least = Math.max(2, Math.floor(word.length / 2)) + 1;
  for (const header of headers) {
    if (header === "") continue;
    const distance = editDistance(word.toLowerCase(), header.toLowerCase());
    if (distance < least) {
      least = distance;
      best = header;
    }
  }
  return best;
}

function editDistance(a: string, b: string): number {
  let above = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++)
      row.push(
        Math.min(
          above[j]! + 1,
          row[j - 1]! + 1,
          above[j - 1]! + (a.charAt(i - 1) === b.charAt(j - 1) ? 0 : 1),
        ),
      );
    above = row;
  }
  return above[b.length]!;
}
