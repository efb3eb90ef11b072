/** Weighted rows of the columns that are in use; false where one of them is not finite. */
export function gather(
  raw: Float64Array,
  rawRows: number,
  count: number,
  used: Int32Array,
  weight: Float64Array,
  out: Float64Array,
): boolean {
  const m = used.length;
  let check = 0;
  for (let j = 0; j < count; j++) {
    const from = j * rawRows;
    const to = j * m;
    if (m === rawRows) {
      for (let r = 0; r < m; r++) {
        const value = raw[from + r]! * weight[r]!;
        out[to + r] = value;
        check += value * 0;
      }
    } else {
      for (let r = 0; r < m; r++) {
        const value = raw[from + used[r]!]! * weight[r]!;
        out[to + r] = value;
        check += value * 0;
      }
    }
  }
  return check === 0;
}

/** The same in place, where every row is in use. */
export function weigh(columns: Float64Array, count: number, weight: Float64Array): boolean {
  const m = weight.length;
  let check = 0;
  for (let j = 0; j < count; j++) {
    const at = j * m;
    for (let r = 0; r < m; r++) {
      const value = columns[at + r]! * weight[r]!;
      columns[at + r] = value;
      check += value * 0;
    }
  }
  return check === 0;
}
