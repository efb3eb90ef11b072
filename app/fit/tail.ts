import { defectAt, LEVEL, levelLaw, strength, WIDTH, widthLaw, type LevelParameters } from "../laws/index.ts";
import {
  continuumPair,
  linePair,
  linePairWithDerivatives,
  turnPair,
  type ContinuumOutputs,
} from "../lines/index.ts";
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
  private readonly scratch: readonly [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  /** Tied lines with the band, and the band alone, on the nodes. */
  private readonly values: Record<"even" | "odd" | "bandEven" | "bandOdd", Float64Array>;
  /** Their derivatives by level and width laws. */
  private readonly slopes: readonly Float64Array[];
  private readonly leastWidth: number;
  private readonly bands: readonly BandGroup[];
  private readonly continuum: Record<keyof Required<ContinuumOutputs>, Float64Array>;
  /** The width law at infinite n. */
  private readonly limit = new Float64Array(WIDTH.size);

  /**
   * `lorentz`: FWHM of a Lorentzian instrument, which adds to every width. `partner`: the change of the index that goes
   * with the absorption, in its place (turnPair). `leastWidth` (eV): of an edge, as leastEdgeWidth gives it for all points
   * where these are some of them or stand for them.
   */
  constructor(
    points: FitPoints,
    spec: TailSpec,
    gaussStd: number,
    lorentz = 0,
    partner = false,
    leastWidth = leastEdgeWidth(points.energy, spec.levels.gap),
  ) {
    this.points = points;
    this.spec = spec;
    this.gaussStd = gaussStd;
    this.lorentz = lorentz;
    this.partner = partner;
    this.leastWidth = leastWidth;
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
    const node = (): Float64Array => new Float64Array(nodes);
    this.scratch = [node(), node(), node(), node(), node(), node()];
    this.values = { even: node(), odd: node(), bandEven: node(), bandOdd: node() };
    this.slopes = Array.from({ length: LEVEL_COUNT + WIDTH_COUNT }, node);
    this.continuum = {
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

  /** Fills the values among `columns`. */
  evaluate(levels: LevelValues, widths: WidthValues): void {
    const { spec, columns, grid, values, scratch } = this;
    const { tiedEven, tiedOdd, heldEven, heldOdd } = columns;
    for (const column of [tiedEven, tiedOdd, heldEven, heldOdd]) column.fill(0);
    const law = { ...levels, defect4: 0 };
    const { even, odd, bandEven, bandOdd } = values;
    this.addBand(law, widths);
    even.set(bandEven);
    odd.set(bandOdd);
    const [l, d] = scratch;
    for (let n = spec.fromN; n <= spec.toN; n++) {
      const s = tiedStrength(n, spec);
      const { energy, width } = this.place(n, law, widths);
      linePair(grid.nodes, 0, grid.nodes.length, energy, width, this.gaussStd, l, d);
      this.turn([l, d]);
      for (let i = 0; i < even.length; i++) {
        even[i]! += s * l[i]!;
        odd[i]! += s * d[i]!;
      }
    }
    addFromGrid(grid, even, 1, tiedEven);
    addFromGrid(grid, odd, 1, tiedOdd);
    for (const n of spec.below) {
      const s = strength(n, spec.levels.defect0, spec.strength.law, spec.strength.base);
      const { energy, width } = this.place(n, law, widths);
      this.onPoints((energies, first, end) => {
        linePair(energies, first, end, energy, width, this.gaussStd, l, d, -first);
        this.turn([l, d]);
        for (let i = first; i < end; i++) {
          heldEven[i]! += s * l[i - first]!;
          heldOdd[i]! += s * d[i - first]!;
        }
      });
    }
    this.addContinuum(law, widths);
  }

  /** Fills d T/d p for this f and q, at the laws of the last `evaluate`. */
  differentiate(levels: LevelValues, widths: WidthValues, factor: number, q: number): void {
    const { spec, columns, grid, slopes, scratch } = this;
    for (const column of [...columns.byLevel, ...columns.byWidth, ...slopes]) column.fill(0);
    const law = { ...levels, defect4: 0 };
    const [l, d, lE, lG, dE, dG] = scratch;
    for (let n = spec.fromN; n <= spec.toN; n++) {
      const s = factor * tiedStrength(n, spec);
      const { energy, width, level, widthSlopes } = this.place(n, law, widths);
      const { nodes } = grid;
      const std = this.gaussStd;
      linePairWithDerivatives(nodes, 0, nodes.length, energy, width, std, l, d, lE, lG, dE, dG);
      this.turn([lE, dE], [lG, dG]);
      for (let i = 0; i < nodes.length; i++) {
        lE[i] = s * (lE[i]! + 2 * q * dE[i]!);
        lG[i] = s * (lG[i]! + 2 * q * dG[i]!);
      }
      for (let p = 0; p < LEVEL_COUNT; p++) addTimes(slopes[p]!, 0, lE, level[1 + p]!, nodes.length);
      for (let p = 0; p < WIDTH_COUNT; p++)
        addTimes(slopes[LEVEL_COUNT + p]!, 0, lG, widthSlopes[1 + p]!, nodes.length);
    }
    this.differentiateBand(law, widths, factor, q);
    for (let i = 0; i < LEVEL_COUNT; i++) addFromGrid(grid, slopes[i]!, 1, columns.byLevel[i]!);
    for (let i = 0; i < WIDTH_COUNT; i++) addFromGrid(grid, slopes[LEVEL_COUNT + i]!, 1, columns.byWidth[i]!);
    for (const n of spec.below) {
      const s = strength(n, spec.levels.defect0, spec.strength.law, spec.strength.base);
      const { energy, width, level, widthSlopes } = this.place(n, law, widths);
      this.onPoints((energies, first, end) => {
        const std = this.gaussStd;
        linePairWithDerivatives(energies, first, end, energy, width, std, l, d, lE, lG, dE, dG, -first);
        this.turn([lE, dE], [lG, dG]);
        const height = end - first;
        for (let i = 0; i < height; i++) {
          lE[i] = s * (lE[i]! + 2 * q * dE[i]!);
          lG[i] = s * (lG[i]! + 2 * q * dG[i]!);
        }
        for (let p = 0; p < LEVEL_COUNT; p++) addTimes(columns.byLevel[p]!, first, lE, level[1 + p]!, height);
        for (let p = 0; p < WIDTH_COUNT; p++)
          addTimes(columns.byWidth[p]!, first, lG, widthSlopes[1 + p]!, height);
      });
    }
    this.differentiateContinuum(q);
  }

  /** Energy and width of line n, with the laws' slopes. */
  private place(
    n: number,
    law: LevelParameters,
    widths: WidthValues,
  ): { energy: number; width: number; level: Float64Array; widthSlopes: Float64Array } {
    const level = new Float64Array(LEVEL.size);
    const widthSlopes = new Float64Array(WIDTH.size);
    levelLaw(n, law, level);
    widthLaw(n, this.spec.levels.defect0, widths, widthSlopes);
    const width = widthSlopes[WIDTH.width]! + this.lorentz;
    return { energy: level[LEVEL.energy]!, width, level, widthSlopes };
  }

  /** All points, in blocks that the scratch columns hold. */
  private onPoints(use: (energies: Float64Array, first: number, end: number) => void): void {
    const { energy } = this.points;
    const block = this.scratch[0].length;
    for (let first = 0; first < energy.length; first += block)
      use(energy, first, Math.min(energy.length, first + block));
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
  private addBand(law: LevelParameters, widths: WidthValues): void {
    const { values, partner, grid } = this;
    const { nodes } = grid;
    const { bandEven, bandOdd } = values;
    bandEven.fill(0);
    bandOdd.fill(0);
    for (const group of this.bands) {
      const { low, high, g, perAngle } = this.placeBand(group, law, widths);
      for (let i = 0; i < nodes.length; i++) {
        const a = nodes[i]! - low;
        const b = nodes[i]! - high;
        // The difference of angles as one angle, and of logarithms as one, so that far wings do not cancel.
        const l = perAngle * Math.atan2(g * (a - b), g * g + a * b);
        const d = 0.5 * perAngle * Math.log1p(((a - b) * (a + b)) / (b * b + g * g));
        bandEven[i]! += partner ? -d : l;
        bandOdd[i]! += partner ? l : d;
      }
    }
  }

  private differentiateBand(law: LevelParameters, widths: WidthValues, factor: number, q: number): void {
    const { slopes, values, partner, grid, scratch } = this;
    const { nodes } = grid;
    const ofL = partner ? 2 * q : 1;
    const ofD = partner ? -1 : 2 * q;
    const [byLow, byHigh, byWidth] = scratch;
    for (const group of this.bands) {
      const { low, high, g, perAngle, slope, bottom, top, width } = this.placeBand(group, law, widths);
      const scale = factor * perAngle;
      for (let i = 0; i < nodes.length; i++) {
        const a = nodes[i]! - low;
        const b = nodes[i]! - high;
        const below = 1 / (a * a + g * g);
        const above = 1 / (b * b + g * g);
        byLow[i] = -scale * (ofL * g + ofD * a) * below;
        byHigh[i] = scale * (ofL * g + ofD * b) * above;
        byWidth[i] = slope * scale * (ofL * (b * above - a * below) + ofD * g * (below - above));
      }
      for (let p = 0; p < LEVEL_COUNT; p++) {
        addTimes(slopes[p]!, 0, byLow, bottom[1 + p]!, nodes.length);
        addTimes(slopes[p]!, 0, byHigh, top[1 + p]!, nodes.length);
      }
      for (let p = 0; p < WIDTH_COUNT; p++)
        addTimes(slopes[LEVEL_COUNT + p]!, 0, byWidth, width[1 + p]!, nodes.length);
    }
    const { bandEven, bandOdd } = values;
    const byRydberg = slopes[1]!;
    for (let i = 0; i < nodes.length; i++)
      byRydberg[i]! -= (factor * (bandEven[i]! + 2 * q * bandOdd[i]!)) / law.rydberg;
  }

  /** Edges of a group, half the width of both with its slope by the law's width, and its height by angle. */
  private placeBand(
    { edgeN, upperN, middleN, height }: BandGroup,
    law: LevelParameters,
    widths: WidthValues,
  ): PlacedBand {
    const bottom = new Float64Array(LEVEL.size);
    const top = new Float64Array(LEVEL.size);
    const width = new Float64Array(WIDTH.size);
    levelLaw(edgeN, law, bottom);
    levelLaw(upperN, law, top);
    widthLaw(middleN, this.spec.levels.defect0, widths, width);
    const lawWidth = Math.max(0, width[WIDTH.width]!) + this.lorentz;
    return {
      low: bottom[LEVEL.energy]!,
      high: top[LEVEL.energy]!,
      g: this.edgeWidth(lawWidth) / 2,
      slope: this.edgeSlope(lawWidth) / 2,
      perAngle: height / (2 * Math.PI * law.rydberg),
      bottom,
      top,
      width,
    };
  }

  /** The continuum, its edge as broad as the width law's limit at infinite n; its derivatives are kept. */
  private addContinuum(law: LevelParameters, widths: WidthValues): void {
    const { columns, spec, continuum: out, grid, limit } = this;
    if (spec.continuum === false) return;
    const { nodes } = grid;
    widthLaw(FAR_N, spec.levels.defect0, widths, limit);
    const width = Math.max(0, limit[WIDTH.width]!) + this.lorentz;
    continuumPair(nodes, 0, nodes.length, law.gap, law.rydberg, spec.envelope, this.edgeWidth(width), out);
    this.turn(
      [out.absorptive, out.dispersive],
      [out.absorptiveByGap, out.dispersiveByGap],
      [out.absorptiveByRydberg, out.dispersiveByRydberg],
      [out.absorptiveByBroadening, out.dispersiveByBroadening],
    );
    addFromGrid(grid, out.absorptive, 1, columns.heldEven);
    if (spec.continuumOdd) addFromGrid(grid, out.dispersive, 1, columns.heldOdd);
  }

  private differentiateContinuum(q: number): void {
    const { columns, spec, continuum: out, grid, limit } = this;
    if (spec.continuum === false) return;
    const odd = spec.continuumOdd ? 2 * q : 0;
    addFromGrid(grid, out.absorptiveByGap, 1, columns.byLevel[0]!);
    addFromGrid(grid, out.dispersiveByGap, odd, columns.byLevel[0]!);
    addFromGrid(grid, out.absorptiveByRydberg, 1, columns.byLevel[1]!);
    addFromGrid(grid, out.dispersiveByRydberg, odd, columns.byLevel[1]!);
    const slope = this.edgeSlope(Math.max(0, limit[WIDTH.width]!) + this.lorentz);
    for (let p = 0; p < WIDTH_COUNT; p++) {
      const factor = slope * limit[1 + p]!;
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

  /** d(edgeWidth)/d width. */
  private edgeSlope(width: number): number {
    const w = Math.hypot(width, this.leastWidth);
    const inner = width / w;
    if (this.gaussStd === 0) return inner;
    const gauss = FWHM_OF_STD * this.gaussStd;
    return (0.5346 + (0.2166 * w) / Math.sqrt(0.2166 * w * w + gauss * gauss)) * inner;
  }
}

interface PlacedBand {
  readonly low: number;
  readonly high: number;
  readonly g: number;
  readonly slope: number;
  readonly perAngle: number;
  readonly bottom: Float64Array;
  readonly top: Float64Array;
  readonly width: Float64Array;
}

/** out_i += factor x_i for i < count, out from place `at`. */
function addTimes(out: Float64Array, at: number, x: Float64Array, factor: number, count: number): void {
  if (factor === 0) return;
  for (let i = 0; i < count; i++) out[at + i]! += factor * x[i]!;
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

/** Half a sampling step at the gap, eV: an edge cannot be placed between two points. */
export function leastEdgeWidth(energy: Float64Array, gap: number): number {
  return Math.max(LEAST_WIDTH, 0.5 * stepAt(energy, gap));
}

/** Sampling step where an energy lies, or at the nearer end of the points. */
function stepAt(energy: Float64Array, at: number): number {
  const last = energy.length - 1;
  if (last < 1) return 0;
  let i = 1;
  while (i < last && energy[i]! < at) i++;
  return energy[i]! - energy[i - 1]!;
}
