import { LEVEL, levelLaw, strength, WIDTH, widthLaw } from "../laws/index.ts";
import { choleskyFactor, choleskySolve } from "../solve/index.ts";
import type { LawLink, LevelValues, TailSpec, WidthValues } from "./model-spec.ts";

/** One value per free line with its standard error; `include` says which lines speak for the law. */
export interface LinkData {
  readonly ns: readonly number[];
  readonly value: Float64Array;
  readonly sigma: Float64Array;
  readonly include: readonly boolean[];
}

/**
 * What      Weighted least-squares fit of the level law to line energies, and how its parameters follow the energies:
 *           p = p0 + gain (x - x0), gain = (J' W J)^-1 J' W at the optimum.
 * Shapes    gain (count x lines, row-major), zero for lines that are left out.
 * Units     eV.
 * Domain    count 2 (gap, Rydberg energy), 3 (and delta0) or 4 (and delta2), at most the number of lines included.
 * Source    Gauss-Newton; the law is linear in gap and Rydberg energy, so a few steps suffice.
 */
export function levelLink(
  data: LinkData,
  start: LevelValues,
  count: number,
): { values: LevelValues; link: LawLink } {
  const values = [start.gap, start.rydberg, start.defect0, start.defect2];
  const law = new Float64Array(LEVEL.size);
  const row = (n: number): { value: number; slopes: Float64Array } => {
    levelLaw(
      n,
      { gap: values[0]!, rydberg: values[1]!, defect0: values[2]!, defect2: values[3]!, defect4: 0 },
      law,
    );
    return { value: law[LEVEL.energy]!, slopes: law.slice(1, 1 + count) };
  };
  const gain = iterate(data, values, count, row, (step) => {
    // A step of the defect beyond a tenth would leave the region where the law is nearly linear.
    const largest = Math.max(
      Math.abs(step[2] ?? 0) / 0.1,
      Math.abs(step[1]!) / (0.3 * Math.abs(values[1]!)),
      1,
    );
    return 1 / largest;
  });
  return {
    values: { gap: values[0]!, rydberg: values[1]!, defect0: values[2]!, defect2: values[3]! },
    link: { gain, at: Float64Array.from(data.value), parameters: count },
  };
}

/** The same for the width law; a floor that would come out negative is held at zero, a free exponent needs four lines. */
export function widthLink(
  data: LinkData,
  start: WidthValues,
  free: { readonly floor: boolean; readonly exponent: boolean },
  defect: number,
): { values: WidthValues; link: LawLink } {
  const included = data.include.filter(Boolean).length;
  // A floor that adds in quadrature has no slope at zero, so a fit that starts there never leaves it.
  const narrowest = Math.min(...data.value.filter((_, j) => data.include[j]!));
  const startFloor =
    start.floorKind === "gaussian" ? Math.max(start.floor, LEAST_FLOOR_PART * narrowest) : start.floor;
  const attempt = (floorFree: boolean, exponentFree: boolean): { values: WidthValues; link: LawLink } => {
    const values = [floorFree ? startFloor : 0, start.coefficient, start.exponent];
    const places = [...(floorFree ? [0] : []), 1, ...(exponentFree ? [2] : [])];
    const out = new Float64Array(WIDTH.size);
    const row = (n: number): { value: number; slopes: Float64Array } => {
      widthLaw(
        n,
        defect,
        { ...start, floor: values[0]!, coefficient: values[1]!, exponent: values[2]! },
        out,
      );
      return { value: out[WIDTH.width]!, slopes: Float64Array.from(places, (place) => out[1 + place]!) };
    };
    const partial = Float64Array.from(places, (place) => values[place]!);
    const small = iterate(
      data,
      partial,
      places.length,
      (n) => {
        places.forEach((place, i) => (values[place] = partial[i]!));
        return row(n);
      },
      (step) => 1 / Math.max(1, Math.abs(exponentFree ? step[places.length - 1]! : 0) / 0.5),
    );
    places.forEach((place, i) => (values[place] = partial[i]!));
    const k = data.ns.length;
    const gain = new Float64Array(3 * k);
    places.forEach((place, i) => gain.set(small.subarray(i * k, (i + 1) * k), place * k));
    return {
      values: { ...start, floor: values[0]!, coefficient: values[1]!, exponent: values[2]! },
      link: { gain, at: Float64Array.from(data.value), parameters: 3 },
    };
  };
  const sensible = (one: { values: WidthValues }): boolean =>
    one.values.floor >= 0 &&
    one.values.coefficient > 0 &&
    one.values.exponent > 0.5 &&
    one.values.exponent < 8;
  if (free.exponent && included >= 4) {
    for (const floorFree of free.floor ? [true, false] : [false]) {
      const trial = attempt(floorFree, true);
      if (sensible(trial)) return trial;
    }
  }
  if (free.floor && included >= 3) {
    const trial = attempt(true, false);
    if (sensible(trial)) return trial;
  }
  return attempt(false, false);
}

const LEAST_FLOOR_PART = 0.5;

/** Shares with C = sum share_j A_j: weighted least squares of A_j = C s_j, linear in the areas. */
export function strengthShare(
  data: LinkData,
  strengthChoice: TailSpec["strength"],
  defect: number,
): Float64Array {
  const share = new Float64Array(data.ns.length);
  let total = 0;
  data.ns.forEach((n, j) => {
    if (!data.include[j]) return;
    const s = strength(n, defect, strengthChoice.law, strengthChoice.base);
    const weight = 1 / (data.sigma[j]! * data.sigma[j]!);
    share[j] = weight * s;
    total += weight * s * s;
  });
  if (total > 0) for (let j = 0; j < share.length; j++) share[j]! /= total;
  return share;
}

/** Gauss-Newton on `values` in place; returns the gain at the end. */
function iterate(
  data: LinkData,
  values: number[] | Float64Array,
  count: number,
  row: (n: number) => { value: number; slopes: Float64Array },
  damping: (step: Float64Array) => number,
): Float64Array {
  const k = data.ns.length;
  const gain = new Float64Array(count * k);
  for (let round = 0; round < 40; round++) {
    const normal = new Float64Array(count * count);
    const right = new Float64Array(count);
    const slopes: Float64Array[] = [];
    const scale = new Float64Array(count);
    data.ns.forEach((n, j) => {
      const { value, slopes: s } = row(n);
      slopes.push(s);
      if (!data.include[j]) return;
      const weight = 1 / (data.sigma[j]! * data.sigma[j]!);
      const residual = data.value[j]! - value;
      for (let a = 0; a < count; a++) {
        right[a]! += weight * s[a]! * residual;
        for (let b = 0; b < count; b++) normal[a * count + b]! += weight * s[a]! * s[b]!;
      }
    });
    for (let a = 0; a < count; a++) scale[a] = Math.sqrt(normal[a * count + a]!) || 1;
    for (let a = 0; a < count; a++)
      for (let b = 0; b < count; b++) normal[a * count + b]! /= scale[a]! * scale[b]!;
    const factor = choleskyFactor(normal, count);
    if (factor === null) return gain;
    const step = Float64Array.from(right, (value, a) => value / scale[a]!);
    choleskySolve(factor, count, step);
    const scaledLength = Math.sqrt(step.reduce((sum, value) => sum + value * value, 0));
    for (let a = 0; a < count; a++) step[a]! /= scale[a]!;
    const part = damping(step);
    for (let a = 0; a < count; a++) values[a]! += part * step[a]!;
    for (let j = 0; j < k; j++) {
      const column = new Float64Array(count);
      if (data.include[j]) {
        const weight = 1 / (data.sigma[j]! * data.sigma[j]!);
        for (let a = 0; a < count; a++) column[a] = (weight * slopes[j]![a]!) / scale[a]!;
        choleskySolve(factor, count, column);
      }
      for (let a = 0; a < count; a++) gain[a * k + j] = column[a]! / scale[a]!;
    }
    if (part === 1 && scaledLength < 1e-7) break;
  }
  return gain;
}
