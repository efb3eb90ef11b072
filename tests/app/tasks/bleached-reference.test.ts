import { describe, expect, it } from "vitest";
import { analysePower, wordIssue } from "../../../app/tasks/index.ts";
import { RUN, SILENT } from "../../support/analyse-bytes.ts";
import {
  CRYSTAL,
  makePowerSeries,
  saturationOf,
  SERIES,
  seriesFile,
  type SyntheticPowerSeries,
} from "../../support/make-power-series.ts";

/** Narrow lines, seen far up, that bleach as n^10 without end: S P at 0.1 uW is 0.29 at n = 25 and 1.8 at n = 30. */
const BLEACHED: SyntheticPowerSeries = {
  ...SERIES,
  points: 5000,
  powers_uW: [0.1, 5],
  lastBleachingN: 400,
  change: () => ({ floor_eV: 2e-6 }),
};

function analysed(
  series: SyntheticPowerSeries,
): Extract<ReturnType<typeof analysePower>, { ok: true }>["value"]["result"] {
  const outcome = analysePower(
    {
      files: [{ file: "series.csv", bytes: seriesFile(series, makePowerSeries(series)) }],
      choices: {
        material: { preset: "cuprous-oxide-yellow-p" },
        power: { draws: 200 },
        uncertainty: { systematic: false, profile: false },
      },
    },
    RUN,
    SILENT,
  );
  if (!outcome.ok) throw new Error(JSON.stringify(outcome.issues.map(wordIssue)));
  return outcome.value.result;
}

describe("a series whose lowest power bleaches the highest lines already", () => {
  const result = analysed(BLEACHED);
  const power = result.power!;

  it("gets the lines that the lowest spectrum on its own hid below its tail, and says what it rests on", () => {
    const alone = result.lines.at(-1)!.n;
    const together = power.lines.at(-1)!.n;
    expect(together).toBeGreaterThan(alone);
    const note = result.notes.find(({ code }) => code === "reference-bleached");
    expect(note?.text).toContain("0.1 uW");
    expect(note?.text).toContain(`n = ${alone + 1} to ${together}`);
    expect(note?.remedy).toContain("lower power");
  });

  it("has a tail of the strength of the law once what is bleached is taken off it, and no misfit", () => {
    const [reference] = power.fit!.sources;
    // Derived: the tail was made with the law's strength times 1/(1 + S P); a tenth for a half that the lines give
    expect(Math.abs(reference!.tail! - 1)).toBeLessThan(0.1);
    // Derived: chi square per degree of freedom is 1 +- 0.024; the noise is estimated, to a few per cent
    expect(Math.abs(reference!.reduced_chi2! - 1)).toBeLessThan(0.1);
  });

  it("reads the saturation of the lines that the lowest power leaves nearly whole within four standard errors", () => {
    for (const line of power.lines.filter(({ n }) => n <= 24))
      // Derived: the parameters that made the series.
      expect(
        Math.abs(line.saturation_per_uW.value! - saturationOf(BLEACHED, line.n)) /
          line.saturation_per_uW.sigma!,
      ).toBeLessThan(4);
    // Derived: as above.
    expect(Math.abs(power.fit!.gap_eV.value! - CRYSTAL.gap_eV) / power.fit!.gap_eV.sigma!).toBeLessThan(4);
  });
});
