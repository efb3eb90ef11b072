import {
  addContinuum,
  addLine,
  areaOf,
  energyOf,
  LAST_LINE,
  strengthOf,
  widthOf,
  type SyntheticSeries,
} from "./make-spectrum.ts";

/** What the analysed model was: its lines, those whose energies the level law gives, and which laws were free. */
export interface BoundModel {
  /** Lines with width and area of their own, ascending. */
  readonly ns: readonly number[];
  /** Range of n of the level fit; energies outside are free. */
  readonly fitN: readonly [number, number];
  readonly defectFree: boolean;
  readonly exponentFree: boolean;
  /** Background columns on these energies. */
  readonly background: (energies: Float64Array) => Float64Array[];
}

/**
 * What      Cramer-Rao bounds of gap, Rydberg energy and defect at the truth: (F^-1)_ii with F = J' J / sigma^2.
 *           Parameters: the level law for the lines in its range, energies of the others, widths and areas of all,
 *           shared asymmetry, factor of the tail, background. The tail (lines above the last free one) and the continuum
 *           follow the laws of the lines in range: levels directly, widths and strength by weighted least squares, as a
 *           tail that is tied to the lines has no parameters but its factor.
 * Units     eV; sigma in the unit of the signal.
 * Source    Rao, Bull. Calcutta Math. Soc. 37, 81 (1945); Cramer, Mathematical Methods of Statistics (1946), 32.3.
 */
export function seriesBounds(
  energies: Float64Array,
  series: SyntheticSeries,
  sigma: number,
  model: BoundModel,
): { gap_eV: number; rydberg_eV: number; defect0: number } {
  const parts = tailParts(energies, series, model);
  // Widths and areas need weights in their laws; a first bound with every line weighed alike relative to itself gives them.
  const rough = jacobian(energies, series, model, parts, (n) => ({
    width: widthOf(series, n) / Math.sqrt(areaOf(series, n)),
    area: Math.sqrt(areaOf(series, n)),
  }));
  const first = bounds(rough, sigma);
  const k = model.ns.length;
  const fine = jacobian(energies, series, model, parts, (n) => {
    const j = model.ns.indexOf(n);
    return { width: first[rough.widthAt + j]!, area: first[rough.widthAt + k + j]! };
  });
  const found = bounds(fine, sigma);
  return { gap_eV: found[0]!, rydberg_eV: found[1]!, defect0: model.defectFree ? found[2]! : 0 };
}

type Vector = Float64Array;
const zero = (energies: Vector): Vector => new Float64Array(energies.length);
const combine = (a: Vector, b: Vector, fa: number, fb: number): Vector =>
  a.map((v, i) => fa * v + fb * b[i]!);

/** (f(x + h) - f(x - h))/(2 h). */
function difference(f: (x: number) => Vector, x: number, h: number): Vector {
  return combine(f(x + h), f(x - h), 0.5 / h, -0.5 / h);
}

interface TailParts {
  /** Lines above the last free one at C = 1, the continuum at C = 1. */
  readonly lines: Vector;
  readonly continuum: Vector;
  /** Derivatives of their sum by gap, Rydberg energy, defect; floor, coefficient, exponent; asymmetry. */
  readonly byLevel: readonly Vector[];
  readonly byWidth: readonly Vector[];
  readonly byAsymmetry: Vector;
}

function tailParts(energies: Vector, series: SyntheticSeries, model: BoundModel): TailParts {
  const top = model.ns[model.ns.length - 1]!;
  const lines = (s: SyntheticSeries): Vector => {
    const out = zero(energies);
    for (let n = top + 1; n <= LAST_LINE; n++) {
      addLine(energies, energyOf(s, n), widthOf(s, n), strengthOf(s.law, n), s.asymmetry, out);
    }
    return out;
  };
  const continuum = (s: SyntheticSeries): Vector => {
    const out = zero(energies);
    addContinuum(energies, s, 1, out);
    return out;
  };
  const sum = (s: SyntheticSeries): Vector => combine(lines(s), continuum(s), 1, 1);
  const by = (
    key: "gap_eV" | "rydberg_eV" | "defect0" | "floor_eV" | "coefficient_eV" | "exponent" | "asymmetry",
    h: number,
  ): Vector => difference((value) => sum({ ...series, [key]: value }), series[key], h);
  const narrow = widthOf(series, top + 1);
  return {
    lines: lines(series),
    continuum: continuum(series),
    byLevel: [
      by("gap_eV", 0.01 * narrow),
      by("rydberg_eV", 0.01 * narrow * (top + 1) ** 2),
      by("defect0", (0.01 * narrow * (top + 1) ** 3) / (2 * series.rydberg_eV)),
    ],
    byWidth: [
      by("floor_eV", 0.01 * series.floor_eV),
      by("coefficient_eV", 0.01 * series.coefficient_eV),
      by("exponent", 0.01),
    ],
    byAsymmetry: by("asymmetry", 0.01),
  };
}

interface Jacobian {
  readonly columns: readonly Vector[];
  readonly widthAt: number;
}

function jacobian(
  energies: Vector,
  series: SyntheticSeries,
  model: BoundModel,
  parts: TailParts,
  sigmas: (n: number) => { width: number; area: number },
): Jacobian {
  const { ns, fitN } = model;
  const q = series.asymmetry;
  const strength = series.strength;
  const follows = (n: number): boolean => n >= fitN[0] && n <= fitN[1];
  const one = (center: number, width: number, area: number, asymmetry = q): Vector => {
    const out = zero(energies);
    addLine(energies, center, width, area, asymmetry, out);
    return out;
  };
  const place = ns.map((n) => ({
    n,
    center: energyOf(series, n),
    width: widthOf(series, n),
    area: areaOf(series, n),
  }));
  const byEnergy = place.map(({ center, width, area }) =>
    difference((value) => one(value, width, area), center, 0.005 * width),
  );
  const levels = [0, 1, 2].slice(0, model.defectFree ? 3 : 2).map((p) => {
    const column = parts.byLevel[p]!.map((value) => strength * value);
    place.forEach(({ n }, j) => {
      if (!follows(n)) return;
      const nu = n - series.defect0;
      const slope = [1, -1 / nu ** 2, (-2 * series.rydberg_eV) / nu ** 3][p]!;
      for (let i = 0; i < column.length; i++) column[i]! += slope * byEnergy[j]![i]!;
    });
    return column;
  });
  const free = byEnergy.filter((_, j) => !follows(ns[j]!));
  // d(floor, coefficient[, exponent])/d width_j by weighted least squares of the law.
  const widthParameters = model.exponentFree ? 3 : 2;
  const inRange = place.filter(({ n }) => follows(n));
  const rows = inRange.map(({ n }) => {
    const power = n ** -series.exponent;
    return [1, power, -series.coefficient_eV * power * Math.log(n)].slice(0, widthParameters);
  });
  const gain = leastSquaresGain(
    rows,
    inRange.map(({ n }) => sigmas(n).width),
  );
  const widths = place.map(({ n, center, width, area }) => {
    const column = difference((value) => one(center, value, area), width, 0.005 * width);
    const at = inRange.findIndex((line) => line.n === n);
    if (at < 0) return column;
    for (let p = 0; p < widthParameters; p++)
      for (let i = 0; i < column.length; i++) column[i]! += strength * gain[p]![at]! * parts.byWidth[p]![i]!;
    return column;
  });
  const share = leastSquaresGain(
    inRange.map(({ n }) => [strengthOf(series.law, n)]),
    inRange.map(({ n }) => sigmas(n).area),
  )[0]!;
  const areas = place.map(({ n, center, width }) => {
    const column = one(center, width, 1);
    const at = inRange.findIndex((line) => line.n === n);
    if (at < 0) return column;
    return column.map((value, i) => value + share[at]! * (parts.lines[i]! + parts.continuum[i]!));
  });
  const asymmetry = parts.byAsymmetry.map((value) => strength * value);
  for (const { center, width, area } of place) {
    const odd = combine(one(center, width, area, 1), one(center, width, area, 0), 1, -1);
    for (let i = 0; i < odd.length; i++) asymmetry[i]! += odd[i]!;
  }
  const factor = parts.lines.map((value) => strength * value);
  return {
    columns: [...levels, ...free, ...widths, ...areas, asymmetry, factor, ...model.background(energies)],
    widthAt: levels.length + free.length,
  };
}

/** (R' W R)^-1 R' W: parameters x rows. */
function leastSquaresGain(rows: readonly number[][], sigma: readonly number[]): number[][] {
  const p = rows[0]!.length;
  // Columns are scaled by their largest entry, since floors and coefficients differ by orders of magnitude.
  const scale = Array.from({ length: p }, (_, a) => Math.max(...rows.map((row) => Math.abs(row[a]!))));
  const normal = Array.from({ length: p }, (_, a) =>
    Array.from({ length: p }, (_, b) =>
      rows.reduce((sum, row, j) => sum + (row[a]! / scale[a]!) * (row[b]! / scale[b]!) * sigma[j]! ** -2, 0),
    ),
  );
  const inverse = invert(normal);
  return inverse.map((line, a) =>
    rows.map(
      (row, j) =>
        (line.reduce((sum, value, b) => sum + value * (row[b]! / scale[b]!), 0) * sigma[j]! ** -2) /
        scale[a]!,
    ),
  );
}

/** Standard deviations by the bound, for every parameter. */
function bounds({ columns }: Jacobian, sigma: number): number[] {
  const norm = columns.map((column) => Math.sqrt(column.reduce((sum, value) => sum + value * value, 0)));
  const unit = columns.map((column, a) => column.map((value) => value / norm[a]!));
  const fisher = unit.map((a) => unit.map((b) => a.reduce((sum, value, i) => sum + value * b[i]!, 0)));
  return invert(fisher).map((row, a) => (Math.sqrt(row[a]!) * sigma) / norm[a]!);
}

/** Gauss-Jordan with pivots on the largest entry; for a few dozen well-scaled parameters. */
function invert(matrix: readonly number[][]): number[][] {
  const size = matrix.length;
  const work = matrix.map((row, i) => [...row, ...Array.from({ length: size }, (_, j) => (i === j ? 1 : 0))]);
  for (let i = 0; i < size; i++) {
    let pivot = i;
    for (let r = i + 1; r < size; r++) if (Math.abs(work[r]![i]!) > Math.abs(work[pivot]![i]!)) pivot = r;
    [work[i], work[pivot]] = [work[pivot]!, work[i]!];
    const by = work[i]![i]!;
    if (by === 0) throw new Error("singular Fisher matrix");
    work[i] = work[i]!.map((value) => value / by);
    for (let r = 0; r < size; r++) {
      const factor = work[r]![i]!;
      if (r === i || factor === 0) continue;
      work[r] = work[r]!.map((value, j) => value - factor * work[i]![j]!);
    }
  }
  return work.map((row) => row.slice(size));
}
