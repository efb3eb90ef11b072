import { describe, expect, it } from "vitest";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { resultSchema } from "../../../app/protocol/index.ts";
import { resultToCsv, resultToText } from "../../../app/report/index.ts";
import { resultOf } from "../../support/analyse-bytes.ts";
import { makeSpectrum, spectrumFile, type SyntheticSeries } from "../../support/make-spectrum.ts";

/** Three lines and nothing else: their true defect is not the preset's. */
const THREE: SyntheticSeries = {
  gap_eV: 2.172,
  rydberg_eV: 0.0905,
  defect0: 0.29,
  firstN: 2,
  law: "p-envelope",
  floor_eV: 20e-6,
  coefficient_eV: 0.016,
  exponent: 3,
  strength: 12,
  asymmetry: -0.15,
  share: (n) => (n <= 4 ? 1 : 0),
  continuumTop_eV: null,
  background: (e) => 15 + 100 * (e - 2.1),
};
const bytes = spectrumFile(
  makeSpectrum(THREE, { grid: [[2.12, 2.169, 2000]], sigma: 0.4, seed: 5 }),
  0.4,
  "Photon energy (eV),alpha (1/cm)",
);

function fitted(choices: { material?: object; series?: object; uncertainty?: object } = {}): RunglineResult {
  return resultOf(bytes, {
    tail: { model: "none" },
    ...choices,
    material: { preset: "cuprous-oxide-yellow-p", ...choices.material },
    lines: { n: [2, 3, 4] },
    background: [{ term: "polynomial", order: 1 }],
  });
}

describe("a defect that three lines leave held", () => {
  const result = fitted();
  const { series, systematic } = result;
  const held = systematic!.held_defect!;

  it("puts its own uncertainty on gap and Rydberg energy, apart from the statistical errors", () => {
    // Derived: the preset's defect, and the uncertainty that is assumed where none is given
    expect(held).toMatchObject({ defect0: 0.23, sigma: 0.1, assumed: true });
    expect(series!.defect0.sigma).toBe(0);
    expect(systematic!.gap_eV!).toBeGreaterThanOrEqual(held.gap_eV);
    expect(systematic!.rydberg_eV!).toBeGreaterThanOrEqual(held.rydberg_eV);
    // Derived: the true defect lies 0.6 of the uncertainty away, and so do gap and Rydberg energy, to second order in it
    for (const [value, truth, sigma] of [
      [series!.gap_eV.value!, THREE.gap_eV, held.gap_eV],
      [series!.rydberg_eV.value!, THREE.rydberg_eV, held.rydberg_eV],
    ] as const) {
      expect(Math.abs(value - truth) / sigma).toBeGreaterThan(0.4);
      expect(Math.abs(value - truth) / sigma).toBeLessThan(0.8);
    }
    expect(held.gap_eV).toBeGreaterThan(5 * series!.gap_eV.sigma!);
    expect(result.notes.map(({ code }) => code)).toContain("held-defect-uncertain");
    expect(() => resultSchema.parse(result)).not.toThrow();
  });

  it("is not held against the reader: files say that gap and Rydberg energy hold for it, and give it no interval", () => {
    expect(resultToText(result)).toMatch(/quantum defect delta +0\.23 \(held\) +\S+ +held\n/);
    expect(resultToText(result)).toContain("gap E_g, for the held defect");
    const defect = resultToCsv(result)
      .split("\r\n")
      .find((line) => line.includes(",series,defect0,"));
    expect(defect).toMatch(/,0\.23,0,,,,.*held/);
  });

  it("is known to the whole range of the convention where no material is named", () => {
    const unnamed = fitted({ material: { preset: null } }).systematic!.held_defect!;
    // Derived: standard deviation of a uniform distribution from -1/2 to 1/2
    expect(unnamed.sigma).toBeCloseTo(0.288675, 6);
  });

  it("is as uncertain as the protocol says, and exact where it says so", () => {
    const given = fitted({ material: { defect0_sigma: 0.02 } });
    const part = given.systematic!.held_defect!;
    expect(part.assumed).toBe(false);
    // Derived: nearly linear over a tenth; a fifth of the uncertainty
    expect(Math.abs((5 * part.gap_eV) / held.gap_eV - 1)).toBeLessThan(0.05);
    expect(fitted({ material: { defect0_sigma: 0 } }).systematic!.held_defect).toBe(undefined);
    expect(fitted({ series: { defect: "none" } }).systematic!.held_defect).toBe(undefined);
  });

  it("says as much where the lines are tied to the law", () => {
    const tied = fitted({ series: { mode: "tied" } }).systematic!.held_defect!;
    // Derived: to first order in the uncertainty instead of by two fits; a tenth of the width of the defect's reach
    expect(Math.abs(tied.gap_eV / held.gap_eV - 1)).toBeLessThan(0.2);
    expect(Math.abs(tied.rydberg_eV / held.rydberg_eV - 1)).toBeLessThan(0.2);
  });
});
