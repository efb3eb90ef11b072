import { z } from "zod";

// As in protocol-schema.ts: read when a schema is made, so it has to stand before each.
z.config({ jitless: true });

const positive = z.number().positive();
/** Relative standard uncertainty; null: the default that the result states. */
const relative = z.number().min(0).max(3).nullable().default(null);

/**
 * Choices for a series of spectra of one sample at several powers. Powers in uW, lengths in um, times in ps, energies
 * in eV. `null` means "not said": a default is taken and marked as one in the result (`inputs`, notes). Every key has a
 * default here, so that protocols written before it was known still hold.
 */
export const powerProtocolSchema = z.strictObject({
  // What the powers are.
  /** Powers typed in, uW, in the order in which the spectra are given; they replace what headers and names say. */
  values_uW: z.array(z.number().min(0)).min(2).nullable().default(null),
  /** Where the power stands in a file name, `{power}` for number and unit: `run_{power}_a`. Null: looked for. */
  file_pattern: z.string().min(1).nullable().default(null),
  /** Unit of a power that stands without one. Null: uW, with a note. */
  unit: z.enum(["nW", "uW", "mW", "W"]).nullable().default(null),
  /** What each spectrum of the series may have for itself in the joint fit. */
  free: z
    .strictObject({
      gap: z.boolean().default(false),
      rydberg: z.boolean().default(false),
      defect: z.boolean().default(false),
    })
    .prefault({}),

  // How the series was taken.
  /** Null: separate-pump, with note `excitation-assumed`. */
  excitation: z.enum(["separate-pump", "scanned-probe", "broadband"]).nullable().default(null),
  /** Fixed pump on one line: its photon energy. The bleaching then belongs to excitons of that line. */
  pump_energy_eV: positive.nullable().default(null),
  /** Diameter of the exciting beam on the sample. Null: densities and volumes are not determined. */
  spot_diameter_um: positive.nullable().default(null),
  /** Null: flat, with note `profile-assumed`. */
  spot_profile: z.enum(["flat", "gaussian"]).nullable().default(null),
  /** What the diameter of a Gaussian beam means. Null: full for a flat beam, 1/e2 for a Gaussian one. */
  spot_definition: z.enum(["1/e2", "fwhm", "full"]).nullable().default(null),
  /** Diameter of the weak probe where another beam pumps, by the same definition. Null: as the pump. */
  probe_diameter_um: positive.nullable().default(null),
  /** Part of the stated power that arrives on the sample's front face. Null: 1, marked as a default. */
  transmission_to_sample: z.number().gt(0).max(1).nullable().default(null),

  // Relative standard uncertainties (of the logarithm), common to the whole series.
  value_sigma: relative,
  spot_sigma: relative,
  transmission_sigma: relative,
  thickness_sigma: relative,
  reflectance_sigma: relative,
  lifetime_sigma: relative,

  // What is known of the excitons.
  /** One lifetime for all lines, or [n, ps] pairs; else hbar over the width law's homogeneous part. */
  lifetime_ps: z
    .union([positive, z.array(z.tuple([z.int().min(1), positive])).min(1)])
    .nullable()
    .default(null),
  /** The interaction that expected volumes are compared by; both are always computed where their coefficient is known. */
  interaction: z.enum(["dipole-dipole", "van-der-waals"]).default("dipole-dipole"),
  /** C3 = this times n^4, ueV um^3. Null: 2.37e-4, an order of magnitude. */
  c3_ueV_um3: positive.nullable().default(null),
  /** C6 = this times n^11, ueV um^6. Null: not determined. */
  c6_ueV_um6: positive.nullable().default(null),
  /** One standard error of either coefficient as a factor. Null: 3 for the default coefficient, 1.5 for a given one. */
  coefficient_factor: z.number().min(1).max(100).nullable().default(null),
  /** Blocked where the interaction is this times the full width. */
  kappa: z.number().gt(0).max(2).default(0.5),
  /** Draws of the Monte Carlo (seed: `uncertainty.seed`). */
  draws: z.int().min(200).max(100_000).default(4000),
});

export type PowerProtocol = z.output<typeof powerProtocolSchema>;
