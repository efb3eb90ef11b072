import { describe, expect, it } from "vitest";
import { symmetric } from "../../../app/base/index.ts";
import { compareResults } from "../../../app/batch/index.ts";
import { boseEinsteinGap } from "../../../app/laws/index.ts";
import type { Comparison, RunglineResult } from "../../../app/protocol/index.ts";
import { makeResult } from "../../main/make-result.ts";
import { comparisonChoices } from "../../support/compared-samples.ts";

const base = makeResult();

function run(sample: string, temperature: number, coupling = 0.03): RunglineResult {
  const out = new Float64Array(4);
  boseEinsteinGap(temperature, 2.2, coupling, 150, out);
  return makeResult({
    source: {
      file: `${sample}-${temperature}.csv`,
      sha256: `${sample} ${temperature} `.padEnd(64, "0"),
      points: 100,
    },
    reading: {
      ...base.reading,
      facts: [
        { key: "sample", label: "Sample", text: sample },
        { key: "batch", label: "Batch", text: sample.slice(0, 1) },
        { key: "temperature", label: "Temperature", text: `${temperature} K` },
      ],
    },
    series: { ...base.series!, gap_eV: symmetric(out[0]!, 1e-5) },
  });
}

function compare(results: readonly RunglineResult[], choices: object = {}): Comparison {
  const compared = compareResults(results, comparisonChoices(choices));
  if (!compared.ok) throw new Error(JSON.stringify(compared.issues));
  return { ...compared.value, run: { version: "0.1.0", node: "v20", started: "2026-01-01T00:00:00Z" } };
}

const KELVIN = [2, 40, 80, 120, 160, 200, 260];
const RUNS = KELVIN.map((kelvin) => run("A9", kelvin));
const OTHERS = [run("A1", 1.5), run("B1", 1.6), run("B2", 1.4)];
const gaps = (comparison: Comparison): NonNullable<Comparison["temperature"]>["series"] =>
  comparison.temperature!.series.filter(({ quantity }) => quantity === "gap_eV");

describe("samples measured at many temperatures", () => {
  it("have laws of temperature without being asked, and stand once among the samples", () => {
    const comparison = compare([...OTHERS, ...RUNS]);
    expect(gaps(comparison)).toHaveLength(1);
    expect(gaps(comparison)[0]).toMatchObject({ sample: "A9", preferred: "bose-einstein", decided: true });
    expect(comparison.samples.map(({ sample, temperature_K }) => [sample, temperature_K])).toEqual([
      ["A1", 1.5],
      ["B1", 1.6],
      ["B2", 1.4],
      ["A9", 2],
    ]);
    expect(comparison.notes.map(({ code }) => code)).toContain("temperature-run-set-apart");
  });

  it("stand all side by side along temperature, and alone", () => {
    expect(compare([...OTHERS, ...RUNS], { against: "temperature" }).samples).toHaveLength(10);
    const alone = compare(RUNS);
    expect(alone.samples).toHaveLength(KELVIN.length);
    expect(gaps(alone)[0]!.points).toHaveLength(KELVIN.length);
  });

  it("have a series each, and notes that name the sample", () => {
    const two = compare([...RUNS, ...[2, 10, 12, 15].map((kelvin) => run("B9", kelvin, 0.01))]);
    expect(gaps(two).map(({ sample }) => sample)).toEqual(["A9", "B9"]);
    const short = two.temperature!.notes.find(({ code }) => code === "temperature-range-short");
    expect(short!.text).toMatch(/^B9: /);
  });

  it("may have their temperatures typed", () => {
    const untold = KELVIN.map((kelvin) => {
      const result = run("A9", kelvin);
      return { ...result, reading: { ...result.reading, facts: result.reading.facts.slice(0, 2) } };
    });
    const values = untold.map(({ source }, i) => ({
      of: source.file,
      facts: { Temperature: `${KELVIN[i]!} K` },
    }));
    expect(compare(untold).temperature).toBeNull();
    expect(gaps(compare(untold, { values }))[0]!.preferred).toBe("bose-einstein");
  });

  it("are one series over several samples only where no sample has its own", () => {
    const spread = [run("A1", 2), run("A2", 60), run("B1", 120), run("B2", 180), run("B3", 240)];
    const comparison = compare(spread);
    expect(gaps(comparison)[0]).toMatchObject({ sample: null, preferred: "bose-einstein" });
    expect(comparison.temperature!.notes[0]!.code).toBe("temperature-of-several-samples");
    expect(compare(OTHERS).temperature).toBeNull();
  });
});

describe("Varshni's law where the gap bends late", () => {
  it("ends as a parabola whose alpha and beta are not determined, and loses by its chi square", () => {
    const late = [2, 20, 30, 40, 60, 80, 100].map((kelvin) => run("A9", kelvin));
    const [series] = gaps(compare(late));
    const varshni = series!.laws.find(({ law }) => law === "varshni")!;
    expect(varshni.stationary).toBe(true);
    expect(varshni.parameters.slice(1).map(({ quantity }) => quantity.value)).toEqual([null, null]);
    expect(series).toMatchObject({ preferred: "bose-einstein", decided: true });
    // Derived: one residual a point, and chi square is the sum of their squares
    expect(varshni.residuals.reduce((sum, one) => sum + one * one, 0) / varshni.chi2!).toBeCloseTo(1, 9);
  });
});
