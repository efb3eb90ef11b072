import { describe, expect, it } from "vitest";
import { compareResults } from "../../../app/batch/index.ts";
import { comparisonSchema, type Comparison, type RunglineResult } from "../../../app/protocol/index.ts";
import { comparisonToCsv, comparisonToLatex, comparisonToText } from "../../../app/report/index.ts";
import { samplePower } from "../../renderer/power-sample.ts";
import { comparisonChoices } from "../../support/compared-samples.ts";

const measured = samplePower().result;

/** The sample's power series under another name, with every S and V this many times as large. */
function series(sample: string, batch: string, times: number): RunglineResult {
  const power = measured.power!;
  const scaled = <Q extends { value: number | null; sigma: number | null }>(quantity: Q): Q => ({
    ...quantity,
    value: quantity.value === null ? null : quantity.value * times,
    sigma: quantity.sigma === null ? null : quantity.sigma * times,
  });
  return {
    ...measured,
    source: { ...measured.source, file: `${sample}.csv`, sha256: sample.padEnd(64, "0") },
    reading: {
      ...measured.reading,
      facts: [
        { key: "sample", label: "Sample", text: sample },
        { key: "batch", label: "Batch", text: batch },
      ],
    },
    power: {
      ...power,
      lines: power.lines.map((line) => ({
        ...line,
        saturation_per_uW: scaled(line.saturation_per_uW),
        blockade_volume_um3: scaled(line.blockade_volume_um3),
      })),
    },
  };
}

function compare(results: readonly RunglineResult[], choices: object = {}): Comparison {
  const compared = compareResults(results, comparisonChoices(choices));
  if (!compared.ok) throw new Error(JSON.stringify(compared.issues));
  return { ...compared.value, run: { version: "0.1.0", node: "v20", started: "2026-01-01T00:00:00Z" } };
}

const FOUR = [series("a1", "A", 1), series("a2", "A", 1.02), series("b1", "B", 2), series("b2", "B", 2.04)];
const partOf = (comparison: Comparison, name: string): NonNullable<Comparison["power"]>["parts"][number] =>
  comparison.power!.parts.find((part) => part.name === name)!;

describe("power series side by side", () => {
  const comparison = compare(FOUR, { power_n: 12 });

  it("are compared by logarithms: means are geometric, batches differ by a ratio with its factor", () => {
    const volume = partOf(comparison, "blockade_volume_um3");
    const one = measured.power!.lines.find(({ n }) => n === 12)!.blockade_volume_um3;
    const [first] = volume.batches;
    // Derived: geometric mean of 1 and 1.02 times the volume, both with the same factor
    expect(first!.mean.value! / one.value!).toBeCloseTo(Math.sqrt(1.02), 10);
    // Derived: the logarithm's error over the root of two, as the two agree within it
    expect(Math.log(first!.mean.factor!)).toBeCloseTo(Math.log(one.factor!) / Math.SQRT2, 10);
    const [pair] = volume.pairs;
    // Derived: both samples of B have twice the volume of those of A
    expect(pair!.difference.value).toBeCloseTo(2, 10);
    expect(pair!.difference.low).toBeCloseTo(2 / pair!.difference.factor!, 3);
    expect(pair!.detectable).toBeGreaterThan(1);
  });

  it("give the exponent as it is, and the one expected beside it", () => {
    const exponent = partOf(comparison, "exponent");
    expect(exponent.logarithmic).toBe(false);
    const { exponent: own, predicted } = measured.power!.exponent!;
    expect(exponent.samples[0]!.quantity.value).toBe(own.value);
    expect(exponent.samples[0]!.expected).toBe(predicted.value);
    // Derived: the same exponent in every series
    expect(exponent.pairs[0]!.difference.value).toBeCloseTo(0, 10);
    expect(exponent.pairs[0]!.seen).toBe(false);
  });

  it("take the errors that all share out of a volume where only statistical ones count", () => {
    const factor = (errors: string): number => {
      const volume = partOf(compare(FOUR, { power_n: 12, errors }), "blockade_volume_um3");
      return Math.log(volume.samples[0]!.quantity.factor!);
    };
    const { budget } = measured.power!.lines.find(({ n }) => n === 12)!;
    const common = budget
      .filter(({ input }) =>
        ["power", "transmission to sample", "spot diameter", "reflectance"].includes(input),
      )
      .reduce((sum, { share }) => sum + share, 0);
    expect(common).toBeGreaterThan(0);
    // Derived: what is left of the variance of the logarithm
    expect(factor("statistical") / factor("total")).toBeCloseTo(Math.sqrt(1 - common), 10);
  });

  it("choose the highest n that most of them have, and leave out a line that does not bleach, with its limit", () => {
    const highest = Math.max(
      ...measured.power!.lines.filter((l) => l.reading === "bleaches").map((l) => l.n),
    );
    const chosen = compare(FOUR);
    expect(chosen.power!.n).toBe(highest);
    expect(chosen.power!.notes.map(({ code }) => code)).toContain("power-line-chosen");
    const dull = series("c1", "C", 1);
    const line = dull.power!.lines.find(({ n }) => n === 12)!;
    const unseen = {
      ...dull,
      power: {
        ...dull.power!,
        lines: dull.power!.lines.map((one) =>
          one === line ? { ...one, reading: "not-seen" as const, saturation_limit_per_uW: 1e-6 } : one,
        ),
      },
    };
    const saturation = partOf(compare([...FOUR, unseen], { power_n: 12 }), "saturation_per_uW");
    expect(saturation.samples[4]).toMatchObject({
      limit: 1e-6,
      left_out: "bleaching is not seen: upper limit only",
    });
    expect(saturation.batches.map(({ batch }) => batch)).toEqual(["A", "B"]);
  });

  it("are said to be taken in different ways where spots or laws differ", () => {
    const other = series("c1", "C", 1);
    const power = {
      ...other.power!,
      excitation: "scanned-probe" as const,
      inputs: other.power!.inputs.map((one) => (one.name === "spot diameter" ? { ...one, value: 30 } : one)),
    };
    const codes = compare([...FOUR, { ...other, power }]).power!.notes.map(({ code }) => code);
    expect(codes).toContain("power-spots-differ");
    expect(codes).toContain("power-ways-differ");
  });

  it("do not count twice beside a spectrum of the sample, and are none with one series", () => {
    const alone: RunglineResult = {
      ...FOUR[0]!,
      power: null,
      source: { ...FOUR[0]!.source, file: "a1-alone.csv", sha256: "f".repeat(64) },
    };
    const both = compare([FOUR[0]!, alone, FOUR[2]!]);
    expect(both.notes.map(({ code }) => code)).not.toContain("repeats-combined");
    expect(both.samples).toHaveLength(2);
    expect(compare([FOUR[0]!, { ...FOUR[2]!, power: null }]).power).toBeNull();
  });

  it("stand in every format and keep to the schema", () => {
    expect(comparisonSchema.safeParse(comparison).success).toBe(true);
    expect(comparisonToText(comparison)).toMatch(/blockade volume, n = 12 +batch[\s\S]*B\/A: 2 ×\/÷/);
    expect(comparisonToCsv(comparison)).toMatch(/power_pair,power\.blockade_volume_um3\[12\],A,B,/);
    expect(comparisonToLatex(comparison)).toContain("Power series by sample and batch");
  });
});
