import { expect, test } from "vitest";
import { pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { makeSpectrum, spectrumFile, type SyntheticSeries } from "../../support/make-spectrum.ts";

const SERIES: SyntheticSeries = {
  gap_eV: 2.172,
  rydberg_eV: 0.0905,
  defect0: 0.21,
  firstN: 2,
  law: "p-envelope",
  floor_eV: 10e-6,
  coefficient_eV: 0.0155,
  exponent: 3,
  strength: 12,
  asymmetry: -0.15,
  continuumTop_eV: 2.3,
  background: (e) => 15 + 185 * Math.sqrt(e - 2.0464),
};

test("points further apart than high lines are wide still see these lines one by one, and not their mean", () => {
  const grid = [
    [2.13, 2.16, 900],
    // 16 ueV apart: the spacing from n = 22 on, where lines are 11 ueV wide.
    [2.16, 2.1731, 800],
  ] as const;
  for (const seed of [1, 2]) {
    const bytes = spectrumFile(makeSpectrum(SERIES, { grid, sigma: 0.6, seed }), 0.6);
    const { fit, series, tail } = resultOf(bytes, {
      material: { preset: "cuprous-oxide-yellow-p" },
      uncertainty: { systematic: false },
    });
    // Derived: chi square of 1,700 points scatters by 3.4 %, the estimated noise by 2 % more; four of both
    expect(Math.abs(fit!.reduced_chi2! - 1)).toBeLessThan(0.17);
    for (const key of ["gap_eV", "rydberg_eV", "defect0"] as const)
      expect(Math.abs(pullOf(series![key], SERIES[key])), key).toBeLessThan(4);
    // Derived: the tail has the law's strength
    expect(Math.abs(pullOf(tail!.factor, 1))).toBeLessThan(4);
  }
});
