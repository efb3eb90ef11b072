import { describe, expect, it } from "vitest";
import { makeRandom, NOT_DETERMINED, symmetric } from "../../../app/base/index.ts";
import {
  compareParameter,
  compareResults,
  dayNumber,
  detectableDifference,
  effectiveDegrees,
  factValue,
  temperatureIn,
  typedValues,
} from "../../../app/batch/index.ts";
import {
  comparisonSchema,
  resolveComparisonChoices,
  type Comparison,
  type RunglineResult,
} from "../../../app/protocol/index.ts";
import { comparisonToCsv, comparisonToJson, comparisonToText } from "../../../app/report/index.ts";
import { makeResult } from "../../main/make-result.ts";
import { comparedSamples, comparisonChoices } from "../../support/compared-samples.ts";

const base = makeResult();
const fact = (key: string, text: string, label = key): RunglineResult["reading"]["facts"][number] => ({
  key,
  label,
  text,
});

/** A result of one sample with a gap of its own. */
function one(
  sample: string,
  batch: string | null,
  gap_eV: number,
  changes: Partial<RunglineResult> = {},
  facts: RunglineResult["reading"]["facts"] = [],
): RunglineResult {
  return makeResult({
    source: { file: `${sample}.csv`, sha256: `${sample}${batch ?? ""}`.padEnd(64, "0"), points: 100 },
    reading: {
      ...base.reading,
      facts: [fact("sample", sample), ...(batch === null ? [] : [fact("batch", batch)]), ...facts],
    },
    series: { ...base.series!, gap_eV: symmetric(gap_eV, 1e-5) },
    systematic: { ...base.systematic!, gap_eV: 2e-5 },
    ...changes,
  });
}

function compare(results: readonly RunglineResult[], choices: object = {}): Comparison {
  const compared = compareResults(results, comparisonChoices(choices));
  if (!compared.ok) throw new Error(JSON.stringify(compared.issues));
  return { ...compared.value, run: { version: "0.1.0", node: "v20", started: "2026-01-01T00:00:00Z" } };
}
const codes = (comparison: Comparison): string[] => comparison.notes.map((note) => note.code);
const part = (comparison: Comparison, name: string): Comparison["parameters"][number] =>
  comparison.parameters.find((candidate) => candidate.name === name)!;

const FOUR = [
  one("a1", "A", 2.172),
  one("a2", "A", 2.17202),
  one("b1", "B", 2.1716),
  one("b2", "B", 2.17158),
];

describe("what is taken from a result", () => {
  const gapOf = (result: RunglineResult, choices = {}): unknown =>
    compare([result, FOUR[2]!], choices).samples[0]!.parameters.gap_eV;

  it("is the number with its statistical and systematic error apart, and the error that counts", () => {
    // Derived: root of 1e-5 and 2e-5 in quadrature
    const sigma = Math.hypot(1e-5, 2e-5);
    expect(gapOf(FOUR[0]!)).toStrictEqual({
      value: 2.172,
      statistical: 1e-5,
      systematic: 2e-5,
      sigma,
      left_out: null,
    });
    expect(gapOf(FOUR[0]!, { errors: "statistical" })).toMatchObject({ sigma: 1e-5 });
  });

  it("has the scaled error where the law was rejected", () => {
    const scaled = {
      gap_eV: symmetric(2.172, 7e-5),
      rydberg_eV: symmetric(0.092, 1e-3),
      defect0: symmetric(0.2, 0.1),
    };
    const result = one("a1", "A", 2.172);
    expect(gapOf({ ...result, series: { ...result.series!, scaled } })).toMatchObject({ statistical: 7e-5 });
  });

  it("is left out, with the reason, where it is held, not determined, or the fit did not converge", () => {
    const reason = (result: RunglineResult, name: "width_exponent" | "gap_eV" | "tail_factor"): unknown =>
      compare([result, FOUR[2]!]).samples[0]!.parameters[name]!.left_out;
    expect(reason(FOUR[0]!, "width_exponent")).toBe("held, not fitted");
    expect(reason({ ...FOUR[0]!, tail: null }, "tail_factor")).toBe("not determined");
    expect(reason({ ...FOUR[0]!, tail: { ...base.tail!, factor: NOT_DETERMINED } }, "tail_factor")).toBe(
      "not determined",
    );
    expect(reason({ ...FOUR[0]!, status: "not-converged" }, "gap_eV")).toBe("the fit did not converge");
    expect(reason({ ...FOUR[0]!, status: "no-series", series: null }, "gap_eV")).toBe("no series was seen");
  });

  it("is the slope of the background at the middle of the window, and the highest line over the noise", () => {
    const background = [
      { term: "polynomial", name: "legendre1", unit: "1/cm", quantity: symmetric(3.3, 0.33) },
    ];
    const { parameters } = compare([{ ...FOUR[0]!, background }, FOUR[2]!]).samples[0]!;
    // Derived: 3.3 over half of the window of 0.03308 eV
    expect(parameters.background_slope!.value).toBeCloseTo(3.3 / 0.01654, 8);
    // Derived: peak 80 over noise 0.31
    expect(parameters.signal_to_noise!.value).toBeCloseTo(80 / 0.31, 8);
  });
});

describe("samples and batches", () => {
  it("come from the headers; typed values replace and add", () => {
    const values = typedValues(
      new TextEncoder().encode("file,batch,Growth rate / um/h\na1.csv,X,1.5\na2,X,2.5\nb1,,3.5\n"),
    );
    const comparison = compare(FOUR, { values, against: "growth rate" });
    expect(comparison.samples.map((sample) => [sample.sample, sample.batch, sample.against])).toStrictEqual([
      ["a1", "X", 1.5],
      ["a2", "X", 2.5],
      ["b1", "B", 3.5],
      ["b2", "B", null],
    ]);
    expect(codes(comparison)).toContain("trend-fact-missing");
    expect(part(comparison, "gap_eV").trend!.samples).toBe(3);
  });

  it("without a batch each sample stands by itself, and that is said", () => {
    const comparison = compare([one("a", null, 2.172), one("b", null, 2.1719)]);
    expect(codes(comparison)).toEqual(expect.arrayContaining(["batch-unknown", "one-sample-a-batch"]));
    expect(part(comparison, "gap_eV").within).toMatchObject({ tau: null, dof: 0 });
    expect(part(comparison, "gap_eV").pairs).toHaveLength(1);
  });

  it("outputs of separate runs merge: what is there twice is taken once", () => {
    const comparison = compare([...FOUR, FOUR[0]!, FOUR[3]!]);
    expect(comparison.samples).toHaveLength(4);
    expect(codes(comparison).filter((code) => code === "result-twice")).toHaveLength(2);
    const other = {
      ...FOUR[0]!,
      protocol: { ...FOUR[0]!.protocol, window_eV: [2.1, 2.2] as [number, number] },
    };
    expect(codes(compare([...FOUR, other]))).toContain("result-twice-with-other-protocol");
  });

  it("the same bytes under another name are one measurement, not two that agree", () => {
    const again = { ...FOUR[0]!, source: { ...FOUR[0]!.source, file: "copy.csv" } };
    const comparison = compare([...FOUR, again]);
    expect(comparison.samples).toHaveLength(4);
    expect(comparison.samples[0]!.parameters.gap_eV).toEqual(compare(FOUR).samples[0]!.parameters.gap_eV);
    expect(comparison.notes.find(({ code }) => code === "result-twice")?.text).toMatch(
      /^copy\.csv holds the same bytes as a1\.csv/,
    );
  });

  it("a sample measured twice is combined, with the systematic part kept", () => {
    const again = one("a1", "A", 2.17201, {
      source: { file: "a1-again.csv", sha256: "f".repeat(64), points: 100 },
    });
    const comparison = compare([...FOUR, again]);
    expect(comparison.samples).toHaveLength(4);
    expect(codes(comparison)).toContain("repeats-combined");
    const { value, systematic, statistical } = comparison.samples[0]!.parameters.gap_eV!;
    // Derived: mean of two values with equal errors that agree within them
    expect(value).toBeCloseTo(2.172005, 9);
    // Derived: 1e-5 over the root of 2
    expect(statistical).toBeCloseTo(1e-5 / Math.SQRT2, 12);
    expect(systematic).toBe(2e-5);
  });

  it("different protocols, versions and temperatures are told", () => {
    const protocol = { ...base.protocol, background: [{ term: "polynomial" as const, order: 1 }] };
    const comparison = compare([
      FOUR[0]!,
      one("b1", "B", 2.1716, { protocol, run: { ...base.run, version: "0.0.9" } }, [
        fact("temperature", "12 K"),
      ]),
      one("b2", "B", 2.1716, {}, [fact("temperature", "1.4 K")]),
    ]);
    expect(codes(comparison)).toEqual(
      expect.arrayContaining(["protocols-differ", "versions-differ", "temperatures-differ"]),
    );
  });

  it("a comparison needs two results, a known reference and a readable fact", () => {
    const issue = (results: readonly RunglineResult[], choices: object): unknown => {
      const compared = compareResults(results, comparisonChoices(choices));
      return compared.ok ? null : compared.issues[0]!.code;
    };
    expect(issue([FOUR[0]!], {})).toBe("batch/too-few");
    expect(issue([FOUR[0]!, FOUR[0]!], {})).toBe("batch/too-few");
    expect(issue(FOUR, { reference: "C" })).toBe("batch/no-such-reference");
    expect(issue(FOUR, { against: "growth rate" })).toBe("batch/no-such-fact");
    expect(resolveComparisonChoices({ referense: "A" })).toMatchObject({
      ok: false,
      issues: [{ code: "protocol/unknown-key", facts: { nearest: "reference" } }],
    });
  });
});

describe("differences", () => {
  it("are told against the reference batch, with size and corrected probability", () => {
    const { shifts, pairs } = part(compare(FOUR, { reference: "B" }), "gap_eV");
    expect(pairs).toHaveLength(1);
    expect(shifts).toHaveLength(1);
    expect([shifts[0]!.first, shifts[0]!.second, shifts[0]!.seen]).toStrictEqual(["B", "A", true]);
    // Derived: mean of 2.172 and 2.17202 minus mean of 2.1716 and 2.17158
    expect(shifts[0]!.difference.value).toBeCloseTo(0.00042, 9);
  });

  it("that are not seen come with the size that would have been seen", () => {
    const comparison = compare([one("a", "A", 2.172), one("b", "B", 2.17201)], { errors: "statistical" });
    const [pair] = part(comparison, "gap_eV").pairs;
    expect(pair!.seen).toBe(false);
    // Derived: (1.959964 + 0.841621) times 1e-5 root 2
    expect(pair!.detectable).toBeCloseTo(2.801585 * Math.SQRT2 * 1e-5, 10);
    expect(comparisonToText(comparison)).toMatch(/no difference seen, 10\(14\) µeV.*40 µeV would have been/s);
  });

  it("of the size that is called detectable are found with the chance that is claimed, and none are found too often where none is", () => {
    const random = makeRandom(3);
    const choices = comparisonChoices({ parameters: ["gap_eV"] });
    const batches = ["A", "A", "A", "A", "A", "A", "B", "B", "B", "B", "B", "B"];
    const sigmas = batches.map(() => 1);
    const trial = (shift: number): { seen: boolean } => {
      const values = batches.map((batch) => (batch === "B" ? shift : 0) + Math.SQRT2 * random.normal());
      return compareParameter("gap_eV", "eV", comparedSamples(values, sigmas, batches), choices, "")
        .pairs[0]!;
    };
    const turns = 800;
    let falseFindings = 0;
    for (let i = 0; i < turns; i++) if (trial(0).seen) falseFindings++;
    // Derived: 5 % within three standard deviations of a binomial number, and a little for the degrees of freedom
    expect(falseFindings / turns).toBeLessThan(0.05 + 3 * Math.sqrt((0.05 * 0.95) / turns) + 0.02);
    // True error of a mean of six: root of (1 + 1)/6, of a difference root of 2 times that.
    const size = detectableDifference(
      Math.sqrt(2 / 3),
      effectiveDegrees(2 / 3, [{ variance: 1 / 3, degreesOfFreedom: 10 }]),
      0.05,
      1,
      0.8,
    );
    let found = 0;
    for (let i = 0; i < turns; i++) if (trial(size).seen) found++;
    // Derived: 80 % within 5 %, since the estimated scatter differs from draw to draw
    expect(Math.abs(found / turns - 0.8)).toBeLessThan(0.05);
  });

  it("do not depend on the order of the results", () => {
    const forward = part(compare(FOUR), "gap_eV");
    const backward = part(compare([...FOUR].reverse()), "gap_eV");
    expect(backward.homogeneity.q! / forward.homogeneity.q!).toBeCloseTo(1, 9);
    expect(backward.between.tau! / forward.between.tau!).toBeCloseTo(1, 9);
    expect(backward.pairs[0]!.difference.value).toBeCloseTo(-forward.pairs[0]!.difference.value!, 12);
  });
});

describe("trends and quality", () => {
  it("a trend is a weighted line with its error, seen or with the size that would have been seen", () => {
    const steady = [1, 2, 3, 4, 5].map((day) =>
      one(`s${day}`, `b${day}`, 2.172 + day * 1e-4, {}, [fact("date", `2025-03-0${day}`)]),
    );
    const { trend } = part(compare(steady, { against: "date", errors: "statistical" }), "gap_eV");
    // Derived: the line the values lie on
    expect(trend!.slope.value).toBeCloseTo(1e-4, 10);
    // Derived: sigma over the root of sum (x - mean)^2 = 10
    expect(trend!.slope.sigma).toBeCloseTo(1e-5 / Math.sqrt(10), 12);
    expect(trend).toMatchObject({ seen: true, unit: "d", tau: 0 });
    const flat = steady.map((result, i) => ({
      ...result,
      series: { ...result.series!, gap_eV: symmetric(2.172 + [1, -1, 0, 1, -1][i]! * 5e-6, 1e-5) },
    }));
    const none = part(compare(flat, { against: "date", errors: "statistical" }), "gap_eV").trend!;
    expect(none.seen).toBe(false);
    // Derived: (1.959964 + 0.841621) standard errors
    expect(none.detectable).toBeCloseTo((2.801585 * 1e-5) / Math.sqrt(10), 10);
  });

  it("a quality figure is the sum of its stated, weighted parts; without weights there is none", () => {
    expect(compare(FOUR).quality).toBeNull();
    const { quality } = compare(FOUR, { quality: { gap_eV: 2, highest_n: 1 }, reference: "A" });
    // highest_n is the same everywhere: a part without spread is left out.
    expect(quality!.parts.map((one_) => one_.name)).toStrictEqual(["gap_eV"]);
    for (const { figure, contributions } of quality!.samples)
      // Derived: by definition
      expect(figure.value).toBeCloseTo(
        Object.values(contributions).reduce((sum, value) => sum + value, 0),
        12,
      );
    const [first, second] = quality!.samples;
    // Derived: the two samples of the reference batch lie on both sides of its mean
    expect(first!.figure.value! + second!.figure.value!).toBeCloseTo(0, 9);
  });
});

describe("facts as numbers", () => {
  it("are dates as days, and numbers with their unit in either decimal mark", () => {
    // Derived: days from 1970-01-01 to 2025-03-11
    expect(dayNumber("2025-03-11")).toBe(20158);
    expect(dayNumber("11.03.2025 12:30")).toBe(20158);
    expect(dayNumber("2025-02-30")).toBeNull();
    expect(factValue("Temperatur", "4,2 K", ",")).toStrictEqual({ value: 4.2, unit: "K" });
    expect(temperatureIn({ value: 20, unit: "°C" })).toBeCloseTo(293.15, 10);
    expect(temperatureIn({ value: 20, unit: "mK" })).toBeCloseTo(0.02, 12);
    expect(temperatureIn({ value: 20, unit: "V" })).toBeNull();
  });
});

describe("a comparison as files", () => {
  it("keeps its schema, and its table has one row a number", () => {
    const comparison = compare(FOUR, { reference: "A", quality: { gap_eV: 1 } });
    expect(comparisonSchema.parse(JSON.parse(comparisonToJson(comparison)))).toStrictEqual(
      JSON.parse(JSON.stringify(comparison)),
    );
    const rows = comparisonToCsv(comparison).trimEnd().split("\r\n");
    expect(rows[0]).toMatch(/^section,parameter,first,second,value,sigma/);
    expect(rows.some((row) => row.startsWith("shift,gap_eV,A,B,"))).toBe(true);
    const text = comparisonToText(comparison);
    expect(text).toMatch(/^Comparison of 4 samples in 2 batches\n/);
    expect(text).toContain("B - A: -420(");
  });
});
