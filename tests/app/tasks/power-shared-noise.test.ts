import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
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

type SeriesResult = Extract<ReturnType<typeof analysePower>, { ok: true }>["value"]["result"];

/** So weak that the tail above n = 10 stays whole. Without noise of its own; rho 0.8 between neighbours gives (1 + rho)/(1 - rho) = 9 points that count as one. */
const SMALL: SyntheticPowerSeries = { ...SERIES, points: 2600, powers_uW: [0.05, 0.1, 0.2], sigma: 0 };
const CLEAN = makePowerSeries(SMALL);
const RHO = 0.8;
const SIGMA = 4;

function analysed(rho: number, correlated: string, seed: number): SeriesResult {
  const random = makeRandom(seed);
  const signals = CLEAN.signals.map((signal) => {
    let last = random.normal();
    return signal.map((value) => {
      last = rho * last + Math.sqrt(1 - rho * rho) * random.normal();
      return value + SIGMA * last;
    });
  });
  const outcome = analysePower(
    {
      files: [{ file: "series.csv", bytes: seriesFile(SMALL, { energy: CLEAN.energy, signals }) }],
      choices: {
        material: { preset: "cuprous-oxide-yellow-p" },
        // Errors that the file gives know nothing of neighbours.
        noise: { sigma: SIGMA },
        lines: { n: [3, 4, 5, 6, 7, 8, 9, 10] },
        power: { draws: 200 },
        uncertainty: { systematic: false, profile: false, correlated },
      },
    },
    RUN,
    SILENT,
  );
  if (!outcome.ok) throw new Error(JSON.stringify(outcome.issues.map(wordIssue)));
  return outcome.value.result;
}

describe("a power series with noise that neighbours share", () => {
  const seeds = [1, 2, 3];
  const results = {
    auto: seeds.map((seed) => analysed(RHO, "auto", seed)),
    note: seeds.map((seed) => analysed(RHO, "note", seed)),
  };
  const pulls = (of: readonly SeriesResult[]): number[] =>
    of.flatMap(({ power }) => [
      ...power!.lines.map(
        ({ n, saturation_per_uW: { value, sigma } }) => (value! - saturationOf(SMALL, n)) / sigma!,
      ),
      (power!.fit!.gap_eV.value! - CRYSTAL.gap_eV) / power!.fit!.gap_eV.sigma!,
    ]);
  const width = (of: readonly number[]): number =>
    Math.sqrt(of.reduce((sum, x) => sum + x * x, 0) / of.length);

  it("has errors that hold it, and says so; without them they are too small by the factor of the note", () => {
    const allowed = width(pulls(results.auto));
    const plain = width(pulls(results.note));
    // Derived: 27 pulls of width one, 1 +- 0.14 by chance and up to a tenth that the estimate loses; three standard errors
    expect(allowed).toBeGreaterThan(0.58);
    // Derived: as above.
    expect(allowed).toBeLessThan(1.52);
    // Derived: the root of 9 points that count as one is 3, of which the narrowest lines see less.
    expect(plain).toBeGreaterThan(1.7);
    const told = (mode: "auto" | "note"): string =>
      results[mode][0]!.notes.find(({ code }) => code === "power-residuals-correlated")?.text ?? "";
    expect(told("auto")).toContain("allow for that");
    expect(told("note")).toContain("too small by up to that factor");
    expect(told("note")).toMatch(/0\.[78]\d at 0\.05 uW \(factor [23]\.\d+\)/);
  });

  it("keeps the errors of white noise to the last bit, and no doubt", () => {
    const one = analysed(0, "auto", 1);
    expect(one.notes.map(({ code }) => code)).not.toContain("power-residuals-correlated");
    expect(one.power).toEqual(analysed(0, "note", 1).power);
  });
});
