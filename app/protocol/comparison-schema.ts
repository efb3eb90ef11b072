import { z } from "zod";
import { noteSchema, quantitySchema } from "./result-schema.ts";

export const COMPARISON_SCHEMA = "rungline-comparison/1";
/** Of the choices alone, as a report carries them. */
export const COMPARISON_CHOICES_SCHEMA = "rungline-comparison-choices/1";

const number = z.number().nullable();

/** Parameters that results are compared by, in the order in which they are shown. */
export const COMPARED_PARAMETERS = [
  "gap_eV",
  "rydberg_eV",
  "defect0",
  "width_floor_eV",
  "width_coefficient_eV",
  "width_exponent",
  "highest_n",
  "highest_resolved_n",
  "strength_coefficient",
  "tail_factor",
  "background_slope",
  "urbach_energy_eV",
  "signal_to_noise",
] as const;
const parameterName = z.enum(COMPARED_PARAMETERS);
export type ComparedParameter = z.output<typeof parameterName>;

/** Choices of a comparison; every one has a default. */
export const comparisonChoicesSchema = z.strictObject({
  parameters: z
    .array(parameterName)
    .min(1)
    .default([...COMPARED_PARAMETERS]),
  /** `total`: statistical and systematic part in quadrature; `statistical`: where the systematic part is common to all. */
  errors: z.enum(["total", "statistical"]).default("total"),
  /** Batch that the others are compared with. Null: only each with each. */
  reference: z.string().min(1).nullable().default(null),
  /** Header fact (key or label) or column of `values` that trends are fitted against. */
  against: z.string().min(1).nullable().default(null),
  /** Typed facts by file or sample: `sample` and `batch` replace the header's, others add to it. */
  values: z
    .array(z.strictObject({ of: z.string().min(1), facts: z.record(z.string(), z.string()) }))
    .default([]),
  /** Chance of any false difference per parameter, and chance to find a difference of the size that is stated. */
  alpha: z.number().gt(0).lt(0.5).default(0.05),
  power: z.number().gt(0.5).lt(1).default(0.8),
  /** Level of intervals. */
  level: z.number().gt(0).lt(1).default(0.6827),
  /** Weights of a quality figure by parameter; a negative weight where less is better. Empty: no figure. */
  quality: z.partialRecord(parameterName, z.number()).default({}),
  /** Line at which power series are compared. Null: the highest n that most of them have a volume of. */
  power_n: z.int().min(1).nullable().default(null),
});
export type ComparisonChoices = z.output<typeof comparisonChoicesSchema>;
export type ComparisonChoicesInput = z.input<typeof comparisonChoicesSchema>;

const measured = z.strictObject({
  value: number,
  /** One statistical standard error; scaled by the residuals of the law where the law was rejected. */
  statistical: number,
  /** Systematic part; null where it was not judged. */
  systematic: number,
  /** What the comparison uses: after `choices.errors`. */
  sigma: number,
  /** Why it is left out; null where it takes part. */
  left_out: z.string().nullable(),
});

const sampleSchema = z.strictObject({
  sample: z.string(),
  batch: z.string(),
  /** Where batch and sample come from. */
  named_by: z.strictObject({ sample: z.string(), batch: z.string() }),
  /** The results that were combined: several where a sample was measured several times. */
  results: z.array(z.strictObject({ file: z.string(), sha256: z.string(), version: z.string() })),
  date: z.string().nullable(),
  temperature_K: number,
  against: number,
  doubts: z.array(z.string()),
  parameters: z.partialRecord(parameterName, measured),
  /** Width and area times n^3 of each line, for one picture of all samples. */
  lines: z.array(z.strictObject({ n: z.int(), width_eV: quantitySchema, area_n3: quantitySchema })),
});
export type ComparedSample = z.output<typeof sampleSchema>;

/** Q after Cochran with its probability; Birge ratio, the root of Q over its degrees of freedom; share of Q above dof. */
const homogeneity = z.strictObject({ q: number, dof: z.int(), p: number, birge: number, i2: number });

const scatter = z.strictObject({
  /** Standard deviation of true values beyond the stated errors, after Paule and Mandel; null where not determined. */
  tau: number,
  low: number,
  high: number,
  dof: z.int(),
});

const difference = z.strictObject({
  first: z.string(),
  second: z.string(),
  /** second minus first. */
  difference: quantitySchema,
  dof: number,
  p: number,
  /** Corrected after Holm within this parameter and this list. */
  p_corrected: number,
  seen: z.boolean(),
  /** The size of difference that would have been seen. */
  detectable: number,
});

const comparedSchema = z.strictObject({
  name: parameterName,
  unit: z.string(),
  samples: z.int(),
  /** Are all samples alike within their errors? */
  homogeneity,
  within: scatter,
  between: scatter.extend({ der_simonian_laird_tau: number }),
  /** Common mean over batches, with the scatter between them; the second sigma from the scatter itself. */
  mean: z.strictObject({ value: number, sigma: number, sigma_from_scatter: number }),
  batches: z.array(
    z.strictObject({
      batch: z.string(),
      samples: z.int(),
      mean: quantitySchema,
      homogeneity,
    }),
  ),
  pairs: z.array(difference),
  /** Against the chosen batch; empty without one. */
  shifts: z.array(difference),
  trend: z
    .strictObject({
      against: z.string(),
      unit: z.string(),
      samples: z.int(),
      /** Per unit of `against`. */
      slope: quantitySchema,
      /** Value of the line at `centre`. */
      at_centre: quantitySchema,
      centre: z.number(),
      tau: number,
      homogeneity,
      dof: number,
      p: number,
      seen: z.boolean(),
      detectable: number,
    })
    .nullable(),
});
export type ComparedPart = z.output<typeof comparedSchema>;
export type ComparedDifference = z.output<typeof difference>;

const lawParameter = z.strictObject({ name: z.string(), unit: z.string(), quantity: quantitySchema });
const temperatureLaw = z.strictObject({
  law: z.enum(["varshni", "bose-einstein", "phonons", "acoustic", "optical"]),
  parameters: z.array(lawParameter),
  chi2: number,
  dof: z.int(),
  p: number,
  /** chi2/c + 2 k, c the reduced chi square of the best law where even that is rejected, else 1. */
  aic: number,
  /** Above the best law of this series. */
  aic_difference: number,
  /** exp(-difference/2) over the sum of all. */
  weight: number,
  stationary: z.boolean(),
  /** Standard errors are multiplied by this where the law is rejected (p < 0.01); 1 elsewhere. */
  scaled_by: z.number(),
  /** The fitted law on the grid of its series, eV: drawable also where a parameter by itself is not determined. */
  curve: z.array(number),
  /** (value - law)/sigma of each point of its series. */
  residuals: z.array(z.number()),
});
export type TemperatureLaw = z.output<typeof temperatureLaw>;

const temperatureSeries = z.strictObject({
  /** `gap_eV`, `width_floor_eV` or `width_eV[n]`. */
  quantity: z.string(),
  n: z.int().nullable(),
  /** Whose runs these are; null where the series goes over several samples. */
  sample: z.string().nullable(),
  batch: z.string().nullable(),
  points: z.array(
    z.strictObject({ temperature_K: z.number(), value: z.number(), sigma: z.number(), file: z.string() }),
  ),
  /** Temperatures of the laws' curves, K. */
  grid_K: z.array(z.number()),
  laws: z.array(temperatureLaw),
  /** The law with the lowest information criterion; `decided` where it leads every law that does not hold it by 6 or more. */
  preferred: z.string().nullable(),
  decided: z.boolean(),
});
export type TemperatureSeries = z.output<typeof temperatureSeries>;

export const temperatureSchema = z.strictObject({
  series: z.array(temperatureSeries),
  notes: z.array(noteSchema),
});
export type TemperatureResult = z.output<typeof temperatureSchema>;

/** `factor`: multiplicative standard error where logarithms are compared, null elsewhere. */
const spread = z.strictObject({ ...quantitySchema.shape, factor: number });

const comparedPowerPart = z.strictObject({
  name: z.enum(["saturation_per_uW", "blockade_volume_um3", "exponent"]),
  unit: z.string(),
  /** Of the line; null for the exponent. */
  n: z.int().nullable(),
  /** Logarithms are compared: means are geometric, differences ratios, scatters and detectable sizes factors. */
  logarithmic: z.boolean(),
  samples: z.array(
    z.strictObject({
      sample: z.string(),
      batch: z.string(),
      file: z.string(),
      quantity: spread,
      /** One-sided at 95 %, where only that is known. */
      limit: number,
      /** By the sample's own widths and areas (exponent), or of the interaction (volume). */
      expected: number,
      left_out: z.string().nullable(),
    }),
  ),
  homogeneity,
  within: scatter,
  between: scatter,
  mean: spread,
  batches: z.array(z.strictObject({ batch: z.string(), samples: z.int(), mean: spread })),
  pairs: z.array(difference.extend({ difference: spread })),
  shifts: z.array(difference.extend({ difference: spread })),
});
export type ComparedPowerPart = z.output<typeof comparedPowerPart>;
export type ComparedSpread = z.output<typeof spread>;

const comparedPower = z.strictObject({
  /** The line that is compared, and those that could be. */
  n: z.int().nullable(),
  numbers: z.array(z.int()),
  parts: z.array(comparedPowerPart),
  /** Every line of every series, for one picture. */
  series: z.array(
    z.strictObject({
      sample: z.string(),
      batch: z.string(),
      file: z.string(),
      lines: z.array(
        z.strictObject({
          n: z.int(),
          saturation_per_uW: spread,
          blockade_volume_um3: spread,
          saturation_limit_per_uW: number,
          blockade_volume_limit_um3: number,
        }),
      ),
    }),
  ),
  notes: z.array(noteSchema),
});
export type ComparedPower = z.output<typeof comparedPower>;

export const comparisonSchema = z.strictObject({
  schema: z.literal(COMPARISON_SCHEMA),
  choices: comparisonChoicesSchema,
  samples: z.array(sampleSchema),
  parameters: z.array(comparedSchema),
  /** A weighted sum of stated parts; null without weights. */
  quality: z
    .strictObject({
      parts: z.array(
        z.strictObject({
          name: parameterName,
          weight: z.number(),
          /** (value - origin)/scale is weighted: origin the mean of the reference batch or of all, scale the spread. */
          origin: z.number(),
          scale: z.number(),
        }),
      ),
      samples: z.array(
        z.strictObject({
          sample: z.string(),
          batch: z.string(),
          figure: quantitySchema,
          contributions: z.partialRecord(parameterName, z.number()),
        }),
      ),
    })
    .nullable(),
  temperature: temperatureSchema.nullable(),
  /** Power series side by side; null with fewer than two. */
  power: comparedPower.nullable(),
  notes: z.array(noteSchema),
  run: z.strictObject({ version: z.string(), node: z.string(), started: z.string() }),
});
export type Comparison = z.output<typeof comparisonSchema>;
