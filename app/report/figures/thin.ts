/** More columns than a print can show apart. */
const COLUMNS = 700;

/** Lowest and highest value of each column of the picture, in their order: looks the same and is a fraction of the size. */
export function thinned(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  low: number,
  high: number,
): { readonly x: number[]; readonly y: number[] } {
  const inside: number[] = [];
  for (let i = 0; i < x.length; i++)
    if (x[i]! >= low && x[i]! <= high && Number.isFinite(y[i]!)) inside.push(i);
  let picked = inside;
  if (inside.length > 2 * COLUMNS) {
    picked = [];
    const column = (i: number): number => Math.floor(((x[i]! - low) / (high - low)) * COLUMNS);
    for (let from = 0; from < inside.length;) {
      let to = from;
      let least = from;
      let most = from;
      while (to < inside.length && column(inside[to]!) === column(inside[from]!)) {
        if (y[inside[to]!]! < y[inside[least]!]!) least = to;
        if (y[inside[to]!]! > y[inside[most]!]!) most = to;
        to++;
      }
      picked.push(inside[Math.min(least, most)]!);
      if (least !== most) picked.push(inside[Math.max(least, most)]!);
      from = to;
    }
  }
  return { x: picked.map((i) => x[i]!), y: picked.map((i) => y[i]!) };
}
