import type { Note, Quantity } from "../base/index.ts";
import type { PowerResult, Protocol } from "../protocol/index.ts";

/** Places of the quantities of a line in a `LineTable`. */
export const LINE_QUANTITIES = { energy: 0, width: 1, area: 2, peak: 3, size: 4 } as const;
export type LineQuantity = 0 | 1 | 2 | 3;

/**
 * Line parameters of all spectra of one joint fit with their covariance between lines, powers and quantities.
 * Shapes: m spectra, k lines, values (4 m k) at `placeOf`, covariance (4mk x 4mk, row-major).
 * Units: energies and full widths eV, areas eV times the unit of the signal, peaks that unit. Values are NaN (and
 * their rows of the covariance zero) where a line is not in the model of a spectrum. A width or energy shared by all
 * spectra is repeated with covariance 1 between its copies.
 */
export interface LineTable {
  readonly n: readonly number[];
  readonly power_uW: readonly number[];
  readonly values: Float64Array;
  readonly covariance: Float64Array;
}

/** Of one spectrum, besides its lines. */
export interface PowerSpectrum {
  readonly label: string;
  readonly power_uW: number;
  /** Series limit of this spectrum where it was free, else null. */
  readonly gap_eV: Quantity | null;
  readonly apparent_gap_eV: Quantity | null;
  readonly highest_n: number | null;
  readonly chi2: number | null;
  readonly points: number | null;
}

export interface PowerInput {
  readonly spectra: readonly PowerSpectrum[];
  readonly table: LineTable;
  readonly signalUnit: "1/cm" | "1";
  /** Absorption at each line's centre without the line itself (background, wings of others, tail), at P -> 0 (k). */
  readonly surrounding: Float64Array;
  readonly surroundingSigma: Float64Array;
  /** Level law of the joint fit, with covariance (4 x 4, row-major) of gap, rydberg, defect0, defect2. */
  readonly series: {
    readonly gap_eV: number;
    readonly rydberg_eV: number;
    readonly defect0: number;
    readonly defect2: number;
    readonly covariance: Float64Array;
  } | null;
  /** Series of the same lines under a pump that makes pairs but no such excitons. */
  readonly control?: LineTable | undefined;
  readonly protocol: Protocol;
}

/** What the room returns: the part `power` of a result and what has to be said about it. */
export interface PowerJudgement {
  readonly power: PowerResult;
  readonly notes: readonly Note[];
}
