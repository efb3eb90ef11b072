import { describe, expect, test } from "vitest";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { doubtsOf, fixtureBytes, fixtureJson, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { makeSpectrum, spectrumFile, widthOf } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

interface Truth {
  readonly crystal: {
    readonly gap_eV: number;
    readonly rydberg_eV: number;
    readonly defect0: number;
    readonly strength_coefficient: number;
  };
  readonly lines: readonly { n: number; energy_eV: number; width_eV: number; area: number }[];
}

const fast = { uncertainty: { systematic: false, profile: false } };

function expectTruth(result: RunglineResult, { crystal, lines }: Truth): void {
  expect(result.status).toBe("converged");
  // Derived: 4 standard errors, the project's bar.
  expect(Math.abs(pullOf(result.series!.gap_eV, crystal.gap_eV))).toBeLessThan(4);
  expect(Math.abs(pullOf(result.series!.rydberg_eV, crystal.rydberg_eV))).toBeLessThan(4);
  expect(Math.abs(pullOf(result.series!.defect0, crystal.defect0))).toBeLessThan(4);
  for (const line of result.lines) {
    const { energy_eV, width_eV, area } = lines.find(({ n }) => n === line.n)!;
    expect(Math.abs(pullOf(line.energy_eV, energy_eV)), `E ${line.n}`).toBeLessThan(4);
    expect(Math.abs(pullOf(line.width_eV, width_eV)), `G ${line.n}`).toBeLessThan(4);
    expect(Math.abs(pullOf(line.area, area)), `A ${line.n}`).toBeLessThan(4);
  }
}

describe("high lines that fade into what lies between them", () => {
  const truth = fixtureJson<Truth>("generated/rolled-off_alpha.truth.json");
  const bytes = fixtureBytes("generated/rolled-off_alpha.csv");

  test.each([{}, { material: { preset: "cuprous-oxide-yellow-p" } }])(
    "are told one by one, and so is the gap: %j",
    (choices) => {
      const result = resultOf(bytes, { ...choices, ...fast });
      expectTruth(result, truth);
      // Derived: n = 16 keeps 3e-4 eV/cm, ten of the standard errors that its neighbours have.
      expect(result.lines.at(-1)!.n).toBeGreaterThanOrEqual(16);
      expect(doubtsOf(result)).toContain("lines-smeared");
      expect(doubtsOf(result)).not.toContain("misfit");
      const continuum = result.background.find(({ name }) => name === "continuum")!;
      // Derived: all that the lines have lost is in the truth, so the strength at the gap is the law's.
      expect(Math.abs(continuum.quantity.value! / truth.crystal.strength_coefficient - 1)).toBeLessThan(0.05);
    },
  );

  test("without looking between them the misfit is said", () => {
    const result = resultOf(bytes, { ...fast, tail: { smeared: "none" } });
    expect(doubtsOf(result)).toContain("misfit");
    expect(doubtsOf(result)).not.toContain("lines-smeared");
  });
});

test("lines that follow their law are not looked between", () => {
  const { series, sampling, heading, preset } = PRESET_CASES[0]!;
  const made = makeSpectrum(series, { ...sampling, seed: 5 });
  const result = resultOf(spectrumFile(made, sampling.sigma, heading), { material: { preset }, ...fast });
  expect(doubtsOf(result)).not.toContain("lines-smeared");
  expect(Math.abs(pullOf(result.lines.find(({ n }) => n === 5)!.width_eV, widthOf(series, 5)))).toBeLessThan(
    4,
  );
});

test("a background that is too stiff is not taken for strength between the lines", () => {
  // The demo has an onset far below the window, which a polynomial of order 2 alone does not follow.
  const { series } = fixtureJson<{ series: { gap_eV: number } }>("demo/TH-A1_transmission.truth.json");
  const result = resultOf(fixtureBytes("demo/TH-A1_transmission.csv"), { uncertainty: { profile: false } });
  expect(doubtsOf(result)).not.toContain("lines-smeared");
  expect(doubtsOf(result)).toContain("background-better");
  const { value, sigma } = result.series!.gap_eV;
  const spread = result.systematic!.gap_eV!;
  // Derived: 4 standard errors, statistical and systematic in quadrature.
  expect(Math.abs(value! - series.gap_eV)).toBeLessThan(4 * Math.hypot(sigma!, spread));
});
