import { z } from "zod";
import { powerSchema } from "./power-schema.ts";
import { protocolSchema } from "./protocol-schema.ts";

export const RESULT_SCHEMA = "rungline-result/1";

const number = z.number().nullable();
/** value, one standard error, interval at the protocol's level; null where not determined. */
export const quantitySchema = z.strictObject({ value: number, sigma: number, low: number, high: number });

export const noteSchema = z.strictObject({
  code: z.string(),
  level: z.enum(["assumption", "doubt"]),
  about: z.string(),
  text: z.string(),
  remedy: z.string(),
});

export const lineSchema = z.strictObject({
  n: z.int(),
  energy_eV: quantitySchema,
  /** FWHM of the Lorentzian part. */
  width_eV: quantitySchema,
  /** eV times the unit of the signal. */
  area: quantitySchema,
  /** q of A (L + 2 q D); the shared value where it is shared. */
  asymmetry: quantitySchema,
  /** Area over its standard error. */
  significance: z.number(),
  /** Gain of the information criterion when the line is added; null for lines that were never in question. */
  bic_gain: number,
  /** Highest point of the line alone, in the unit of the signal. */
  peak: quantitySchema,
  /** Distance to the next line above by the level law. */
  spacing_eV: number,
  width_over_spacing: number,
  lifetime_ps: quantitySchema,
  /** Energy minus level law. */
  law_offset_eV: quantitySchema,
  /** Whether the level law was fitted to this line. */
  in_level_fit: z.boolean(),
  /** area times n^3. */
  area_n3: quantitySchema,
  /** Strength: oscillator strength times density, 1/cm^3; null unless alpha and index are known. */
  strength_per_cm3: quantitySchema,
});

export const ladderStepSchema = z.strictObject({
  n_min: z.int(),
  n_max: z.int(),
  gap_eV: quantitySchema,
  rydberg_eV: quantitySchema,
  defect0: quantitySchema,
  chi2: number,
  dof: z.int(),
  p: number,
});

/** Median and interval (at the protocol's level) of a number over resampled spectra; null where it was held. */
export const resampledSchema = z.strictObject({ median: number, low: number, high: number });

/** A line's pull on the series: leverage, residual in standard errors, and changes when it is left out, in standard errors. */
export const influenceSchema = z.strictObject({
  n: z.int(),
  leverage: number,
  residual: number,
  gap_eV: number,
  rydberg_eV: number,
  defect0: number,
});

const correlationSchema = z.strictObject({ names: z.array(z.string()), matrix: z.array(z.array(number)) });

/** What a referee asks of the fit; compact, so that a result stays readable. */
export const diagnosticsSchema = z.strictObject({
  /** Autocorrelation of the residuals at lags 1, 2, ... */
  autocorrelation: z.array(number),
  /** How many neighbouring points count as one, and the factor by which standard errors follow if that is allowed for. */
  correlation_time: number,
  error_factor: number,
  /** Ordered residuals against a normal distribution, at evenly spread probabilities. */
  quantiles: z.array(z.strictObject({ probability: z.number(), normal: z.number(), residual: z.number() })),
  skewness: number,
  excess_kurtosis: number,
  /** Of the parameters of the lines: energies, widths, areas by n, asymmetry, factor of the tail. */
  correlation: correlationSchema,
  /** Parameters correlated by more than 0.9 in size, strongest first. */
  strongest: z.array(z.strictObject({ a: z.string(), b: z.string(), correlation: z.number() })),
  influence: z.array(influenceSchema),
  condition: number,
  /** Parameters within five standard errors of a bound, and those at one. */
  bounds: z.array(
    z.strictObject({ name: z.string(), value: z.number(), bound: z.number(), distance_sigma: number }),
  ),
  /** Curves of equal likelihood in two series parameters; the level is of the two together. */
  regions: z.array(
    z.strictObject({
      x: z.string(),
      y: z.string(),
      level: z.number(),
      points: z.array(z.tuple([z.number(), z.number()])),
    }),
  ),
  /** Rise of chi square (value, rise) along one series parameter, the others fitted again. */
  profiles: z
    .array(z.strictObject({ name: z.string(), points: z.array(z.tuple([z.number(), z.number()])) }))
    .optional(),
});

export const resamplingSchema = z.strictObject({
  kind: z.enum(["parametric", "residual"]),
  count: z.int(),
  failed: z.int(),
  seed: z.int(),
  /** Residuals are drawn in blocks of this many neighbours. */
  block_points: z.int(),
  /** Coefficients of the autoregression that the noise was drawn with, lag 1 first; absent for white noise. */
  autoregression: z.array(z.number()).optional(),
  gap_eV: resampledSchema,
  rydberg_eV: resampledSchema,
  defect0: resampledSchema,
  width_exponent: resampledSchema,
  /** The draws that did not fail, in their order, the first 2,000 of them; parameters that were held are left out. */
  draws: z
    .strictObject({
      gap_eV: z.array(z.number()),
      rydberg_eV: z.array(z.number()),
      defect0: z.array(z.number()).optional(),
      width_exponent: z.array(z.number()).optional(),
    })
    .optional(),
  lines: z.array(
    z.strictObject({
      n: z.int(),
      energy_eV: resampledSchema,
      width_eV: resampledSchema,
      area: resampledSchema,
    }),
  ),
});

export const resultSchema = z.strictObject({
  schema: z.literal(RESULT_SCHEMA),
  source: z.strictObject({ file: z.string(), sha256: z.string(), points: z.int() }),
  reading: z.strictObject({
    /** What the columns were taken for, and why, in words. */
    columns: z.array(
      z.strictObject({ role: z.string(), column: z.int(), header: z.string(), reason: z.string() }),
    ),
    dialect: z.record(z.string(), z.union([z.string(), z.number(), z.boolean(), z.null()])),
    facts: z.array(z.strictObject({ key: z.string(), label: z.string(), text: z.string() })),
    skipped: z.int(),
    signal_unit: z.string(),
    range_eV: z.tuple([z.number(), z.number()]),
    used_points: z.int(),
    noise: z.strictObject({ source: z.string(), median_sigma: number }),
    /** Full width of the instrument by the header, where the protocol names none. */
    slit: z.strictObject({ value: z.number(), unit: z.enum(["eV", "nm", "cm-1"]) }).optional(),
  }),
  protocol: protocolSchema,
  status: z.enum(["converged", "not-converged", "no-series"]),
  notes: z.array(noteSchema),
  fit: z
    .strictObject({
      domain: z.enum(["alpha", "transmittance"]),
      termination: z.enum(["gradient", "step", "cost", "iterationLimit", "cancelled", "notFinite"]),
      /** Noise of the file or protocol, noise estimated from the data, or the residuals of the fit. */
      sigma_from: z.enum(["given", "estimated", "residuals"]),
      chi2: z.number(),
      dof: z.int(),
      reduced_chi2: number,
      aic: number,
      bic: number,
      durbin_watson: number,
      runs_p: number,
      lag1: number,
      effective_points: number,
      iterations: z.int(),
      reached: z.record(z.string(), number),
      tolerances: z.record(z.string(), number),
      condition: number,
      rank: z.int(),
      parameters: z.int(),
      window_eV: z.tuple([z.number(), z.number()]),
    })
    .nullable(),
  lines: z.array(lineSchema),
  /** Lines of other series (series.extra of the protocol). */
  extra: z
    .array(
      z.strictObject({
        name: z.string(),
        defect: quantitySchema,
        /** Where it is not that of the main series. */
        asymmetry: quantitySchema.optional(),
        lines: z.array(
          z.strictObject({
            n: z.int(),
            energy_eV: quantitySchema,
            width_eV: quantitySchema,
            area: quantitySchema,
            significance: z.number(),
          }),
        ),
      }),
    )
    .optional(),
  series: z
    .strictObject({
      gap_eV: quantitySchema,
      rydberg_eV: quantitySchema,
      defect0: quantitySchema,
      defect2: quantitySchema,
      fit_n: z.tuple([z.int(), z.int()]),
      chi2: number,
      dof: z.int(),
      p: number,
      /** Standard errors times the root of reduced chi square, given where the law is rejected. */
      scaled: z
        .strictObject({ gap_eV: quantitySchema, rydberg_eV: quantitySchema, defect0: quantitySchema })
        .nullable(),
      correlation: z.strictObject({ names: z.array(z.string()), matrix: z.array(z.array(z.number())) }),
      /** The same law for other ranges of n. */
      ranges: z.array(ladderStepSchema),
      /** Other readings of n, ranked by strength and width laws: not decided by energies. */
      readings: z.array(
        z.strictObject({
          shift: z.int(),
          defect0: number,
          strength_chi2: number,
          width_chi2: number,
          chosen: z.boolean(),
        }),
      ),
    })
    .nullable(),
  systematic: z
    .strictObject({
      gap_eV: number,
      rydberg_eV: number,
      defect0: number,
      /** A defect held for want of lines: its value, its uncertainty, and what that puts on the others (part of them). */
      held_defect: z
        .strictObject({
          defect0: z.number(),
          sigma: z.number(),
          assumed: z.boolean(),
          gap_eV: z.number(),
          rydberg_eV: z.number(),
        })
        .optional(),
      /** Relative error that thickness and reflectance put on all areas alike. */
      area_relative: number.optional(),
      trials: z.array(
        z.strictObject({
          name: z.string(),
          gap_eV: number,
          rydberg_eV: number,
          defect0: number,
          chi2: number,
          bic: number,
          runs_p: number,
          /** Whether the spread counts it: its BIC is within 10 of the best on the same points, or its window is another. */
          counted: z.boolean().optional(),
          /** Fitted to the same points, so that BIC can be compared. */
          same_points: z.boolean().optional(),
        }),
      ),
    })
    .nullable(),
  width_law: z
    .strictObject({
      floor_eV: quantitySchema,
      coefficient_eV: quantitySchema,
      exponent: quantitySchema,
      /** Where the exponent is held: what it is when it is freed, with its profile interval; a test of the held one. */
      free_exponent: quantitySchema.optional(),
      base: z.string(),
      fit_n: z.tuple([z.int(), z.int()]),
      chi2: number,
      dof: z.int(),
      p: number,
    })
    .nullable(),
  strength_law: z
    .strictObject({
      coefficient: quantitySchema,
      law: z.string(),
      base: z.string(),
      fit_n: z.tuple([z.int(), z.int()]),
      chi2: number,
      dof: z.int(),
      p: number,
      /** n at which area n^3 has fallen to half of the law; null where it has not. */
      half_at_n: number,
    })
    .nullable(),
  tail: z.strictObject({ factor: quantitySchema, from_n: z.int(), to_n: z.int() }).nullable(),
  derived: z
    .strictObject({
      bohr_radius_nm: quantitySchema,
      bohr_radius_from: z.string(),
      binding_eV: z.strictObject({ n: z.int(), ...quantitySchema.shape }),
      radius_um: z.array(z.strictObject({ n: z.int(), ...quantitySchema.shape })),
      highest_n: z.int().nullable(),
      highest_resolved_n: z.int().nullable(),
      apparent_gap_eV: quantitySchema,
    })
    .nullable(),
  background: z.array(
    z.strictObject({ term: z.string(), name: z.string(), unit: z.string(), quantity: quantitySchema }),
  ),
  diagnostics: diagnosticsSchema.nullable().optional(),
  /** Of `uncertainty.resample`. */
  resampled: resamplingSchema.nullable().optional(),
  /** Of a power series only. */
  power: powerSchema.nullable().optional(),
  run: z.strictObject({
    version: z.string(),
    node: z.string(),
    started: z.string(),
    seconds: z.strictObject({
      read: z.number(),
      guess: z.number(),
      solve: z.number(),
      uncertainty: z.number(),
    }),
  }),
});

export type RunglineResult = z.output<typeof resultSchema>;
export type Diagnostics = z.output<typeof diagnosticsSchema>;
export type Resampling = z.output<typeof resamplingSchema>;
export type LineResult = z.output<typeof lineSchema>;
export type LadderStep = z.output<typeof ladderStepSchema>;
