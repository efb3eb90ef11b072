import { symmetric, NOT_DETERMINED, type Note, type Quantity } from "../../app/base/index.ts";
import { resolveProtocol, type LineResult, type RunglineResult } from "../../app/protocol/index.ts";

/** A result made by hand, valid by the schema: for tests of what is done with results, not of how they are found. */
export function makeResult(changes: Partial<RunglineResult> = {}): RunglineResult {
  const protocol = resolveProtocol({ material: { preset: "cuprous-oxide-yellow-p" } });
  if (!protocol.ok) throw new Error("the preset must resolve");
  return {
    schema: "rungline-result/1",
    source: { file: "crystal-7.csv", sha256: "ab".repeat(32), points: 9000 },
    reading: {
      columns: [
        { role: "axis", column: 1, header: "Photon energy / eV", reason: "named energy in eV" },
        { role: "signal", column: 2, header: "alpha (1/cm)", reason: "named alpha in 1/cm" },
      ],
      dialect: { delimiter: ",", decimal: "." },
      facts: [
        { key: "temperature", label: "T", text: "1.4 K" },
        { key: "power", label: "P", text: "12 uW" },
        { key: "sample", label: "Sample", text: 'crystal 7, "upper half"' },
      ],
      skipped: 2,
      signal_unit: "1/cm",
      range_eV: [2.14, 2.173],
      used_points: 8990,
      noise: { source: "estimated", median_sigma: 0.31 },
    },
    protocol: protocol.value,
    status: "converged",
    notes: [
      note(
        "assumption",
        "energy-may-come-from-air",
        "source",
        "The axis is taken as vacuum.",
        "Set axis.medium.",
      ),
      note("doubt", "law-rejected", "series.gap_eV", "The level law is rejected.", "Narrow series.fit_n."),
    ],
    fit: {
      domain: "alpha",
      termination: "cost",
      sigma_from: "given",
      chi2: 8950.25,
      dof: 8950,
      reduced_chi2: 1.0000279,
      aic: 9030.25,
      bic: 9314.4,
      durbin_watson: 1.99,
      runs_p: 0.41,
      lag1: 0.004,
      effective_points: 8921,
      iterations: 9,
      reached: { cost: 3e-13 },
      tolerances: { cost: 1e-12 },
      condition: 41000,
      rank: 40,
      parameters: 40,
      window_eV: [2.14, 2.17308],
    },
    lines: [makeLine(5, 2.16817, 128e-6), makeLine(6, 2.16934, 74e-6), makeLine(7, 2.17005, 47e-6)],
    series: {
      gap_eV: symmetric(2.172083, 0.0000123),
      rydberg_eV: symmetric(0.09213, 0.00031),
      defect0: symmetric(0.231, 0.018),
      defect2: NOT_DETERMINED,
      fit_n: [5, 14],
      chi2: 6.1,
      dof: 7,
      p: 0.53,
      scaled: null,
      correlation: {
        names: ["gap_eV", "rydberg_eV", "defect0"],
        matrix: [
          [1, 0.91, 0.87],
          [0.91, 1, 0.98],
          [0.87, 0.98, 1],
        ],
      },
      ranges: [
        {
          n_min: 5,
          n_max: 14,
          gap_eV: symmetric(2.172083, 0.0000123),
          rydberg_eV: symmetric(0.09213, 0.00031),
          defect0: symmetric(0.231, 0.018),
          chi2: 6.1,
          dof: 7,
          p: 0.53,
        },
        {
          n_min: 6,
          n_max: 14,
          gap_eV: symmetric(2.172081, 0.000014),
          rydberg_eV: symmetric(0.0919, 0.0004),
          defect0: symmetric(0.22, 0.03),
          chi2: 5.7,
          dof: 6,
          p: 0.46,
        },
      ],
      readings: [
        { shift: 0, defect0: 0.231, strength_chi2: 8, width_chi2: 9, chosen: true },
        { shift: 1, defect0: 1.231, strength_chi2: 80, width_chi2: 95, chosen: false },
      ],
    },
    systematic: {
      gap_eV: 0.00002,
      rydberg_eV: 0.0004,
      defect0: 0.02,
      trials: [
        {
          name: "linear background",
          gap_eV: 2.1721,
          rydberg_eV: 0.0924,
          defect0: 0.24,
          chi2: 9000,
          bic: 9350,
          runs_p: 0.2,
        },
      ],
    },
    width_law: {
      floor_eV: { value: 1.8e-6, sigma: 0.9e-6, low: 0.4e-6, high: 2.6e-6 },
      coefficient_eV: symmetric(0.016, 0.0002),
      exponent: { value: 3, sigma: 0, low: 3, high: 3 },
      base: "n",
      fit_n: [5, 14],
      chi2: 7.7,
      dof: 8,
      p: 0.46,
    },
    strength_law: {
      coefficient: symmetric(1.2, 0.03),
      law: "p-envelope",
      base: "n",
      fit_n: [5, 14],
      chi2: 9,
      dof: 9,
      p: 0.44,
      half_at_n: null,
    },
    tail: { factor: symmetric(0.97, 0.04), from_n: 15, to_n: 90 },
    derived: {
      bohr_radius_nm: { value: 1.11, sigma: 0, low: 1.11, high: 1.11 },
      bohr_radius_from: "given by the preset",
      binding_eV: { n: 2, ...symmetric(0.02935, 0.0001) },
      radius_um: [{ n: 14, ...symmetric(0.3252, 0.0011) }],
      highest_n: 14,
      highest_resolved_n: 12,
      apparent_gap_eV: symmetric(2.17196, 0.00004),
    },
    background: [
      { term: "polynomial", name: "constant", unit: "1/cm", quantity: symmetric(51.2, 0.4) },
      { term: "square-root", name: "height", unit: "1/cm", quantity: NOT_DETERMINED },
    ],
    run: {
      version: "0.1.0",
      node: "v20.20.2",
      started: "2026-01-02T03:04:05.000Z",
      seconds: { read: 0.02, guess: 0.1, solve: 0.3, uncertainty: 0.4 },
    },
    ...changes,
  };
}

export function makeLine(n: number, energy_eV: number, width_eV: number): LineResult {
  const small = (value: number): Quantity => symmetric(value, Math.abs(value) / 50);
  return {
    n,
    energy_eV: symmetric(energy_eV, 0.0000015),
    width_eV: small(width_eV),
    area: small(1.2 / n ** 3),
    asymmetry: symmetric(-0.21, 0.013),
    significance: 50,
    bic_gain: null,
    peak: small(80),
    spacing_eV: 0.001,
    width_over_spacing: 0.1,
    lifetime_ps: small(658.2119569e-6 / width_eV),
    law_offset_eV: symmetric(-0.4e-6, 1.5e-6),
    in_level_fit: n >= 6,
    area_n3: small(1.2),
    strength_per_cm3: NOT_DETERMINED,
  };
}

function note(level: Note["level"], code: string, about: string, text: string, remedy: string): Note {
  return { level, code, about, text, remedy };
}
