import { z } from "zod";

// As in protocol-schema.ts: read when a schema is made, so it has to stand before each.
z.config({ jitless: true });

const number = z.number().nullable();
/** As in result-schema.ts, which imports this file. */
const quantity = z.strictObject({ value: number, sigma: number, low: number, high: number });
/**
 * Median and interval of a positive quantity with lognormal inputs; `factor` is the multiplicative standard error
 * (value times or over factor), `sigma` the standard error to first order.
 */
const spread = z.strictObject({ ...quantity.shape, factor: number });
const range = z.tuple([z.int(), z.int()]);
const numbers = z.array(number);

/** A saturation law fitted to one quantity (area or peak) of one line. */
const saturationFit = z.strictObject({
  /** At zero power; eV times the unit of the signal for an area, that unit for a peak. */
  zero: quantity,
  /** Initial relative fall per uW of stated power. */
  saturation_per_uW: quantity,
  chi2: number,
  dof: z.int(),
  p: number,
});

/** A slope against power with its limits: `limit` bounds its size at 95 % where it is not seen. */
const trend = z.strictObject({
  per_uW: quantity,
  /** At the highest power of the series. */
  at_highest: quantity,
  significance: number,
  limit: number,
});

const expectedVolume = z.strictObject({
  interaction: z.enum(["dipole-dipole", "van-der-waals"]),
  coefficient_from: z.enum(["given", "default", "not determined"]),
  /** Where the interaction is kappa times the width at zero power. */
  radius_um: spread,
  /** Excluded volume (4 pi/3) R^3, times the slab factor. */
  hard_um3: spread,
  /** Averaged over distance with a soft edge. */
  soft_um3: spread,
  slab_factor: number,
});

export const powerLineSchema = z.strictObject({
  n: z.int(),
  /**
   * bleaches: S above 2 standard errors; not-seen: |S| below 2, upper limit only; rises: S below -2;
   * not-determined: no fit.
   */
  reading: z.enum(["bleaches", "not-seen", "rises", "not-determined"]),
  area0: quantity,
  saturation_per_uW: quantity,
  /** One-sided 95 %, where bleaching is not seen. */
  saturation_limit_per_uW: number,
  /** Of the area. */
  half_power_uW: quantity,
  area: saturationFit.nullable(),
  peak: saturationFit.nullable(),
  /** Area and peak, each turned into the S that enters the volume, differ by this many standard errors. */
  area_peak_difference: number,
  /** Fall of chi square of the law against constant areas, and its probability with one degree of freedom. */
  bleaching_test: z.strictObject({ gain: number, p: number }),
  /** A0 (1 - S P + c P^2), S of either sign. */
  unbounded_test: z.strictObject({
    saturation_per_uW: quantity,
    curvature_per_uW2: quantity,
    gain: number,
  }),
  /** The law in P^m: 1 where it holds. */
  exponent_test: z.strictObject({ exponent: quantity, gain: number, p: number }),
  /** Energy, eV, and full width at P -> 0, eV; the homogeneous part by the width law. */
  energy_eV: quantity,
  width0_eV: quantity,
  homogeneous_width_eV: quantity,
  lifetime_ps: quantity,
  lifetime_from: z.enum(["given", "width-law", "width", "not determined"]),
  /** alpha_n d and alpha_tot d at E_n, P -> 0. */
  line_depth: quantity,
  total_depth: quantity,
  absorbed_fraction: number,
  /** Excitons of this line per um^3 and uW where nothing bleaches. */
  density_per_uW: spread,
  /** True density and blocked fraction at the highest power. */
  density_at_highest_um3: number,
  blocked_fraction_at_highest: number,
  blockade_volume_um3: spread,
  /** Radius of a sphere of that volume. */
  blockade_radius_um: spread,
  /** Upper limits (95 %) where bleaching is not seen. */
  blockade_volume_limit_um3: number,
  expected: z.array(expectedVolume),
  /** Of the chosen interaction. */
  expected_volume_um3: spread,
  measured_over_expected: spread,
  /** Mean orbit radius. */
  orbit_radius_um: quantity,
  radius_over_orbit: number,
  radius_over_thickness: number,
  /** Power at which power broadening has shrunk the expected volume by 2. */
  shrinkage: z.strictObject({ exponent: number, at_highest: number }),
  /** Parts of the variance of ln V by input, summing to 1. */
  budget: z.array(z.strictObject({ input: z.string(), share: z.number() })),
});

/** What one n is good for. */
export const usefulnessSchema = z.strictObject({
  n: z.int(),
  /** To the nearer neighbour, eV. */
  spacing_eV: quantity,
  width_eV: quantity,
  /** Spacing over width. */
  addressability: quantity,
  addressable: z.boolean().nullable(),
  lifetime_ps: quantity,
  orbit_radius_um: quantity,
  blockade_radius_um: spread,
  /** Measured, or expected where no measured volume is there. */
  blockade_from: z.enum(["measured", "expected", "not determined"]),
  /** Diameter of a flat spot through the whole crystal that holds one excitation. */
  single_spot_um: spread,
});

const scaling = z.strictObject({
  exponent: quantity,
  /** The same by the laws of this sample's own widths and areas. */
  predicted: quantity,
  /** For widths and areas exactly n^-3; null where another line is pumped. */
  ideal: number,
  fit_n: range,
  chi2: number,
  dof: z.int(),
  p: number,
});

/** One spectrum as it took part in a joint fit. */
const powerSourceSchema = z.strictObject({
  label: z.string(),
  file: z.string(),
  sha256: z.string(),
  power_uW: z.number(),
  power_from: z.enum(["typed in", "column header", "header line", "file name"]),
  points: z.int(),
  reduced_chi2: number,
  /** Factor of the tail. */
  tail: number,
  /** Lines too weak for a width of their own. */
  held_widths: z.array(z.int()),
});

/** The part `power` of a result. */
export const powerSchema = z.strictObject({
  excitation: z.enum(["separate-pump", "scanned-probe", "broadband"]),
  /** Law of the areas. */
  law: z.enum(["separate-pump", "scanned-probe", "gaussian-self", "gaussian-scanned", "gaussian-two-beam"]),
  /** Chi square of the areas under the laws of other ways to take the series, summed over the lines; least first. */
  law_comparison: z.array(
    z.strictObject({
      law: z.string(),
      chi2: z.number(),
      dof: z.int(),
      chosen: z.boolean(),
      /** S that enters the volume under this law over that under the chosen one, mean of the lines. */
      saturation_ratio: number,
    }),
  ),
  /** Errors of areas and peaks were multiplied by this, because repeats at one power scatter more than they say. */
  repeat_factor: z.number(),
  spectra: z.array(
    z.strictObject({
      label: z.string(),
      power_uW: z.number(),
      gap_eV: quantity,
      apparent_gap_eV: quantity,
      highest_n: z.int().nullable(),
      /** Chi square of this spectrum in the joint fit and its number of points. */
      chi2: number,
      points: z.int().nullable(),
    }),
  ),
  /** What was fitted together, and how. */
  fit: z
    .strictObject({
      /** Parameters common to all spectra. */
      shared: z.array(z.string()),
      gap_eV: quantity,
      rydberg_eV: quantity,
      defect0: quantity,
      defect2: quantity,
      termination: z.enum(["gradient", "step", "cost", "iterationLimit", "cancelled", "notFinite"]),
      chi2: z.number(),
      dof: z.int(),
      reduced_chi2: number,
      iterations: z.int(),
      sources: z.array(powerSourceSchema),
      /** Spectra of the control series, where one took part. */
      control: z.array(powerSourceSchema).optional(),
      /** Spectra that could not take part, and why. */
      failed: z.array(z.strictObject({ label: z.string(), message: z.string() })),
    })
    .optional(),
  lines: z.array(powerLineSchema),
  /** S_n ~ n^k; null with fewer than three bleaching lines. */
  exponent: scaling.nullable(),
  /** V_n ~ n^k. */
  volume_exponent: scaling.nullable(),
  /** Correlations of the S_n. */
  correlation: z.strictObject({ n: z.array(z.int()), matrix: z.array(z.array(z.number())) }),
  /** Fixed pump on n': volume that one exciton n' blocks for n. */
  inter_state: z
    .strictObject({
      pump_n: z.int().nullable(),
      pump_energy_eV: z.number(),
      volumes: z.array(z.strictObject({ n: z.int(), volume_um3: spread })),
    })
    .nullable(),
  /** Every number that went in, where it came from and its relative standard error. */
  inputs: z.array(
    z.strictObject({
      name: z.string(),
      key: z.string(),
      value: number,
      unit: z.string(),
      relative_sigma: number,
      from: z.enum(["given", "preset", "default", "fit", "not determined"]),
      sigma_from: z.enum(["given", "default", "fit", "none"]),
    }),
  ),
  /** Shares of the variance of ln V, mean over the lines with a volume; largest first. */
  budget: z.array(z.strictObject({ input: z.string(), share: z.number() })),
  /** What else the power does. */
  other: z.strictObject({
    gap_shift_eV: trend,
    broadening: z.array(z.strictObject({ n: z.int(), ...trend.shape })),
    /** Relative growth of the lowest lines' width, a thermometer. */
    heating: z.strictObject({ n: z.array(z.int()), ...trend.shape }),
    highest_n: z.strictObject({
      at_lowest: z.int().nullable(),
      at_highest: z.int().nullable(),
      lost: z.int().nullable(),
    }),
    plasma: z.array(z.strictObject({ evidence: z.string(), value: number, speaks: z.string() })),
  }),
  crystal: z.array(usefulnessSchema),
  /** For figures: everything on one grid of powers, uW. */
  curves: z.strictObject({
    power_uW: z.array(z.number()),
    lines: z.array(
      z.strictObject({
        n: z.int(),
        /** The law on the grid. */
        area: numbers,
        peak: numbers,
        density_um3: numbers,
        blocked_fraction: numbers,
        measured_volume_um3: numbers,
        expected_volume_um3: numbers,
        /** The data: power, area, its sigma, peak, its sigma, width, its sigma. */
        data: z.array(
          z.strictObject({
            power_uW: z.number(),
            area: number,
            area_sigma: number,
            peak: number,
            peak_sigma: number,
            width_eV: number,
            width_sigma_eV: number,
            energy_eV: number,
            energy_sigma_eV: number,
            /** The volume that this one power gives by itself: [law's inverse of area over area0]/density. */
            volume_um3: number,
            volume_sigma_um3: number,
          }),
        ),
      }),
    ),
  }),
});

export type PowerResult = z.output<typeof powerSchema>;
export type PowerLineResult = z.output<typeof powerLineSchema>;
export type UsefulnessResult = z.output<typeof usefulnessSchema>;
