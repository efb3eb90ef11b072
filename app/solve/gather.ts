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
  return weighRows(columns, count, weight, 0, weight.length);
}

/** The same for a block of rows: columns (height x count) of the rows from `first` on. */
export function weighRows(
  columns: Float64Array,
  count: number,
  weight: Float64Array,
  first: number,
  height: number,
): boolean {
  // Two sums of what would be NaN, so that one addition need not wait for the other.
  let even = 0;
  let odd = 0;
  for (let j = 0; j < count; j++) {
    const at = j * height;
    let r = 0;
    for (; r + 1 < height; r += 2) {
      const a = columns[at + r]! * weight[first + r]!;
      const b = columns[at + r + 1]! * weight[first + r + 1]!;
      columns[at + r] = a;
      columns[at + r + 1] = b;
      even += a * 0;
      odd += b * 0;
    }
    if (r < height) {
      const a = columns[at + r]! * weight[first + r]!;
      columns[at + r] = a;
      even += a * 0;
    }
  }
  return even + odd === 0;
}
