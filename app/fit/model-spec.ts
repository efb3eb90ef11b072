import type { StrengthBase, StrengthEnvelope, WidthBase, WidthFloorKind } from "../laws/index.ts";
import type { ContinuumEnvelope } from "../lines/index.ts";
import type { ConstraintSpec } from "./constraint-spec.ts";

/** The points that are fitted. Shapes (m); energy ascending in eV, sigma positive, signal and sigma in one unit. */
export interface FitPoints {
  readonly energy: Float64Array;
  readonly signal: Float64Array;
  readonly sigma: Float64Array;
  /** Neighbours that count as one, where they share their noise; absent where they are independent. */
  readonly pointsAsOne?: number;
}

/** A background column that is known before the fit, with the name and unit its coefficient is reported under. */
export interface BackgroundColumn {
  readonly term: string;
  readonly name: string;
  readonly unit: string;
  /** (m) */
  readonly values: Float64Array;
  /** Where it has structure of its own, as lines have; none by default. */
  readonly features?: readonly { readonly energy: number; readonly width: number }[];
}

/** Additive fringes: cos and sin amplitudes of the fit before, and the period the columns are made with. */
export interface FringeWave {
  readonly period: number;
  /** Energy at which the phase is counted, and the stretch it is counted over (eV). */
  readonly reference: number;
  readonly span: number;
  readonly cos: number;
  readonly sin: number;
}

/** gap, Rydberg energy (eV), delta0, delta2: only the first `count` are parameters of the law, the rest are held. */
export interface LevelValues {
  readonly gap: number;
  readonly rydberg: number;
  readonly defect0: number;
  readonly defect2: number;
}

export interface WidthValues {
  readonly floor: number;
  readonly coefficient: number;
  readonly exponent: number;
  readonly base: WidthBase;
  readonly floorKind: WidthFloorKind;
}

/**
 * How the laws follow from the lines that are free. A law parameter is p = p0 + gain (x - x0), with x the energies
 * (or widths) of the free lines: a weighted least-squares fit of the law, linearised where it was last fitted, so
 * that the whole model has exact derivatives and no penalty terms.
 * Shapes  gain (parameters x lines, row-major), at (lines).
 */
export interface LawLink {
  readonly gain: Float64Array;
  readonly at: Float64Array;
  readonly parameters: number;
}

/** What lies above the last free line, the continuum, and strong lines just below the window. */
export interface TailSpec {
  /** Discrete tied lines fromN..toN; above toN they run together and are treated as a band up to the gap. */
  readonly fromN: number;
  readonly toN: number;
  /** Whether the lines above toN are there, as a band up to the gap; false where the series is cut off at toN. */
  readonly band: boolean;
  /** Whether the continuum follows the lines' strength; false where it is one of the smeared columns. */
  readonly continuum?: boolean;
  /** Lines below the window that reach in with their wings. */
  readonly below: readonly number[];
  readonly levels: LevelValues;
  readonly levelLink: LawLink;
  readonly widths: WidthValues;
  readonly widthLink: LawLink;
  /** C = sum_j strengthShare_j A_j: weighted least squares of the strength law, which is linear in the areas. */
  readonly strengthShare: Float64Array;
  readonly strength: { readonly law: StrengthEnvelope; readonly base: StrengthBase };
  /** Tied lines above the free ones fall short of the strength law by 1/(1 + (n/halfN)^exponent): bleached by light. */
  readonly rollOff?: { readonly halfN: number; readonly exponent: number };
  readonly envelope: ContinuumEnvelope;
  /** The continuum carries the asymmetry of the lines too (odd partner of its edge). */
  readonly continuumOdd: boolean;
  /** Whether the factor f of the tied lines is free (bounded by 0 and 1.2) or held at `factor`. */
  readonly factorFree: boolean;
  readonly factor: number;
}

export interface ModelSpec {
  /** n of the lines with an area of their own, ascending. */
  readonly ns: readonly number[];
  /** Standard deviation of the Gaussian instrument in eV; 0 for none. */
  readonly gaussStd: number;
  /** The same for each line where it changes over the window (`gaussStd` then holds at the gap). Shape (lines). */
  readonly lineStds?: Float64Array;
  /** FWHM of a Lorentzian instrument in eV: adds to every width, which are those without it. */
  readonly instrumentLorentz?: number;
  /** `each`: a common q, and odd areas of the lines beside it (for rules line by line). */
  readonly asymmetry: "shared" | "free" | "zero" | "each";
  /**
   * `null`: every line energy is free. Else the energies of the lines in `tiedNs` are the level law itself, with
   * `count` parameters (gap, Rydberg energy, then delta0, delta2 where free).
   */
  readonly tiedLevels: {
    readonly values: LevelValues;
    readonly count: number;
    readonly tiedNs: readonly number[];
  } | null;
  readonly tail: TailSpec | null;
  readonly background: readonly BackgroundColumn[];
  /** The change of the index that goes with the lines, in place of their absorption (turnPair); false by default. */
  readonly partner?: boolean;
  /** Rules line by line and lines of other series; none by default. */
  readonly constraints?: ConstraintSpec;
}

export interface LineStart {
  readonly n: number;
  readonly energy: number;
  readonly width: number;
}
