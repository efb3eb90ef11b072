/**
 * What a figure of one fitted spectrum needs. Energies in eV, signal in `unit`.
 * Shapes  energy, signal, sigma, used, model, background, tail, residual (m, the same points as the spectrum).
 */
export interface Curves {
  readonly unit: "1/cm" | "1";
  readonly energy_eV: Float64Array;
  readonly signal: Float64Array;
  readonly sigma: Float64Array;
  /** 1 where the point took part in the fit. */
  readonly used: Uint8Array;
  /** NaN outside the fitted window. */
  readonly model: Float64Array;
  readonly background: Float64Array;
  /** Lines above the last resolved one and the continuum; null where the tail was left out. */
  readonly tail: Float64Array | null;
  /** (signal - model)/sigma; NaN where not fitted. */
  readonly residual: Float64Array;
  /** Each line alone on about 300 energies of its own, dense near its centre. */
  readonly lines: readonly {
    readonly n: number;
    readonly energy_eV: Float64Array;
    readonly value: Float64Array;
  }[];
}
