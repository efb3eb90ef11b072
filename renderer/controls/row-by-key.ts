/** Place of the row that a key leads to from place `at` (-1: no row is chosen); -1: none; undefined: the key leads nowhere. */
export function rowByKey(key: string, at: number, rows: number): number | undefined {
  const last = rows - 1;
  switch (key) {
    case "ArrowDown":
      return Math.min(last, at + 1);
    case "ArrowUp":
      return at < 0 ? last : Math.max(0, at - 1);
    case "Home":
      return 0;
    case "End":
      return last;
    case "Escape":
      return -1;
    default:
      return undefined;
  }
}
