import { describe, expect, it } from "vitest";
import { resultSchema } from "../../../app/protocol/index.ts";
import { resultToCsv, resultToText } from "../../../app/report/index.ts";
import { analysePower, wordIssue } from "../../../app/tasks/index.ts";
import { RUN, SILENT } from "../../support/analyse-bytes.ts";
import {
  CRYSTAL,
  makePowerSeries,
  saturationOf,
  SERIES,
  seriesFile,
  singleFile,
  type SyntheticPowerSeries,
} from "../../support/make-power-series.ts";

const SMALL: SyntheticPowerSeries = { ...SERIES, points: 2600, powers_uW: [0.1, 5, 20, 60], sigma: 4 };
const CHOICES = {
  material: { preset: "cuprous-oxide-yellow-p" },
  signal: { thickness_um: 34 },
  power: { spot_diameter_um: 100, draws: 400 },
  uncertainty: { systematic: false, profile: false },
};
const curves = makePowerSeries(SMALL);
const analysed = analysePower(
  { files: [{ file: "series.csv", bytes: seriesFile(SMALL, curves) }], choices: CHOICES },
  RUN,
  SILENT,
);

function good(outcome: typeof analysed): Extract<typeof analysed, { ok: true }>["value"] {
  if (!outcome.ok) throw new Error(JSON.stringify(outcome.issues.map(wordIssue)));
  return outcome.value;
}

describe("a power series from bytes to result", () => {
  const { result, spectra } = good(analysed);
  const power = result.power!;

  it("keeps the schema of a result, with the part power and its sources", () => {
    expect(resultSchema.safeParse(result).success).toBe(true);
    expect(result.status).toBe("converged");
    expect(power.fit?.shared).toEqual(["gap", "rydberg", "defect0", "asymmetry"]);
    expect(power.fit?.sources.map((source) => source.power_uW)).toEqual(SMALL.powers_uW);
    expect(spectra.map((one) => one.power_uW)).toEqual(SMALL.powers_uW);
    expect(spectra[3]!.curves.model.some((value) => Number.isFinite(value))).toBe(true);
  });

  it("finds the level law and the saturation of every line that stands apart from the tail within four standard errors", () => {
    const pull = (value: { value: number | null; sigma: number | null }, truth: number): number =>
      Math.abs(value.value! - truth) / value.sigma!;
    // Derived: the parameters that made the series; four standard errors.
    expect(pull(power.fit!.gap_eV, CRYSTAL.gap_eV)).toBeLessThan(4);
    // Derived: as above.
    expect(pull(power.fit!.rydberg_eV, CRYSTAL.rydberg_eV)).toBeLessThan(4);
    // The last two lean on the tail above them, which this series bleaches otherwise than either of its models.
    for (const line of power.lines.slice(0, -2))
      // Derived: as above.
      expect(pull(line.saturation_per_uW, saturationOf(SMALL, line.n))).toBeLessThan(4);
    expect(power.lines.filter((line) => line.reading === "bleaches").length).toBeGreaterThan(3);
  });

  it("stands in the text and the table, with cautions beside the powers", () => {
    const text = resultToText(result);
    expect(text).toContain("Power series: 4 spectra, separate-pump");
    expect(text.indexOf("Lasers can injure")).toBeGreaterThan(text.indexOf("P/µW"));
    expect(text).toContain("Liquid helium");
    expect(resultToCsv(result)).toMatch(/,power_line,saturation,/);
  });

  it("comes out the same to the last bit from files in another order", () => {
    const files = SMALL.powers_uW.map((power_uW, a) => ({
      file: `s_${power_uW}uW.csv`,
      bytes: singleFile(curves, a),
    }));
    const one = good(analysePower({ files, choices: CHOICES }, RUN, SILENT));
    const other = good(analysePower({ files: [...files].reverse(), choices: CHOICES }, RUN, SILENT));
    expect(JSON.stringify(other.result.power)).toBe(JSON.stringify(one.result.power));
    // Derived: the same numbers in the file of columns.
    expect(one.result.power!.fit!.gap_eV.value).toBe(power.fit!.gap_eV.value);
  });

  it("finishes the rest where one file is broken, and names it", () => {
    const files = [
      ...[0, 1, 3].map((a) => ({
        file: `s_${SMALL.powers_uW[a]!}uW.csv`,
        bytes: singleFile(curves, a),
      })),
      { file: "s_20uW.csv", bytes: new TextEncoder().encode("nothing here") },
    ];
    const { result: rest, failed } = good(analysePower({ files, choices: CHOICES }, RUN, SILENT));
    expect(failed.map(({ label }) => label)).toEqual(["s_20uW.csv"]);
    expect(rest.power!.spectra).toHaveLength(3);
    expect(rest.power!.fit!.failed[0]!.message).toContain("s_20uW.csv");
    expect(rest.notes.map((note) => note.code)).toContain("power-spectra-left-out");
  });

  it("refuses a spot of zero by its key", () => {
    const outcome = analysePower(
      {
        files: [{ file: "series.csv", bytes: seriesFile(SMALL, curves) }],
        choices: { ...CHOICES, power: { spot_diameter_um: 0 } },
      },
      RUN,
      SILENT,
    );
    const wording = outcome.ok ? null : wordIssue(outcome.issues[0]!);
    expect(wording?.message).toContain("power.spot_diameter_um is 0");
  });

  it("stops when asked", () => {
    let asked = 0;
    const watch = { ...SILENT, cancelled: () => ++asked > 40 };
    expect(() =>
      analysePower(
        { files: [{ file: "series.csv", bytes: seriesFile(SMALL, curves) }], choices: CHOICES },
        RUN,
        watch,
      ),
    ).toThrow("cancelled");
  });
});
