import type { LineQuantity, LineTable } from "./types.ts";

/** Where a quantity of line `line` (index in n) in spectrum `spectrum` stands in values and covariance. */
export function placeOf(
  table: { readonly n: readonly number[]; readonly power_uW: readonly number[] },
  quantity: LineQuantity,
  spectrum: number,
  line: number,
): number {
  return (quantity * table.power_uW.length + spectrum) * table.n.length + line;
}

/**
 * What      Adds the peaks to energies, widths and areas: h = A (1 + root)/(pi G), root = sqrt(1 + 4 q^2), the highest
 *           point of a line without instrument, and their covariance to first order. q is taken as exact: shared by
 *           all powers, it cancels in the fall of a peak.
 * Shapes    values (3 m k) and covariance (3mk x 3mk, row-major) at `placeOf`, without the last quantity; asymmetry (k).
 */
export function withPeaks(
  n: readonly number[],
  power_uW: readonly number[],
  values: Float64Array,
  covariance: Float64Array,
  asymmetry: ArrayLike<number>,
): LineTable {
  const m = power_uW.length;
  const k = n.length;
  const block = m * k;
  const size = 4 * block;
  const out = new Float64Array(size);
  out.set(values.subarray(0, 3 * block));
  // d h/d(width, area) of each peak, at the same spectrum and line.
  const byWidth = new Float64Array(block);
  const byArea = new Float64Array(block);
  for (let at = 0; at < block; at++) {
    const q = asymmetry[at % k]!;
    const width = values[block + at]!;
    const per = (1 + Math.sqrt(1 + 4 * q * q)) / (Math.PI * width);
    const peak = per * values[2 * block + at]!;
    out[3 * block + at] = peak;
    byArea[at] = Number.isFinite(per) ? per : 0;
    byWidth[at] = Number.isFinite(peak) ? -peak / width : 0;
  }
  const full = new Float64Array(size * size);
  const old = 3 * block;
  for (let i = 0; i < old; i++) full.set(covariance.subarray(i * old, (i + 1) * old), i * size);
  for (let i = 0; i < old; i++) {
    for (let at = 0; at < block; at++) {
      const cross =
        byWidth[at]! * covariance[i * old + block + at]! +
        byArea[at]! * covariance[i * old + 2 * block + at]!;
      full[i * size + old + at] = cross;
      full[(old + at) * size + i] = cross;
    }
  }
  for (let at = 0; at < block; at++) {
    for (let other = 0; other < block; other++) {
      full[(old + at) * size + old + other] =
        byWidth[at]! * full[(block + at) * size + old + other]! +
        byArea[at]! * full[(2 * block + at) * size + old + other]!;
    }
  }
  return { n, power_uW, values: out, covariance: full };
}

/** One quantity of one line over the spectra that hold it. */
export interface LineSeries {
  /** Indices of the spectra. */
  readonly spectra: readonly number[];
  readonly power: Float64Array;
  readonly values: Float64Array;
  /** (r x r, row-major) */
  readonly covariance: Float64Array;
}

export function seriesOf(table: LineTable, quantity: LineQuantity, line: number): LineSeries {
  const spectra: number[] = [];
  for (let j = 0; j < table.power_uW.length; j++) {
    const at = placeOf(table, quantity, j, line);
    const usable = Number.isFinite(table.values[at]!) && table.covariance[at * table.values.length + at]! > 0;
    if (usable) spectra.push(j);
  }
  const places = spectra.map((j) => placeOf(table, quantity, j, line));
  const covariance = new Float64Array(places.length * places.length);
  places.forEach((a, i) =>
    places.forEach((b, j) => {
      covariance[i * places.length + j] = table.covariance[a * table.values.length + b]!;
    }),
  );
  return {
    spectra,
    power: Float64Array.from(spectra, (j) => table.power_uW[j]!),
    values: Float64Array.from(places, (at) => table.values[at]!),
    covariance,
  };
}

/** A number that depends linearly on the table's values, near the values that were found. */
export interface LinearForm {
  readonly places: readonly number[];
  readonly weights: ArrayLike<number>;
}

export function formCovariance(table: LineTable, a: LinearForm, b: LinearForm): number {
  const size = table.values.length;
  let sum = 0;
  for (let i = 0; i < a.places.length; i++) {
    const w = a.weights[i]!;
    if (w === 0) continue;
    const row = a.places[i]! * size;
    for (let j = 0; j < b.places.length; j++)
      sum += w * b.weights[j]! * table.covariance[row + b.places[j]!]!;
  }
  return sum;
}

/** Sum of forms, each times its factor. */
export function addForms(
  parts: readonly { readonly form: LinearForm; readonly factor: number }[],
): LinearForm {
  const places: number[] = [];
  const weights: number[] = [];
  for (const { form, factor } of parts) {
    form.places.forEach((place, i) => {
      places.push(place);
      weights.push(factor * form.weights[i]!);
    });
  }
  return { places, weights };
}

/** Covariance matrix (f x f, row-major) of forms. */
export function formsCovariance(table: LineTable, forms: readonly LinearForm[]): Float64Array {
  const f = forms.length;
  const size = table.values.length;
  const out = new Float64Array(f * f);
  const image = new Float64Array(size);
  for (let j = 0; j < f; j++) {
    // C times the form once, then every other form against it.
    image.fill(0);
    const { places, weights } = forms[j]!;
    for (let a = 0; a < places.length; a++) {
      const w = weights[a]!;
      if (w === 0) continue;
      const row = places[a]! * size;
      for (let x = 0; x < size; x++) image[x] = image[x]! + w * table.covariance[row + x]!;
    }
    for (let i = 0; i <= j; i++) {
      const other = forms[i]!;
      let sum = 0;
      for (let a = 0; a < other.places.length; a++) sum += other.weights[a]! * image[other.places[a]!]!;
      out[i * f + j] = sum;
      out[j * f + i] = sum;
    }
  }
  return out;
}
