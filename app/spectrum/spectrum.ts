import type { Note } from "../base/index.ts";

/** The part of a protocol that reading needs; a protocol fits this shape (rows 4 do not know each other). */
export interface ReadingChoices {
  readonly axis: {
    readonly column: number | string | null;
    readonly unit: AxisUnit | null;
    readonly medium: "air" | "vacuum" | null;
    readonly air: {
      readonly temperature_C: number;
      readonly pressure_Pa: number;
      readonly humidity: number;
      readonly co2_ppm: number;
    };
  };
  readonly signal: {
    readonly column: number | string | null;
    readonly quantity: SignalQuantity | "counts" | null;
    readonly unit: "fraction" | "percent" | "1/cm" | "1/mm" | "1/um" | "1/m" | null;
    readonly sigma_column: number | string | null;
    readonly reference_column: number | string | null;
    readonly dark_column: number | string | null;
    readonly thickness_um: number | null;
    /** 0: the thickness is taken as exact. */
    readonly thickness_sigma_um: number;
    readonly surface: {
      readonly model: "none" | "single" | "all";
      readonly reflectance: number | null;
      readonly index: number | null;
      readonly surround_index: number;
    };
  };
  readonly noise: {
    readonly sigma: number | null;
    readonly gain_e_per_count: number | null;
    readonly read_counts: number;
    readonly accumulations: number;
    readonly faulty_points: "leave-out" | "keep";
  };
  /** Widths of the instrument that the protocol names, which overrule the header's; absent: none is named. */
  readonly lines?: {
    readonly slit_fwhm_eV: number | null;
    readonly slit_fwhm_nm: number | null;
    readonly slit_fwhm_cm1: number | null;
  };
  /** Refractive index of the material, offered by a preset for the surface correction. */
  readonly material: { readonly index: number | null };
}

export type AxisUnit = "eV" | "meV" | "nm" | "Angstrom" | "um" | "cm-1" | "THz";
export type SignalQuantity = "transmittance" | "absorbance" | "optical-density" | "optical-depth" | "alpha";

/** What a column was taken for, and why. */
export interface ColumnRole {
  readonly role: "axis" | "signal" | "sigma" | "reference" | "dark" | "other";
  /** 1-based. */
  readonly column: number;
  readonly header: string;
  readonly reason: string;
}

/**
 * One curve of a run, ready to be fitted.
 * Shapes  all arrays (m), energy ascending and strictly increasing.
 * Units   energy eV (photon energy, vacuum); signal `unit`.
 */
export interface Spectrum {
  readonly file: string;
  readonly sha256: string;
  readonly energy_eV: Float64Array;
  /** The last digit of the light axis in its own unit and in eV, where values may have been rounded to it. */
  readonly axisRounding?: { readonly digit: number; readonly digit_eV: number };
  /** Line of the file of each point, 1-based. */
  readonly line?: Int32Array;
  /** Absorption coefficient alpha (1/cm) where the thickness is known or alpha was read, else optical depth alpha d (1). */
  readonly signal: Float64Array;
  readonly unit: "1/cm" | "1";
  /** d where it is known (protocol or header), also where alpha was read; null where not. */
  readonly thickness_cm: number | null;
  /** Full width of the instrument by the header, where the protocol names none. */
  readonly slit?: { readonly value: number; readonly unit: "eV" | "nm" | "cm-1" };
  /** One standard deviation of `signal` per point; NaN where a given sigma is missing (zero or blank). */
  readonly sigma: Float64Array;
  /** `column`, `protocol` or `estimated` (from the data, white part). */
  readonly noise: {
    readonly source: "column" | "protocol" | "estimated";
    readonly medianSigma: number;
    /** Neighbours that count as one, where they share their noise (smoothed, interpolated or oversampled readings). */
    readonly pointsAsOne?: number;
  };
  /** What was measured, before the logarithm; present where transmittance (or counts) was read. */
  readonly transmittance: {
    readonly value: Float64Array;
    readonly sigma: Float64Array;
    /** How alpha d follows from T. */
    readonly surface: "none" | "single" | "all";
    readonly reflectance: number;
    /** d in 1e-4 cm per um as needed: alpha (1/cm) = depth / thickness_cm; 1 where the signal is optical depth. */
    readonly thickness_cm: number;
  } | null;
  /** 1 where a point is used; 0 where it is not (missing sigma, T at or below zero in the alpha domain, outside the range). */
  readonly used: Uint8Array;
  readonly quantityRead: SignalQuantity | "counts";
  readonly axisUnitRead: AxisUnit;
  readonly medium: "air" | "vacuum";
  readonly columns: readonly ColumnRole[];
  readonly dialect: Readonly<Record<string, string | number | boolean | null>>;
  readonly facts: readonly {
    readonly key: string;
    readonly label: string;
    readonly text: string;
    readonly value: number | null;
    readonly unit: string | null;
  }[];
  readonly skippedRows: number;
  readonly notes: readonly Note[];
}
