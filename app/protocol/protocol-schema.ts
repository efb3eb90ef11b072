import { z } from "zod";
import { powerProtocolSchema } from "./power-protocol.ts";

// The page's content policy forbids code made from strings, which zod would otherwise use for speed.
z.config({ jitless: true });

export const PROTOCOL_SCHEMA = "rungline-protocol/1";

const positive = z.number().positive();
const interval = z
  .tuple([z.number(), z.number()])
  .refine(([low, high]) => low < high, "low end above high end");
/** A column by its 1-based number or by its header name. */
const column = z.union([z.int().positive(), z.string().min(1)]).nullable();

export const backgroundTermSchema = z.discriminatedUnion("term", [
  z.strictObject({ term: z.literal("polynomial"), order: z.int().min(0).max(8) }),
  z.strictObject({ term: z.literal("square-root"), onset_eV: positive }),
  z.strictObject({ term: z.literal("urbach"), energy_eV: positive }),
  /** Interference in a plane-parallel plate; the period starts from here, or is found in the residuals. */
  z.strictObject({
    term: z.literal("fringes"),
    period_eV: positive.nullable().default(null),
    /**
     * In the transmitted light: the lines turn the phase by their own index, or the index is constant. `auto`: the
     * lines do, unless that leaves a misfit and the constant index describes the light better.
     */
    phase: z.enum(["auto", "lines", "constant"]).default("auto"),
  }),
  z.strictObject({
    term: z.literal("measured"),
    energy_eV: z.array(z.number()).min(2),
    value: z.array(z.number()).min(2),
  }),
]);

/**
 * What one parameter of some lines may do: held at a value, kept within bounds, tied to its law, shared by these lines, or
 * freed from a tie of all lines. Energies and widths in eV, areas in eV times the unit of the signal.
 */
export const lineConstraintSchema = z
  .strictObject({
    n: z.union([z.int().min(1).max(99), z.array(z.int().min(1).max(99)).min(1)]),
    parameter: z.enum(["energy", "width", "area", "asymmetry"]),
    hold: z.number().optional(),
    low: z.number().optional(),
    high: z.number().optional(),
    tie: z.enum(["law", "shared", "free"]).optional(),
  })
  .refine(
    ({ hold, low, high, tie }) =>
      [hold !== undefined, low !== undefined || high !== undefined, tie !== undefined].filter(Boolean)
        .length === 1,
    "one of hold, low/high, tie",
  )
  .refine(({ low, high }) => !((low ?? -Infinity) >= (high ?? Infinity)), "low end above high end")
  .refine(
    ({ parameter, tie }) => parameter !== "energy" || tie !== "shared",
    "energies of different n cannot be shared; tie them to the law",
  )
  .refine(
    ({ parameter, hold, low }) => parameter !== "width" || ((hold ?? 1) > 0 && (low ?? 0) >= 0),
    "widths are above zero",
  )
  .refine(
    ({ parameter, tie }) => parameter !== "asymmetry" || tie !== "law",
    "the law of the asymmetries is one of all lines: lines.asymmetry=law",
  );

/** Lines of another series that shares gap and Rydberg energy: energy gap - Ry/(n - defect)^2. */
export const extraSeriesSchema = z.strictObject({
  name: z.string().min(1),
  /** Where its quantum defect starts, or is held. */
  defect: z.number().min(-3).max(3),
  n: z.array(z.int().min(1).max(99)).min(1),
  hold_defect: z.boolean().default(false),
  /** `law`: widths by the width law of the main series; `free`: one of its own for every line. */
  width: z.enum(["law", "free"]).default("law"),
  /** `own`: one for all lines of this series, from two lines on; `shared`: that of the main series. */
  asymmetry: z.enum(["own", "shared"]).default("own"),
});

/**
 * Every choice that turns a file into a result. Energies in eV, thickness in um. `null` means "not said": the
 * reading or the analysis decides, and the result says what it decided in a note.
 */
export const protocolSchema = z.strictObject({
  schema: z.literal(PROTOCOL_SCHEMA),
  table: z.strictObject({
    encoding: z.enum(["utf-8", "utf-16le", "utf-16be", "windows-1252", "iso-8859-1"]).nullable(),
    delimiter: z.enum([",", ";", "\t", " "]).nullable(),
    decimal: z.enum([".", ","]).nullable(),
    header_line: z.int().min(0).nullable(),
  }),
  axis: z.strictObject({
    column,
    unit: z.enum(["eV", "meV", "nm", "Angstrom", "um", "cm-1", "THz"]).nullable(),
    medium: z.enum(["air", "vacuum"]).nullable(),
    air: z.strictObject({
      temperature_C: z.number().min(-40).max(100),
      pressure_Pa: z.number().min(0).max(140000),
      humidity: z.number().min(0).max(1),
      co2_ppm: z.number().min(0).max(2000),
    }),
    offset_sigma_eV: z.number().min(0),
    scale_sigma: z.number().min(0),
    /** Error of the axis that differs from line to line, in quadrature to each line's energy. */
    jitter_eV: z.number().min(0).default(0),
  }),
  signal: z.strictObject({
    column,
    quantity: z
      .enum(["transmittance", "absorbance", "optical-density", "optical-depth", "alpha", "counts"])
      .nullable(),
    /** The unit of the column where the header does not tell: fraction or percent of T; 1/cm, 1/mm, 1/um, 1/m of alpha. */
    unit: z.enum(["fraction", "percent", "1/cm", "1/mm", "1/um", "1/m"]).nullable(),
    sigma_column: column,
    reference_column: column,
    dark_column: column,
    thickness_um: positive.nullable(),
    /** Stray light as a part s of the incident light, T_read = (T + s)/(1 + s): a value, or a parameter of the fit. */
    stray_light: z
      .union([z.number().min(0).lt(1), z.literal("free")])
      .nullable()
      .default(null),
    /** One standard uncertainty of the thickness; it moves every area by the same part (systematic). */
    thickness_sigma_um: z.number().min(0).default(0),
    surface: z.strictObject({
      model: z.enum(["none", "single", "all"]),
      reflectance: z.number().min(0).lt(1).nullable(),
      /** One standard uncertainty of the reflectance, carried to the areas where all reflections are counted. */
      reflectance_sigma: z.number().min(0).lt(1).default(0),
      index: positive.nullable(),
      surround_index: positive,
    }),
  }),
  window_eV: interval.nullable(),
  mask_eV: z.array(interval),
  noise: z.strictObject({
    sigma: positive.nullable(),
    /** Readings of counts: electrons of one count, read noise in counts, and how many readings each value averages. */
    gain_e_per_count: positive.nullable().default(null),
    read_counts: z.number().min(0).default(0),
    accumulations: z.number().min(1).default(1),
    /** Isolated spikes, dead and clipped stretches that the data themselves show: named in any case, and left out or kept. */
    faulty_points: z.enum(["leave-out", "keep"]).default("leave-out"),
  }),
  material: z.strictObject({
    preset: z.string().nullable(),
    dimension: z.number().min(1.5).max(3),
    envelope: z.enum(["S", "P"]),
    first_n: z.int().min(1).max(20).nullable(),
    gap_eV: positive.nullable(),
    rydberg_eV: positive.nullable(),
    defect0: z.number().min(-3).max(3).nullable(),
    /** One standard uncertainty of `defect0`, for where too few lines leave it held; null: 0.1 is assumed, and said. */
    defect0_sigma: z.number().min(0).max(1).nullable().default(null),
    permittivity: positive.nullable(),
    reduced_mass: positive.nullable(),
    bohr_radius_nm: positive.nullable(),
    index: positive.nullable(),
  }),
  lines: z
    .strictObject({
      n: z.union([z.literal("auto"), z.array(z.int().min(1).max(99)).min(1)]),
      max_n: z.int().min(2).max(60),
      /** 0: none, whatever the header says. */
      slit_fwhm_eV: z.number().min(0).nullable(),
      /** The same in nm (a grating: constant in wavelength, so the energy width grows as E^2) or in cm^-1; one of the three. */
      slit_fwhm_nm: positive.nullable().default(null),
      slit_fwhm_cm1: positive.nullable().default(null),
      /** Full width of a Lorentzian instrument (a laser line): line widths are given without it. */
      instrument_lorentz_fwhm_eV: z.number().min(0).default(0),
      /** `law`: q = q0 + q1/n^2. */
      asymmetry: z.enum(["shared", "free", "zero", "law"]),
      /** Line by line; later ones win. */
      constraints: z.array(lineConstraintSchema).default([]),
      domain: z.enum(["auto", "alpha", "transmittance"]),
    })
    .refine(
      ({ slit_fwhm_eV, slit_fwhm_nm, slit_fwhm_cm1 }) =>
        [slit_fwhm_eV, slit_fwhm_nm, slit_fwhm_cm1].filter((one) => one !== null).length < 2,
      "the slit once: in eV, in nm or in cm^-1",
    ),
  tail: z.strictObject({
    /** `law`: lines above the last resolved one and the continuum follow the laws; `none`: left out. */
    model: z.enum(["law", "none"]),
    /** Highest n that the crystal still shows: lines above it are absent up to the gap. Null: the series goes on. */
    cutoff_n: z.int().min(2).max(200).nullable(),
    /** `auto`: where lines alone leave a misfit, what they have lost is looked for between them; `none`: it is not. */
    smeared: z.enum(["auto", "none"]).default("auto"),
  }),
  series: z.strictObject({
    defect: z.enum(["none", "constant", "ritz"]),
    mode: z.enum(["free", "tied"]),
    fit_n: z.union([
      z.literal("auto"),
      z
        .tuple([z.int().min(1), z.int().min(1)])
        .refine(([lowest, highest]) => lowest < highest, "the lowest n first, then a higher one"),
    ]),
    /** Other series with the same gap and Rydberg energy (F beside P, S and D with field or strain). */
    extra: z.array(extraSeriesSchema).default([]),
  }),
  width: z.strictObject({
    /** `tied`: the widths are the law itself wherever it describes them; see lines.constraints for single lines. */
    mode: z.enum(["free", "tied"]).default("free"),
    exponent: z.union([z.number().min(0).max(8), z.literal("free")]),
    base: z.enum(["n", "n-delta", "p-envelope"]),
    floor_kind: z.enum(["lorentzian", "gaussian", "none"]),
  }),
  strength: z.strictObject({
    /** `tied`: the areas are the law itself wherever it describes them. */
    mode: z.enum(["free", "tied"]).default("free"),
    law: z.enum(["cubic", "p-envelope", "sheet"]),
    base: z.enum(["n", "n-delta"]),
  }),
  background: z.array(backgroundTermSchema),
  uncertainty: z.strictObject({
    level: z.number().gt(0).lt(1),
    scale_by_residuals: z.boolean(),
    profile: z.boolean(),
    systematic: z.boolean(),
    seed: z.int().min(0),
    /**
     * `allow` carries the correlation of neighbouring residuals into every standard error; `note` only says by how much it
     * would widen them; `auto` allows for it where it is above 0.3.
     */
    correlated: z.enum(["auto", "note", "allow"]).default("auto"),
    /** Spectra drawn anew and fitted again: from the fit with the given noise, or with its own residuals. */
    resample: z.enum(["none", "parametric", "residual"]).default("none"),
    resamples: z.int().min(10).max(100_000).default(500),
  }),
  power: powerProtocolSchema.prefault({}),
});

export type Protocol = z.output<typeof protocolSchema>;
export type BackgroundTerm = z.output<typeof backgroundTermSchema>;

type PartialDeep<T> = T extends readonly unknown[]
  ? T
  : T extends object
    ? { [K in keyof T]?: PartialDeep<T[K]> }
    : T;
/** What a user writes: any part of a protocol; the rest comes from the preset and the defaults. */
export type ProtocolInput = PartialDeep<Protocol>;
