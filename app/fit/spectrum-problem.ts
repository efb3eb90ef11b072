import { LEVEL, levelLaw } from "../laws/index.ts";
import { linePair, linePairWithDerivatives } from "../lines/index.ts";
import type { CondensedProblem, SeparableProblem } from "../solve/index.ts";
import { condenseSpectrum } from "./condense-spectrum.ts";
import type { FitPoints, LevelValues, LineStart, ModelSpec, WidthValues } from "./model-spec.ts";
import { TailEvaluator } from "./tail.ts";

/** Places of the nonlinear parameters in theta. */
export interface ThetaLayout {
  /** Law parameters first where levels are tied, then the free line energies. */
  readonly lawCount: number;
  /** Place of the energy of line j, or -1 where the level law gives it. */
  readonly energyAt: Int32Array;
  readonly widthAt: Int32Array;
  /** Place of q, or -1. */
  readonly asymmetryAt: number;
  /** Place of f, or -1. */
  readonly factorAt: number;
  readonly count: number;
}

/**
 * What      One spectrum as a separable least-squares problem:
 *           signal = sum_j A_j [L_j + 2 q D_j + share_j (T + 2 q U)] + background, with q free line by line
 *           sum_j A_j [L_j + share_j T] + sum_j B_j 2 [D_j + share_j U] + background, U the odd partner of T,
 *           T the tail of unit strength, whose laws follow from the free lines (LawLink).
 * Shapes    theta (layout.count); linear: areas (k), odd areas B = q A (k, only with asymmetry "free"), background.
 * Units     energies and widths in eV relative to nothing; areas in eV times the unit of the signal.
 * Source    Golub and Pereyra, SIAM J. Numer. Anal. 10, 413 (1973) for the separation.
 */
export class SpectrumProblem implements SeparableProblem {
  readonly rows: number;
  readonly nonlinear: number;
  readonly linear: number;
  readonly data: Float64Array;
  readonly weights: Float64Array;
  readonly layout: ThetaLayout;
  readonly spec: ModelSpec;
  readonly points: FitPoints;
  private readonly tail: TailEvaluator | null;
  private readonly profile: {
    l: Float64Array;
    d: Float64Array;
    lE: Float64Array;
    lG: Float64Array;
    dE: Float64Array;
    dG: Float64Array;
  };
  private readonly law = new Float64Array(LEVEL.size);

  constructor(points: FitPoints, spec: ModelSpec) {
    this.points = points;
    this.spec = spec;
    const m = points.energy.length;
    const k = spec.ns.length;
    this.rows = m;
    this.data = points.signal;
    this.weights = Float64Array.from(points.sigma, (sigma) => 1 / sigma);
    this.layout = makeLayout(spec);
    this.nonlinear = this.layout.count;
    this.linear = k * (hasOddAreas(spec) ? 2 : 1) + spec.background.length;
    this.tail =
      spec.tail === null ? null : new TailEvaluator(points, spec.tail, spec.gaussStd, spec.instrumentLorentz);
    const make = (): Float64Array => new Float64Array(m);
    this.profile = { l: make(), d: make(), lE: make(), lG: make(), dE: make(), dG: make() };
  }

  /** The nonlinear start from the lines' start values. */
  startFrom(lines: readonly LineStart[], asymmetry: number, factor: number): Float64Array {
    const theta = new Float64Array(this.nonlinear);
    const { layout, spec } = this;
    if (spec.tiedLevels !== null) {
      const { gap, rydberg, defect0, defect2 } = spec.tiedLevels.values;
      theta.set([gap, rydberg, defect0, defect2].slice(0, layout.lawCount));
    }
    spec.ns.forEach((n, j) => {
      const line = lines.find((one) => one.n === n);
      if (line === undefined) throw new Error(`no start for line n = ${n}`);
      if (layout.energyAt[j]! >= 0) theta[layout.energyAt[j]!] = line.energy;
      theta[layout.widthAt[j]!] = line.width;
    });
    if (layout.asymmetryAt >= 0) theta[layout.asymmetryAt] = asymmetry;
    if (layout.factorAt >= 0) theta[layout.factorAt] = factor;
    return theta;
  }

  /** Energy of line j. */
  energyOf(j: number, theta: Float64Array): number {
    const at = this.layout.energyAt[j]!;
    if (at >= 0) return theta[at]!;
    levelLaw(this.spec.ns[j]!, this.tiedLaw(theta), this.law);
    return this.law[LEVEL.energy]!;
  }

  /** Standard deviation of the Gaussian instrument at line j. */
  private stdOf(j: number): number {
    return this.spec.lineStds?.[j] ?? this.spec.gaussStd;
  }

  asymmetryOf(theta: Float64Array): number {
    return this.layout.asymmetryAt >= 0 ? theta[this.layout.asymmetryAt]! : 0;
  }

  factorOf(theta: Float64Array): number {
    return this.layout.factorAt >= 0 ? theta[this.layout.factorAt]! : (this.spec.tail?.factor ?? 0);
  }

  /** Laws of the tail at theta. */
  lawsAt(theta: Float64Array): { levels: LevelValues; widths: WidthValues } {
    const tail = this.spec.tail;
    if (tail === null) throw new Error("this model has no tail");
    const k = this.spec.ns.length;
    let levels: LevelValues;
    if (this.spec.tiedLevels !== null) levels = this.tiedLaw(theta);
    else {
      const base = [tail.levels.gap, tail.levels.rydberg, tail.levels.defect0, tail.levels.defect2];
      const { gain, at, parameters } = tail.levelLink;
      for (let p = 0; p < parameters; p++)
        for (let j = 0; j < k; j++)
          base[p]! += gain[p * k + j]! * (theta[this.layout.energyAt[j]!]! - at[j]!);
      levels = { gap: base[0]!, rydberg: base[1]!, defect0: base[2]!, defect2: base[3]! };
    }
    const width = [tail.widths.floor, tail.widths.coefficient, tail.widths.exponent];
    const { gain, at, parameters } = tail.widthLink;
    for (let p = 0; p < parameters; p++)
      for (let j = 0; j < k; j++) width[p]! += gain[p * k + j]! * (theta[this.layout.widthAt[j]!]! - at[j]!);
    return {
      levels,
      widths: { ...tail.widths, floor: width[0]!, coefficient: width[1]!, exponent: width[2]! },
    };
  }

  /** Full width of line j, without the instrument. */
  widthOf(j: number, theta: Float64Array): number {
    return theta[this.layout.widthAt[j]!]!;
  }

  /** The same model of other points, `spec` with its background columns on those. */
  onPoints(points: FitPoints, spec: ModelSpec): SpectrumProblem {
    return new SpectrumProblem(points, spec);
  }

  condense(theta: Float64Array): CondensedProblem | null {
    return condenseSpectrum(this, theta);
  }

  /** Columns of the background begin here among the linear coefficients. */
  get backgroundAt(): number {
    return this.linear - this.spec.background.length;
  }

  columns(theta: Float64Array, phi: Float64Array): void {
    const { points, spec, layout, rows: m } = this;
    const { l, d } = this.profile;
    const k = spec.ns.length;
    const q = this.asymmetryOf(theta);
    const free = hasOddAreas(spec);
    const tail = this.tailColumns(theta, q, false);
    for (let j = 0; j < k; j++) {
      const width = theta[layout.widthAt[j]!]! + (spec.instrumentLorentz ?? 0);
      linePair(points.energy, 0, m, this.energyOf(j, theta), width, this.stdOf(j), l, d);
      const at = j * m;
      const share = spec.tail?.strengthShare[j] ?? 0;
      const odd = 2 * q;
      for (let i = 0; i < m; i++) phi[at + i] = l[i]! + odd * d[i]!;
      if (tail !== null && share !== 0) {
        for (let i = 0; i < m; i++) phi[at + i]! += share * (tail.even[i]! + odd * tail.odd[i]!);
      }
      if (free) {
        const second = (k + j) * m;
        for (let i = 0; i < m; i++) phi[second + i] = 2 * d[i]!;
        // The tail is as asymmetric as the lines that speak for its strength: its odd part follows their odd areas.
        if (tail !== null && share !== 0)
          for (let i = 0; i < m; i++) phi[second + i]! += 2 * share * tail.odd[i]!;
      }
    }
    spec.background.forEach((column, b) => phi.set(column.values, (this.backgroundAt + b) * m));
  }

  derivatives(theta: Float64Array, coefficients: Float64Array, out: Float64Array): void {
    const { points, spec, layout, rows: m } = this;
    const { l, d, lE, lG, dE, dG } = this.profile;
    const k = spec.ns.length;
    const q = this.asymmetryOf(theta);
    const free = hasOddAreas(spec);
    out.fill(0);
    const tied = spec.tiedLevels === null ? null : this.tiedLaw(theta);
    for (let j = 0; j < k; j++) {
      const energy = this.energyOf(j, theta);
      linePairWithDerivatives(
        points.energy,
        0,
        m,
        energy,
        theta[layout.widthAt[j]!]! + (spec.instrumentLorentz ?? 0),
        this.stdOf(j),
        l,
        d,
        lE,
        lG,
        dE,
        dG,
      );
      const a = coefficients[j]!;
      const b = 2 * (q * a + (free ? coefficients[k + j]! : 0));
      const widthColumn = layout.widthAt[j]! * m;
      for (let i = 0; i < m; i++) out[widthColumn + i]! += a * lG[i]! + b * dG[i]!;
      if (layout.energyAt[j]! >= 0) {
        const energyColumn = layout.energyAt[j]! * m;
        for (let i = 0; i < m; i++) out[energyColumn + i]! += a * lE[i]! + b * dE[i]!;
      } else if (tied !== null) {
        levelLaw(spec.ns[j]!, tied, this.law);
        for (let p = 0; p < layout.lawCount; p++) {
          const slope = this.law[1 + p]!;
          for (let i = 0; i < m; i++) out[p * m + i]! += slope * (a * lE[i]! + b * dE[i]!);
        }
      }
      if (layout.asymmetryAt >= 0) {
        const column = layout.asymmetryAt * m;
        for (let i = 0; i < m; i++) out[column + i]! += 2 * a * d[i]!;
      }
    }
    this.tailDerivatives(theta, coefficients, out);
  }

  /** T = even + 2 q odd at theta (m each), or null; with `derivatives` the evaluator's derivative columns are filled too. */
  private tailColumns(
    theta: Float64Array,
    q: number,
    derivatives: boolean,
  ): { even: Float64Array; odd: Float64Array } | null {
    const { tail } = this;
    if (tail === null) return null;
    const { levels, widths } = this.lawsAt(theta);
    const f = this.factorOf(theta);
    tail.evaluate(levels, widths, f, q, derivatives);
    const { tiedEven, tiedOdd, heldEven, heldOdd } = tail.columns;
    return {
      even: tiedEven.map((value, i) => f * value + heldEven[i]!),
      odd: tiedOdd.map((value, i) => f * value + heldOdd[i]!),
    };
  }

  /** C = sum share_j A_j, and the q of the tail: the shared one, or that of the lines by their shares. */
  private tailStrength(theta: Float64Array, coefficients: Float64Array): { strength: number; q: number } {
    const k = this.spec.ns.length;
    let strength = 0;
    let odd = 0;
    this.spec.tail?.strengthShare.forEach((share, j) => {
      strength += share * coefficients[j]!;
      if (this.spec.asymmetry === "free") odd += share * coefficients[k + j]!;
    });
    if (this.spec.asymmetry !== "free") return { strength, q: this.asymmetryOf(theta) };
    return { strength, q: strength === 0 ? 0 : odd / strength };
  }

  private tailDerivatives(theta: Float64Array, coefficients: Float64Array, out: Float64Array): void {
    const { tail, spec, layout, rows: m } = this;
    if (tail === null || spec.tail === null) return;
    const k = spec.ns.length;
    const { strength, q } = this.tailStrength(theta, coefficients);
    this.tailColumns(theta, q, true);
    const { tiedEven, tiedOdd, heldOdd, byLevel, byWidth } = tail.columns;
    const f = this.factorOf(theta);
    if (layout.asymmetryAt >= 0) {
      const column = layout.asymmetryAt * m;
      for (let i = 0; i < m; i++) out[column + i]! += 2 * strength * (f * tiedOdd[i]! + heldOdd[i]!);
    }
    if (layout.factorAt >= 0) {
      const column = layout.factorAt * m;
      for (let i = 0; i < m; i++) out[column + i]! += strength * (tiedEven[i]! + 2 * q * tiedOdd[i]!);
    }
    const add = (target: number, source: Float64Array, factor: number): void => {
      if (factor === 0) return;
      const column = target * m;
      for (let i = 0; i < m; i++) out[column + i]! += factor * source[i]!;
    };
    if (spec.tiedLevels !== null) for (let p = 0; p < layout.lawCount; p++) add(p, byLevel[p]!, strength);
    else {
      const { gain, parameters } = spec.tail.levelLink;
      for (let j = 0; j < k; j++)
        for (let p = 0; p < parameters; p++)
          add(layout.energyAt[j]!, byLevel[p]!, strength * gain[p * k + j]!);
    }
    const { gain, parameters } = spec.tail.widthLink;
    for (let j = 0; j < k; j++)
      for (let p = 0; p < parameters; p++) add(layout.widthAt[j]!, byWidth[p]!, strength * gain[p * k + j]!);
  }

  /** The tail alone for these parameters: C T. */
  tailCurve(theta: Float64Array, coefficients: Float64Array): Float64Array | null {
    const { strength, q } = this.tailStrength(theta, coefficients);
    const column = this.tailColumns(theta, q, false);
    return column === null ? null : column.even.map((even, i) => strength * (even + 2 * q * column.odd[i]!));
  }

  /** The level law at theta, where levels are tied to it. */
  tiedLaw(theta: Float64Array): LevelValues & { defect4: number } {
    const tied = this.spec.tiedLevels;
    if (tied === null) throw new Error("levels are free in this model");
    const { gap, rydberg, defect0, defect2 } = tied.values;
    const value = [gap, rydberg, defect0, defect2];
    for (let p = 0; p < this.layout.lawCount; p++) value[p] = theta[p]!;
    return { gap: value[0]!, rydberg: value[1]!, defect0: value[2]!, defect2: value[3]!, defect4: 0 };
  }
}

/** Whether every line has an odd area B = (q_n - q) A beside its own; q is 0 where asymmetries are free. */
export function hasOddAreas(spec: ModelSpec): boolean {
  return spec.asymmetry === "free" || spec.asymmetry === "each";
}

function makeLayout(spec: ModelSpec): ThetaLayout {
  const k = spec.ns.length;
  const lawCount = spec.tiedLevels?.count ?? 0;
  let count = lawCount;
  const energyAt = new Int32Array(k).fill(-1);
  const widthAt = new Int32Array(k);
  for (let j = 0; j < k; j++)
    if (!(spec.tiedLevels?.tiedNs.includes(spec.ns[j]!) ?? false)) energyAt[j] = count++;
  for (let j = 0; j < k; j++) widthAt[j] = count++;
  const asymmetryAt = spec.asymmetry === "shared" || spec.asymmetry === "each" ? count++ : -1;
  const factorAt = spec.tail !== null && spec.tail.factorFree ? count++ : -1;
  return { lawCount, energyAt, widthAt, asymmetryAt, factorAt, count };
}
