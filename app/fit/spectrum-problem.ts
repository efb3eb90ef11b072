import { LEVEL, levelLaw } from "../laws/index.ts";
import { linePair, linePairWithDerivatives, turnPair } from "../lines/index.ts";
import type { CondensedProblem, SeparableProblem } from "../solve/index.ts";
import { condenseSpectrum } from "./condense-spectrum.ts";
import type { FitPoints, LawLink, LevelValues, LineStart, ModelSpec, WidthValues } from "./model-spec.ts";
import { leastEdgeWidth, TailEvaluator } from "./tail.ts";

/** Rows evaluated at once: the profiles of a line stay in the first-level cache. */
const BLOCK = 256;
/** Points whose tail is held at once, a multiple of BLOCK: spectra of common length are one piece. */
const PIECE = 2 ** 16;

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
  /** Least width of an edge of the tail, eV. */
  private readonly leastWidth: number;
  private piece: TailPiece | null = null;
  /** The pair of one line and its derivatives on a block of rows. */
  private readonly profile = {
    l: new Float64Array(BLOCK),
    d: new Float64Array(BLOCK),
    lE: new Float64Array(BLOCK),
    lG: new Float64Array(BLOCK),
    dE: new Float64Array(BLOCK),
    dG: new Float64Array(BLOCK),
  };
  private readonly law = new Float64Array(LEVEL.size);

  /** `leastWidth`: of an edge of the tail (eV), where these points stand for others. */
  constructor(points: FitPoints, spec: ModelSpec, leastWidth?: number) {
    this.points = points;
    this.spec = spec;
    const m = points.energy.length;
    const k = spec.ns.length;
    this.rows = m;
    this.data = points.signal;
    this.weights = points.sigma.map((sigma) => 1 / sigma);
    this.layout = makeLayout(spec);
    this.nonlinear = this.layout.count;
    this.linear = k * (hasOddAreas(spec) ? 2 : 1) + spec.background.length;
    this.leastWidth =
      leastWidth ?? (spec.tail === null ? 0 : leastEdgeWidth(points.energy, spec.tail.levels.gap));
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
    return new SpectrumProblem(points, spec, this.leastWidth);
  }

  condense(theta: Float64Array): CondensedProblem | null {
    return condenseSpectrum(this, theta);
  }

  /** Columns of the background begin here among the linear coefficients. */
  get backgroundAt(): number {
    return this.linear - this.spec.background.length;
  }

  columns(theta: Float64Array, phi: Float64Array): void {
    const { rows: m } = this;
    for (let first = 0; first < m; first += BLOCK) {
      const block = { first, end: Math.min(m, first + BLOCK), ld: m, at: first };
      const tail = this.tailAt(theta, first);
      for (let j = 0; j < this.spec.ns.length; j++) {
        this.takePair(j, theta, block, false);
        this.writeColumns(j, theta, tail, block, phi);
      }
      this.writeBackground(block, phi);
    }
  }

  derivatives(theta: Float64Array, coefficients: Float64Array, out: Float64Array): void {
    const { rows: m } = this;
    const strength = this.tailStrength(theta, coefficients);
    for (let first = 0; first < m; first += BLOCK) {
      const block = { first, end: Math.min(m, first + BLOCK), ld: m, at: first };
      this.clearShared(block, out);
      for (let j = 0; j < this.spec.ns.length; j++) {
        this.takePair(j, theta, block, true);
        this.writeDerivatives(j, theta, coefficients, block, out);
      }
      this.addTailDerivatives(theta, strength, block, out);
    }
  }

  blocks(
    theta: Float64Array,
    coefficients: Float64Array,
  ): (first: number, end: number, phi: Float64Array, derivatives: Float64Array) => void {
    const strength = this.tailStrength(theta, coefficients);
    return (from, to, phi, derivatives) => {
      // Pieces of the tail end at multiples of BLOCK.
      for (let first = from; first < to;) {
        const end = Math.min(to, first - (first % BLOCK) + BLOCK);
        const block = { first, end, ld: to - from, at: first - from };
        const tail = this.tailAt(theta, first);
        this.clearShared(block, derivatives);
        for (let j = 0; j < this.spec.ns.length; j++) {
          this.takePair(j, theta, block, true);
          this.writeColumns(j, theta, tail, block, phi);
          this.writeDerivatives(j, theta, coefficients, block, derivatives);
        }
        this.writeBackground(block, phi);
        this.addTailDerivatives(theta, strength, block, derivatives);
        first = end;
      }
    };
  }

  /** The pair of line j on a block of rows, with its derivatives where asked for. */
  private takePair(j: number, theta: Float64Array, { first, end }: Block, derivatives: boolean): void {
    const { points, spec, layout } = this;
    const { l, d, lE, lG, dE, dG } = this.profile;
    const width = theta[layout.widthAt[j]!]! + (spec.instrumentLorentz ?? 0);
    const energy = this.energyOf(j, theta);
    const std = this.stdOf(j);
    if (derivatives)
      linePairWithDerivatives(points.energy, first, end, energy, width, std, l, d, lE, lG, dE, dG, -first);
    else linePair(points.energy, first, end, energy, width, std, l, d, -first);
    if (spec.partner !== true) return;
    turnPair(l, d);
    if (!derivatives) return;
    turnPair(lE, dE);
    turnPair(lG, dG);
  }

  /** Columns of line j from its pair. */
  private writeColumns(
    j: number,
    theta: Float64Array,
    tail: TailPiece | null,
    { first, end, ld, at }: Block,
    phi: Float64Array,
  ): void {
    const { spec } = this;
    const { l, d } = this.profile;
    const height = end - first;
    const free = hasOddAreas(spec);
    const odd = 2 * this.asymmetryOf(theta);
    const column = j * ld + at;
    for (let i = 0; i < height; i++) phi[column + i] = l[i]! + odd * d[i]!;
    const second = (spec.ns.length + j) * ld + at;
    if (free) for (let i = 0; i < height; i++) phi[second + i] = 2 * d[i]!;
    const share = spec.tail?.strengthShare[j] ?? 0;
    if (tail === null || share === 0) return;
    const { even, odd: partner } = tail;
    const from = first - tail.first;
    for (let i = 0; i < height; i++) phi[column + i]! += share * (even[from + i]! + odd * partner[from + i]!);
    // The tail is as asymmetric as the lines that speak for its strength: its odd part follows their odd areas.
    if (free) for (let i = 0; i < height; i++) phi[second + i]! += 2 * share * partner[from + i]!;
  }

  private writeBackground({ first, end, ld, at }: Block, phi: Float64Array): void {
    this.spec.background.forEach(({ values }, b) => {
      const column = (this.backgroundAt + b) * ld + at;
      for (let i = first; i < end; i++) phi[column + i - first] = values[i]!;
    });
  }

  /** Columns of derivatives that more than one line adds to begin at nothing; the others belong to one line. */
  private clearShared({ first, end, ld, at }: Block, out: Float64Array): void {
    const { lawCount, asymmetryAt, factorAt } = this.layout;
    const clear = (p: number): void => void out.fill(0, p * ld + at, p * ld + at + end - first);
    for (let p = 0; p < lawCount; p++) clear(p);
    if (asymmetryAt >= 0) clear(asymmetryAt);
    if (factorAt >= 0) clear(factorAt);
  }

  /** What line j gives to the derivatives, from its pair. */
  private writeDerivatives(
    j: number,
    theta: Float64Array,
    coefficients: Float64Array,
    { first, end, ld, at }: Block,
    out: Float64Array,
  ): void {
    const { spec, layout } = this;
    const { d, lE, lG, dE, dG } = this.profile;
    const height = end - first;
    const a = coefficients[j]!;
    const own = hasOddAreas(spec) ? coefficients[spec.ns.length + j]! : 0;
    const b = 2 * (this.asymmetryOf(theta) * a + own);
    const byWidth = layout.widthAt[j]! * ld + at;
    for (let i = 0; i < height; i++) out[byWidth + i] = a * lG[i]! + b * dG[i]!;
    if (layout.energyAt[j]! >= 0) {
      const byEnergy = layout.energyAt[j]! * ld + at;
      for (let i = 0; i < height; i++) out[byEnergy + i] = a * lE[i]! + b * dE[i]!;
    } else if (spec.tiedLevels !== null) {
      levelLaw(spec.ns[j]!, this.tiedLaw(theta), this.law);
      for (let p = 0; p < layout.lawCount; p++) {
        const slope = this.law[1 + p]!;
        const column = p * ld + at;
        for (let i = 0; i < height; i++) out[column + i]! += slope * (a * lE[i]! + b * dE[i]!);
      }
    }
    if (layout.asymmetryAt >= 0) {
      const column = layout.asymmetryAt * ld + at;
      for (let i = 0; i < height; i++) out[column + i]! += 2 * a * d[i]!;
    }
  }

  /** T = even + 2 q odd at theta on the piece of the points that holds this row; null without a tail. */
  private tailAt(theta: Float64Array, row: number): TailPiece | null {
    const { spec, points } = this;
    if (spec.tail === null) return null;
    let { piece } = this;
    if (piece === null || row < piece.first || row >= piece.end) {
      const first = row - (row % PIECE);
      const end = Math.min(this.rows, first + PIECE);
      const part = (column: Float64Array): Float64Array => column.subarray(first, end);
      const some = { energy: part(points.energy), signal: part(points.signal), sigma: part(points.sigma) };
      const { gaussStd, instrumentLorentz, partner } = spec;
      const { leastWidth } = this;
      const tail = new TailEvaluator(some, spec.tail, gaussStd, instrumentLorentz, partner, leastWidth);
      const make = (): Float64Array => new Float64Array(end - first);
      const at = new Float64Array(theta.length).fill(NaN);
      piece = { first, end, tail, even: make(), odd: make(), at, slopesFor: null };
      this.piece = piece;
    }
    if (piece.at.some((value, i) => value !== theta[i])) {
      const { levels, widths } = this.lawsAt(theta);
      piece.tail.evaluate(levels, widths);
      const f = this.factorOf(theta);
      const { tiedEven, tiedOdd, heldEven, heldOdd } = piece.tail.columns;
      for (let i = 0; i < piece.even.length; i++) {
        piece.even[i] = f * tiedEven[i]! + heldEven[i]!;
        piece.odd[i] = f * tiedOdd[i]! + heldOdd[i]!;
      }
      piece.at.set(theta);
      piece.slopesFor = null;
    }
    return piece;
  }

  /** The same with its derivatives at this q. */
  private tailWithSlopesAt(theta: Float64Array, q: number, row: number): TailPiece | null {
    const piece = this.tailAt(theta, row);
    if (piece === null || piece.slopesFor === q) return piece;
    const { levels, widths } = this.lawsAt(theta);
    piece.tail.differentiate(levels, widths, this.factorOf(theta), q);
    piece.slopesFor = q;
    return piece;
  }

  /** C = sum share_j A_j, and the q of the tail: the shared one, or that of the lines by their shares. */
  private tailStrength(theta: Float64Array, coefficients: Float64Array): TailStrength {
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

  private addTailDerivatives(
    theta: Float64Array,
    { strength, q }: TailStrength,
    { first, end, ld, at }: Block,
    out: Float64Array,
  ): void {
    const { spec, layout } = this;
    const piece = this.tailWithSlopesAt(theta, q, first);
    if (piece === null || spec.tail === null) return;
    const k = spec.ns.length;
    const height = end - first;
    const from = first - piece.first;
    const { tiedEven, tiedOdd, heldOdd, byLevel, byWidth } = piece.tail.columns;
    const f = this.factorOf(theta);
    if (layout.asymmetryAt >= 0) {
      const column = layout.asymmetryAt * ld + at;
      for (let i = 0; i < height; i++)
        out[column + i]! += 2 * strength * (f * tiedOdd[from + i]! + heldOdd[from + i]!);
    }
    if (layout.factorAt >= 0) {
      const column = layout.factorAt * ld + at;
      for (let i = 0; i < height; i++)
        out[column + i]! += strength * (tiedEven[from + i]! + 2 * q * tiedOdd[from + i]!);
    }
    const add = (target: number, sources: readonly Float64Array[], factors: readonly number[]): void => {
      const column = target * ld + at;
      const [a = 0, b = 0, c = 0, d = 0] = factors;
      const [x, y = x, z = x, w = x] = sources;
      if (d === 0)
        for (let i = 0; i < height; i++)
          out[column + i]! += a * x![from + i]! + b * y![from + i]! + c * z![from + i]!;
      else
        for (let i = 0; i < height; i++)
          out[column + i]! += a * x![from + i]! + b * y![from + i]! + (c * z![from + i]! + d * w![from + i]!);
    };
    if (spec.tiedLevels !== null) for (let p = 0; p < layout.lawCount; p++) add(p, [byLevel[p]!], [strength]);
    const factors: number[] = [];
    const link = (target: Int32Array, { gain, parameters }: LawLink, by: readonly Float64Array[]): void => {
      factors.length = parameters;
      for (let j = 0; j < k; j++) {
        let some = false;
        for (let p = 0; p < parameters; p++) {
          factors[p] = strength * gain[p * k + j]!;
          some ||= factors[p] !== 0;
        }
        if (some) add(target[j]!, by, factors);
      }
    };
    if (spec.tiedLevels === null) link(layout.energyAt, spec.tail.levelLink, byLevel);
    link(layout.widthAt, spec.tail.widthLink, byWidth);
  }

  /** The tail alone for these parameters: C T. */
  tailCurve(theta: Float64Array, coefficients: Float64Array): Float64Array | null {
    const { strength, q } = this.tailStrength(theta, coefficients);
    if (this.spec.tail === null) return null;
    const out = new Float64Array(this.rows);
    for (let i = 0; i < this.rows;) {
      const { first, end, even, odd } = this.tailAt(theta, i)!;
      for (; i < end; i++) out[i] = strength * (even[i - first]! + 2 * q * odd[i - first]!);
    }
    return out;
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

/** The tail on a piece of the points, as it was last evaluated. */
interface TailPiece {
  readonly first: number;
  readonly end: number;
  readonly tail: TailEvaluator;
  readonly even: Float64Array;
  readonly odd: Float64Array;
  /** theta of the values, and q of the derivatives where those are at hand. */
  readonly at: Float64Array;
  slopesFor: number | null;
}

/** Rows first <= i < end, as rows `at` and on of a matrix with leading dimension `ld`. */
interface Block {
  readonly first: number;
  readonly end: number;
  readonly ld: number;
  readonly at: number;
}

interface TailStrength {
  readonly strength: number;
  readonly q: number;
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
