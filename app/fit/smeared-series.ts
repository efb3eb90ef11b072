import { LEVEL, levelLaw, levelSpacing, strength, WIDTH, widthLaw } from "../laws/index.ts";
import { continuumPair, linePair, type ContinuumEnvelope } from "../lines/index.ts";
import type { BackgroundColumn, LevelValues, TailSpec, WidthValues } from "./model-spec.ts";

/** Term that these columns are reported under. */
export const SMEARED = "smeared-series";

/** A line smeared over this many spacings leaves a ripple of 2 exp(-2 pi), 0.4 % of its height. */
const SPACINGS = 2;
/** n from knot to knot. */
const RATIO = 1.2;
/** Knots below and above the last line with an energy of its own. */
const BELOW = 5;
const ABOVE = 3;
const LAST_N = 300;
const FAR_N = 1e6;

export interface SmearedSeries {
  readonly levels: LevelValues;
  readonly widths: WidthValues;
  readonly strength: TailSpec["strength"];
  readonly envelope: ContinuumEnvelope;
  /** Highest n with a line of its own. */
  readonly top: number;
  readonly asymmetry: number;
  /** FWHM of a Lorentzian instrument. */
  readonly lorentz: number;
}

/**
 * What      What lines have lost and their surroundings still absorb (charges, fields and neighbours smear high lines before
 *           they take them away): the series of unit strength with every line as broad as two spacings, weighed by hats in
 *           ln n that add up to 1 above the lowest knots. A coefficient is the strength C_n that is smeared about the n of
 *           its knot; the last column ends in the continuum, which is as high as the series is at its gap. Nothing is assumed
 *           about how lines fade. Laws are those of the pass before.
 * Shapes    columns of the length of `energy`.
 * Units     1/eV; coefficients in eV times the unit of the signal.
 * Accuracy  wings of lines as broad as this reach past the gap: the columns at the gap add up to more than the law's height by
 *           about 4/(pi n) for coefficients of 1 from line n on. tests/app/analysis/smeared-lines.test.ts.
 * Source    midpoint rule for the sum over n; continuum: Elliott, Phys. Rev. 108, 1384 (1957).
 */
export function smearedColumns(
  energy: Float64Array,
  series: SmearedSeries,
  signalUnit: string,
): BackgroundColumn[] {
  const { levels, widths, strength: law, top, asymmetry: q } = series;
  const m = energy.length;
  const knots = smearedKnots(top);
  const columns = knots.map(() => new Float64Array(m));
  const level = new Float64Array(LEVEL.size);
  const width = new Float64Array(WIDTH.size);
  const l = new Float64Array(m);
  const d = new Float64Array(m);
  const features: { energy: number; width: number }[] = [];
  const first = Math.ceil(knots[0]! / RATIO);
  for (let n = first; n <= LAST_N; n++) {
    levelLaw(n, { ...levels, defect4: 0 }, level);
    widthLaw(n, levels.defect0, widths, width);
    const own = Math.max(0, width[WIDTH.width]!) + series.lorentz;
    const broad = own + SPACINGS * levelSpacing(n, levels.rydberg, levels.defect0, levels.defect2);
    features.push({ energy: level[LEVEL.energy]!, width: broad });
    linePair(energy, 0, m, level[LEVEL.energy]!, broad, 0, l, d);
    const s = strength(n, levels.defect0, law.law, law.base);
    knots.forEach((_, k) => {
      const share = s * hat(knots, k, n);
      if (share === 0) return;
      const column = columns[k]!;
      for (let i = 0; i < m; i++) column[i]! += share * (l[i]! + 2 * q * d[i]!);
    });
  }
  // From line 300 on the series is the continuum's height, up to the gap and beyond.
  levelLaw(LAST_N + 0.5, { ...levels, defect4: 0 }, level);
  widthLaw(FAR_N, levels.defect0, widths, width);
  const edge = Math.max(1e-9, width[WIDTH.width]!) + series.lorentz;
  const broad = edge + SPACINGS * levelSpacing(LAST_N, levels.rydberg, levels.defect0, levels.defect2);
  continuumPair(energy, 0, m, level[LEVEL.energy]!, levels.rydberg, series.envelope, broad, {
    absorptive: l,
    dispersive: d,
  });
  const last = columns[columns.length - 1]!;
  for (let i = 0; i < m; i++) last[i]! += l[i]! + 2 * q * d[i]!;
  return columns.map((values, k) => ({
    term: SMEARED,
    name: k === knots.length - 1 ? "continuum" : `n${Math.round(knots[k]!)}`,
    unit: signalUnit === "1" ? "eV" : `eV ${signalUnit}`,
    values,
    ...(k === 0 ? { features } : {}),
  }));
}

/** n of the hats' tops; the last stands for all above. */
export function smearedKnots(top: number): number[] {
  return Array.from({ length: BELOW + ABOVE + 1 }, (_, k) => top * RATIO ** (k - BELOW));
}

function hat(knots: readonly number[], k: number, n: number): number {
  const at = Math.log(n / knots[k]!) / Math.log(RATIO);
  if (at > 0 && k === knots.length - 1) return 1;
  return Math.max(0, 1 - Math.abs(at));
}
