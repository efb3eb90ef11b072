import { defectAt, LEVEL, levelLaw, strength, WIDTH, widthLaw, type LevelParameters } from "../laws/index.ts";
import { continuumPair, linePairWithDerivatives, turnPair, type ContinuumOutputs } from "../lines/index.ts";
import { addFromGrid, makeSparseGrid, type SparseGrid } from "./sparse-grid.ts";
import type { FitPoints, LevelValues, TailSpec, WidthValues } from "./model-spec.ts";

/**
 * What      Absorption of everything that is tied to the laws, for a strength law of coefficient C = 1:
 *           T(E) = f [sum_tied s_n (L_n + 2 q D_n) + band] + sum_below s_n (L_n + 2 q D_n) + continuum.
 *           The band stands for the lines above `toN`, which run together, from E(toN + 1/2) to the gap, as high as
 *           the strength law says (towards 1/(2 Ry)), in groups as broad as their lines. The continuum has the height 1/(2 Ry)
 *           at the gap.
 * Shapes    all columns (m).
 * Units     eV, 1/eV.
 * Accuracy  the band replaces lines whose width is at least `BLENDED` spacings: ripple exp(-pi BLENDED) of its height.
 * Source    Elliott, Phys. Rev. 108, 1384 (1957); midpoint rule for the sum over n.
 */
export interface TailColumns {
  /** f-part without the odd partner, and the odd partner (times 2 q). */
  readonly tiedEven: Float64Array;
  readonly tiedOdd: Float64Array;
  readonly heldEven: Float64Array;
  readonly heldOdd: Float64Array;
  /** d T/d p at the given f and q: gap, Rydberg energy, delta0, delta2, then floor and coefficient, exponent. */
  readonly byLevel: readonly Float64Array[];
  readonly byWidth: readonly Float64Array[];
}

type BandColumn = keyof Required<ContinuumOutputs>;

const LEVEL_COUNT = 4;
const WIDTH_COUNT = 3;
const FAR_N = 1e6;
const LEAST_WIDTH = 1e-9;
const FWHM_OF_STD = 2 * Math.sqrt(2 * Math.LN2);

export class TailEvaluator {
  readonly columns: TailColumns;
  private readonly points: FitPoints;
  private readonly spec: TailSpec;
  private readonly gaussStd: number;
  private readonly lorentz: number;
  private readonly partner: boolean;
  private readonly grid: SparseGrid;
  private readonly scratch: Float64Array[];
  private readonly sums: Float64Array[];
  private readonly leastWidth: number;
  private readonly bands: readonly BandGroup[];
  private readonly bandScratch: Record<BandColumn, Float64Array>;

  /**
   * `lorentz`: FWHM of a Lorentzian instrument, which adds to every width. `partner`: the change of the index that goes
   * with the absorption, in its place (turnPair).
   */
  constructor(points: FitPoints, spec: TailSpec, gaussStd: number, lorentz = 0, partner = false) {
    this.points = points;
    this.spec = spec;
    this.gaussStd = gaussStd;
    this.lorentz = lorentz;
    this.partner = partner;
    this.leastWidth = Math.max(LEAST_WIDTH, 0.5 * stepAt(points.energy, spec.levels.gap));
    this.bands = spec.band ? groupBands(spec) : [];
    const m = points.energy.length;
    const { gap, rydberg, defect0 } = spec.levels;
    const low = spec.toN >= spec.fromN ? gap - rydberg / (spec.fromN - defect0) ** 2 : gap;
    this.grid = makeSparseGrid(
      points.energy,
      low,
      gap,
      1.5 * (gap - low) + 30 * (spec.widths.floor + lorentz),
    );
    const nodes = this.grid.nodes.length;
    this.scratch = Array.from({ length: 6 }, () => new Float64Array(nodes));
    this.sums = Array.from({ length: 2 + LEVEL_COUNT + WIDTH_COUNT }, () => new Float64Array(nodes));
    const node = (): Float64Array => new Float64Array(nodes);
    this.bandScratch = {
      absorptive: node(),
      dispersive: node(),
      absorptiveByGap: node(),
      absorptiveByRydberg: node(),
      absorptiveByBroadening: node(),
      dispersiveByGap: node(),
      dispersiveByRydberg: node(),
      dispersiveByBroadening: node(),
    };
    const make = (): Float64Array => new Float64Array(m);
    this.columns = {
      tiedEven: make(),
      tiedOdd: make(),
      heldEven: make(),
      heldOdd: make(),
      byLevel: Array.from({ length: LEVEL_COUNT }, make),
      byWidth: Array.from({ length: WIDTH_COUNT }, make),
    };
  }

  /** Fills `columns`; the derivatives only where asked for. */
  evaluate(levels: LevelValues, widths: WidthValues, factor: number, q: number, derivatives: boolean): void {
    const { spec, columns, sums } = this;
    for (const column of [columns.tiedEven, columns.tiedOdd, columns.heldEven, columns.heldOdd])
      column.fill(0);
    for (const column of [...columns.byLevel, ...columns.byWidth]) column.fill(0);
    for (const sum of sums) sum.fill(0);
    const law = { ...levels, defect4: 0 };
    for (let n = spec.fromN; n <= spec.toN; n++)
      this.addLine(n, law, widths, factor, q, derivatives, this.grid.nodes);
    this.addBand(law, widths, factor, q, derivatives);
    addFromGrid(this.grid, sums[0]!, 1, columns.tiedEven);
    addFromGrid(this.grid, sums[1]!, 1, columns.tiedOdd);
    if (derivatives) {
      for (let i = 0; i < LEVEL_COUNT; i++) addFromGrid(this.grid, sums[2 + i]!, 1, columns.byLevel[i]!);
      for (let i = 0; i < WIDTH_COUNT; i++)
        addFromGrid(this.grid, sums[2 + LEVEL_COUNT + i]!, 1, columns.byWidth[i]!);
    }
    this.addBelow(law, widths, q, derivatives);
    this.addContinuum(law, widths, q, derivatives);
  }

  private addLine(
    n: number,
    law: LevelParameters,
    widths: WidthValues,
    factor: number,
    q: number,
    derivatives: boolean,
    energies: Float64Array,
  ): void {
    const { sums, spec } = this;
    const s = tiedStrength(n, spec);
    const place = this.pair(n, law, widths, energies);
    const [l, d, lE, lG, dE, dG] = this.scratch as [
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
    ];
    const even = sums[0]!;
    const odd = sums[1]!;
    for (let i = 0; i < energies.length; i++) {
      even[i]! += s * l[i]!;
      odd[i]! += s * d[i]!;
    }
    if (!derivatives) return;
    for (let i = 0; i < energies.length; i++) {
      const byE = factor * s * (lE[i]! + 2 * q * dE[i]!);
      const byG = factor * s * (lG[i]! + 2 * q * dG[i]!);
      for (let p = 0; p < LEVEL_COUNT; p++) sums[2 + p]![i]! += byE * place.level[1 + p]!;
      for (let p = 0; p < WIDTH_COUNT; p++) sums[2 + LEVEL_COUNT + p]![i]! += byG * place.width[1 + p]!;
    }
  }

  private pair(
    n: number,
    law: LevelParameters,
    widths: WidthValues,
    energies: Float64Array,
  ): { level: Float64Array; width: Float64Array } {
    const level = new Float64Array(LEVEL.size);
    const width = new Float64Array(WIDTH.size);
    levelLaw(n, law, level);
    widthLaw(n, this.spec.levels.defect0, widths, width);
    const [l, d, lE, lG, dE, dG] = this.scratch as [
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
    ];
    linePairWithDerivatives(
      energies,
      0,
      energies.length,
      level[LEVEL.energy]!,
      width[WIDTH.width]! + this.lorentz,
      this.gaussStd,
      l,
      d,
      lE,
      lG,
      dE,
      dG,
    );
    this.turn([l, d], [lE, dE], [lG, dG]);
    return { level, width };
  }

  private turn(...pairs: readonly (readonly [Float64Array, Float64Array])[]): void {
    if (this.partner) for (const [absorptive, dispersive] of pairs) turnPair(absorptive, dispersive);
  }

  /**
   * The lines above toN run together. They are taken in groups, each a band from its lower to its upper edge, as high as its
   * lines are strong and as broad at both ends as they are in the middle: with one width at both ends the wings fall as
   * those of lines do.
   *   L = h [atan((E-E_c)/g) - atan((E-E_d)/g)]/(2 pi Ry),  D = h ln{[(E-E_c)^2 + g^2]/[(E-E_d)^2 + g^2]}/(4 pi Ry)
   */
  private addBand(
    law: LevelParameters,
    widths: WidthValues,
    factor: number,
    q: number,
    derivatives: boolean,
  ): void {
    const { sums, spec, partner } = this;
    const nodes = this.grid.nodes;
    const ofL = partner ? 2 * q : 1;
    const ofD = partner ? -1 : 2 * q;
    const bottom = new Float64Array(LEVEL.size);
    const top = new Float64Array(LEVEL.size);
    const width = new Float64Array(WIDTH.size);
    for (const { edgeN, upperN, middleN, height } of this.bands) {
      levelLaw(edgeN, law, bottom);
      levelLaw(upperN, law, top);
      widthLaw(middleN, spec.levels.defect0, widths, width);
      const lawWidth = Math.max(0, width[WIDTH.width]!) + this.lorentz;
      const g = this.edgeWidth(lawWidth) / 2;
      const slope = this.edgeSlope(lawWidth) / 2;
      const low = bottom[LEVEL.energy]!;
      const high = top[LEVEL.energy]!;
      const perAngle = height / (2 * Math.PI * law.rydberg);
      for (let i = 0; i < nodes.length; i++) {
        const a = nodes[i]! - low;
        const b = nodes[i]! - high;
        const below = 1 / (a * a + g * g);
        const above = 1 / (b * b + g * g);
        // The difference of angles as one angle, and of logarithms as one, so that far wings do not cancel.
        const l = perAngle * Math.atan2(g * (a - b), g * g + a * b);
        const d = 0.5 * perAngle * Math.log1p((a - b) * (a + b) * above);
        const even = partner ? -d : l;
        const odd = partner ? l : d;
        sums[0]![i]! += even;
        sums[1]![i]! += odd;
        if (!derivatives) continue;
        const scale = factor * perAngle;
        const byLow = -scale * (ofL * g + ofD * a) * below;
        const byHigh = scale * (ofL * g + ofD * b) * above;
        for (let p = 0; p < LEVEL_COUNT; p++)
          sums[2 + p]![i]! += byLow * bottom[1 + p]! + byHigh * top[1 + p]!;
        sums[3]![i]! -= (factor * (even + 2 * q * odd)) / law.rydberg;
        const byWidth = slope * scale * (ofL * (b * above - a * below) + ofD * g * (below - above));
        for (let p = 0; p < WIDTH_COUNT; p++) sums[2 + LEVEL_COUNT + p]![i]! += byWidth * width[1 + p]!;
      }
    }
  }

  /** The continuum, its edge as broad as the width law's limit at infinite n. */
  private addContinuum(law: LevelParameters, widths: WidthValues, q: number, derivatives: boolean): void {
    const { columns, spec, bandScratch: out, grid } = this;
    if (spec.continuum === false) return;
    const nodes = grid.nodes;
    const width = new Float64Array(WIDTH.size);
    widthLaw(FAR_N, spec.levels.defect0, widths, width);
    const limit = Math.max(0, width[WIDTH.width]!) + this.lorentz;
    continuumPair(nodes, 0, nodes.length, law.gap, law.rydberg, spec.envelope, this.edgeWidth(limit), out);
    this.turn(
      [out.absorptive, out.dispersive],
      [out.absorptiveByGap, out.dispersiveByGap],
      [out.absorptiveByRydberg, out.dispersiveByRydberg],
      [out.absorptiveByBroadening, out.dispersiveByBroadening],
    );
    addFromGrid(grid, out.absorptive, 1, columns.heldEven);
    if (spec.continuumOdd) addFromGrid(grid, out.dispersive, 1, columns.heldOdd);
    if (!derivatives) return;
    const odd = spec.continuumOdd ? 2 * q : 0;
    addFromGrid(grid, out.absorptiveByGap, 1, columns.byLevel[0]!);
    addFromGrid(grid, out.dispersiveByGap, odd, columns.byLevel[0]!);
    addFromGrid(grid, out.absorptiveByRydberg, 1, columns.byLevel[1]!);
    addFromGrid(grid, out.dispersiveByRydberg, odd, columns.byLevel[1]!);
    const slope = this.edgeSlope(limit);
    for (let p = 0; p < WIDTH_COUNT; p++) {
      const factor = slope * width[1 + p]!;
      if (factor === 0) continue;
      addFromGrid(grid, out.absorptiveByBroadening, factor, columns.byWidth[p]!);
      addFromGrid(grid, out.dispersiveByBroadening, factor * odd, columns.byWidth[p]!);
    }
  }

  /**
   * FWHM of an edge under a Lorentzian and a Gaussian: joined as for a Voigt line (Olivero and Longbothum 1977). Half
   * a sampling step is joined in quadrature: an edge sharper than the points would be placed between two of them with
   * an error of nothing.
   */
  private edgeWidth(width: number): number {
    const w = Math.hypot(width, this.leastWidth);
    if (this.gaussStd === 0) return w;
    const gauss = FWHM_OF_STD * this.gaussStd;
    return 0.5346 * w + Math.sqrt(0.2166 * w * w + gauss * gauss);
  }

  private addBelow(law: LevelParameters, widths: WidthValues, q: number, derivatives: boolean): void {
    const { columns, spec, points } = this;
    if (spec.below.length === 0) return;
    const m = points.energy.length;
    const [l, d, lE, lG, dE, dG] = Array.from({ length: 6 }, () => new Float64Array(m)) as [
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
    ];
    for (const n of spec.below) {
      const s = strength(n, spec.levels.defect0, spec.strength.law, spec.strength.base);
      const level = new Float64Array(LEVEL.size);
      const width = new Float64Array(WIDTH.size);
      levelLaw(n, law, level);
      widthLaw(n, spec.levels.defect0, widths, width);
      linePairWithDerivatives(
        points.energy,
        0,
        m,
        level[LEVEL.energy]!,
        width[WIDTH.width]! + this.lorentz,
        this.gaussStd,
        l,
        d,
        lE,
        lG,
        dE,
        dG,
      );
      this.turn([l, d], [lE, dE], [lG, dG]);
      for (let i = 0; i < m; i++) {
        columns.heldEven[i]! += s * l[i]!;
        columns.heldOdd[i]! += s * d[i]!;
        if (!derivatives) continue;
        const byE = s * (lE[i]! + 2 * q * dE[i]!);
        const byG = s * (lG[i]! + 2 * q * dG[i]!);
        for (let p = 0; p < LEVEL_COUNT; p++) columns.byLevel[p]![i]! += byE * level[1 + p]!;
        for (let p = 0; p < WIDTH_COUNT; p++) columns.byWidth[p]![i]! += byG * width[1 + p]!;
      }
    }
  }

  /** d(edgeWidth)/d width. */
  private edgeSlope(width: number): number {
    const w = Math.hypot(width, this.leastWidth);
    const inner = width / w;
    if (this.gaussStd === 0) return inner;
    const gauss = FWHM_OF_STD * this.gaussStd;
    return (0.5346 + (0.2166 * w) / Math.sqrt(0.2166 * w * w + gauss * gauss)) * inner;
  }
}

/** A group of lines that run together. */
export interface BandGroup {
  /** Half-integers n of its ends; the uppermost group ends at the gap. */
  readonly edgeN: number;
  readonly upperN: number;
  /** n in the middle of its energies, where its width is taken. */
  readonly middleN: number;
  /** In units of 1/(2 Ry). */
  readonly height: number;
}

/** Strength of a tied line above the free ones, with C = 1. */
function tiedStrength(n: number, spec: TailSpec): number {
  const { rollOff } = spec;
  const s = strength(n, spec.levels.defect0, spec.strength.law, spec.strength.base);
  return rollOff === undefined ? s : s / (1 + (n / rollOff.halfN) ** rollOff.exponent);
}

const GROUP_RATIO = 1.35;
const LAST_GROUP_N = 200;

/**
 * Heights in units of 1/(2 Ry): sum of s_n over the lines of a group by sum of (n-delta)^-3, that is by the energy it
 * spans. They differ from 1 because s_n is a law of n and the spacing one of n - delta. Taken at the law the tail was
 * built with, so they are constants of the fit.
 */
export function groupBands(spec: TailSpec): BandGroup[] {
  const { defect0, defect2 } = spec.levels;
  const depth = (n: number): number => (n - defectAt(n, defect0, defect2)) ** -2;
  const groups: BandGroup[] = [];
  for (let low = spec.toN + 1; ;) {
    const high = Math.max(low + 1, Math.round(low * GROUP_RATIO));
    const edgeN = low - 0.5;
    if (high > LAST_GROUP_N) {
      const { rollOff } = spec;
      const height = rollOff === undefined ? 1 : 1 / (1 + (low / rollOff.halfN) ** rollOff.exponent);
      groups.push({ edgeN, upperN: FAR_N, middleN: defect0 + Math.SQRT2 * (edgeN - defect0), height });
      return groups;
    }
    let sum = 0;
    for (let n = low; n < high; n++) sum += tiedStrength(n, spec);
    const upperN = high - 0.5;
    const height = (2 * sum) / (depth(edgeN) - depth(upperN));
    const middleN = defect0 + ((depth(edgeN) + depth(upperN)) / 2) ** -0.5;
    groups.push({ edgeN, upperN, middleN, height });
    low = high;
  }
}

/** Sampling step where an energy lies, or at the nearer end of the points. */
function stepAt(energy: Float64Array, at: number): number {
  const last = energy.length - 1;
  if (last < 1) return 0;
  let i = 1;
  while (i < last && energy[i]! < at) i++;
  return energy[i]! - energy[i - 1]!;
}
