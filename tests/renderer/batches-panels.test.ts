import { describe, expect, it } from "vitest";
import { symmetric } from "../../app/base/index.ts";
import { varshni } from "../../app/laws/index.ts";
import { besideN } from "../../app/report/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { compareSamples } from "../../app/tasks/index.ts";
import { batchLook } from "../../renderer/batches/batch-look.ts";
import { powerComparisonFigure } from "../../renderer/batches/power-comparison-figure.ts";
import { powerComparisonLedger } from "../../renderer/batches/power-comparison-ledger.ts";
import { qualityFigure } from "../../renderer/batches/quality-figure.ts";
import { qualityLedger } from "../../renderer/batches/quality-ledger.ts";
import { lawsInOrder, temperatureFigure } from "../../renderer/batches/temperature-figure.ts";
import { temperatureLedger } from "../../renderer/batches/temperature-ledger.ts";
import { PALETTES } from "../../renderer/plot/colours.ts";
import { addResults, editCompare, keepPower } from "../../renderer/store/session.ts";
import { gather } from "../../renderer/store/gather.ts";
import { typedColumns, typedFact, typeFacts } from "../../renderer/store/typed-facts.ts";
import { recordInput } from "../../renderer/record/record-input.ts";
import { CRYSTALS, crystalComparison, crystalResult, crystalSession } from "./batches-sample.ts";
import { samplePower } from "./power-sample.ts";

const RUN = { version: "1.2.3", node: "v20", started: "2026-01-02T03:04:05Z" };

function compared(results: readonly RunglineResult[]): ReturnType<typeof crystalComparison> {
  const found = compareSamples(results, {}, RUN);
  if (!found.ok) throw new Error(JSON.stringify(found.issues));
  return found.value;
}

describe("laws of temperature in Batches", () => {
  const results = [4, 50, 100, 150, 200, 250].map((kelvin) => {
    const out = new Float64Array(4);
    varshni(kelvin, 2.172, 4e-4, 200, out);
    const base = crystalResult({ ...CRYSTALS[0]!, temperature: `${kelvin} K` });
    return {
      ...base,
      source: { ...base.source, file: `${kelvin}.csv`, sha256: `${kelvin} `.padEnd(64, "0") },
      series: { ...base.series!, gap_eV: symmetric(out[0]!, 4e-6) },
    };
  });
  const comparison = compared(results);
  const [gap, width] = comparison.temperature!.series;

  it("are drawn with every law, the preferred one as the plain line, and its residuals below", () => {
    const figure = temperatureFigure(gap!, width!, PALETTES.light, batchLook(0, "light"), (file) =>
      file === "50.csv" ? 7 : null,
    );
    const laws = figure.data.filter(({ meta }) => meta.part === "law");
    expect(laws[0]).toMatchObject({ name: "varshni", line: { dash: "solid", color: PALETTES.light.accent } });
    expect(laws[1]).toMatchObject({ name: "bose-einstein", line: { dash: "dash" } });
    const points = figure.data.find(({ meta }) => meta.part === "levels")!;
    expect(points["customdata"]).toEqual([null, 7, null, null, null, null]);
    const left = figure.data.find(({ meta }) => meta.part === "residuals")!;
    // Derived: the points were taken from the law itself
    for (const one of Array.from(left.y)) expect(Math.abs(one!)).toBeLessThan(0.1);
    expect(figure.summary).toContain("the data prefer Varshni");
    expect(lawsInOrder(gap!)[0]!.law).toBe("varshni");
  });

  it("stand in the ledger with every parameter and the verdict", () => {
    const sections = temperatureLedger(comparison, [gap!, null]);
    expect(sections.map(({ title }) => title)).toEqual(["Gap, P1: Varshni", "Gap, P1: Bose-Einstein"]);
    expect(sections[0]!.entries.map(({ name }) => name)).toEqual([
      "Gap at 0 K",
      "Slope at high T",
      "Scale of T",
    ]);
    expect(sections[0]!.remark).toMatch(/^the data prefer Varshni; χ² = /);
  });
});

describe("power series in Batches", () => {
  const { result } = samplePower();
  const named = (sample: string, batch: string): RunglineResult => ({
    ...result,
    source: { ...result.source, file: `${sample}.csv`, sha256: sample.padEnd(64, "0") },
    reading: {
      ...result.reading,
      facts: [
        { key: "sample", label: "Sample", text: sample },
        { key: "batch", label: "Batch", text: batch },
      ],
    },
  });
  const power = compared([named("P1", "P"), named("P2", "P"), named("Q1", "Q")]).power!;

  it("are drawn with unequal intervals on a logarithmic axis, and all lines against n", () => {
    const figure = powerComparisonFigure(power, ["P", "Q"], PALETTES.dark, "one", () => 0);
    const volume = figure.data.find(({ name, xaxis }) => name === "P" && xaxis === "x2")!;
    const error = volume["error_x"] as { array: number[]; arrayminus: number[] };
    expect(error.array[0]).toBeGreaterThan(error.arrayminus[0]!);
    expect(figure.layout["xaxis2"]).toMatchObject({ type: "log" });
    expect(JSON.stringify(figure)).not.toMatch(/null,"high"|NaN/);
    const all = powerComparisonFigure(power, ["P", "Q"], PALETTES.light, "all", () => 0);
    expect(all.data.filter(({ meta }) => meta.part === "line")).toHaveLength(6);
  });

  it("stand in the ledger as value and factor, and differ by ratios", () => {
    const [saturation, , exponent] = powerComparisonLedger(power);
    expect(saturation!.entries[0]!.plain).toMatch(/^[\d.e-]+.* ×\/÷ 1\.\d+$/);
    // Derived: the same series in both batches
    expect(saturation!.entries.at(-1)!).toMatchObject({ name: "Q/P: not seen" });
    expect(saturation!.entries.at(-1)!.plain).toMatch(/^1 ×\/÷/);
    expect(exponent!.entries.at(-1)!.name).toBe("Q − P: not seen");
  });

  it("are gathered from the session where there are two, and stand in a record once", () => {
    const fitted = { analysed: samplePower(), choices: {}, fileIds: ["P1.csv"] };
    const one = keepPower(crystalSession(), "P1.csv", fitted);
    expect(gather(one).filter(({ of }) => of === "series")).toEqual([]);
    const two = addResults(one, "Q9.json", [named("Q9", "Q")]);
    expect(gather(two).filter(({ of }) => of === "series")).toHaveLength(1);
    const input = recordInput(two, null, null);
    expect(input.results.filter((each) => each === fitted.analysed.result)).toHaveLength(1);
  });
});

describe("the figure of quality", () => {
  const weights = { gap_eV: 1, rydberg_eV: 1, width_floor_eV: -2 } as const;
  const comparison = crystalComparison({ quality: weights });
  const quality = comparison.quality!;

  it("is drawn as bars that add up to the sum of each sample", () => {
    const figure = qualityFigure(comparison, quality, ["P", "Q"], PALETTES.light);
    const bars = figure.layout["shapes"] as { x0: number; x1: number; y0: number }[];
    const known = quality.samples.filter(({ figure: one }) => one.value !== null);
    const best = Math.max(...known.map(({ figure: one }) => one.value!));
    const sum = bars.filter(({ y0 }) => Math.round(y0) === 0).reduce((all, { x0, x1 }) => all + x1 - x0, 0);
    // Derived: the best sample stands on top
    expect(sum).toBeCloseTo(best, 10);
    // Subscripts of the plot library would need inline styles, which the page's policy refuses.
    expect(JSON.stringify(figure)).not.toContain("<sub>");
  });

  it("tells its parts, and the words that repeat it", () => {
    const [parts, best] = qualityLedger(comparison, weights);
    // Derived: Rydberg energy and floor are alike in all samples that have them
    expect(parts!.entries.map(({ id }) => id)).toEqual(["quality-part-gap_eV"]);
    expect(comparison.notes.map(({ code }) => code)).toContain("quality-part-left-out");
    expect(best!.remark).toContain("--quality gap_eV=1,rydberg_eV=1,width_floor_eV=-2");
    expect(best!.entries[0]!.table!.rows[0]![0]).toBe("Gap");
  });
});

describe("typed columns", () => {
  it("stand over the headers, give them back when emptied, and are known without regard to capitals", () => {
    const typed = typeFacts(
      [],
      [
        { of: "P1.csv", name: "temperature", text: "12" },
        { of: "P1.csv", name: "Growth", text: "3 mm/h" },
        { of: "P2.csv", name: "temperature", text: "20 K" },
      ],
    );
    expect(typedFact(typed, "P1.csv", "Temperature")).toBe("12");
    expect(typedColumns(typed)).toEqual(["Growth"]);
    const session = editCompare(crystalSession(), { choices: { values: typed } }, "typed");
    const kelvin = gather(session).map(({ named }) => named.temperature_K);
    expect(kelvin.slice(0, 3)).toEqual([12, 20, 4.2]);
    const emptied = typeFacts(typed, [
      { of: "P2.csv", name: "Temperature", text: "" },
      { of: "P1.csv", name: "growth", text: "4 mm/h" },
    ]);
    expect(emptied).toEqual([{ of: "P1.csv", facts: { temperature: "12", growth: "4 mm/h" } }]);
  });
});

describe("many samples at one n", () => {
  it("stand apart, but never where the next n could be meant", () => {
    expect(besideN(5, 0, 1)).toBe(5);
    // Derived: 0.6 % of n from one sample to the next
    expect(besideN(5, 1, 2) - besideN(5, 0, 2)).toBeCloseTo(0.03, 12);
    expect(besideN(22, 25, 26) + 0.39).toBeLessThan(besideN(23, 0, 26));
  });
});
