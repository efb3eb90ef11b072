import { describe, expect, it } from "vitest";
import { NOT_DETERMINED, symmetric } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { parseNumber } from "../../renderer/controls/parse-number.ts";
import { ladderLedger } from "../../renderer/ladder/ladder-ledger.ts";
import { plainText, valueText } from "../../renderer/ledger/value-text.ts";
import { lineSection } from "../../renderer/lines/lines-ledger.ts";
import { parseList } from "../../renderer/lines/parse-list.ts";
import { sampleResult } from "./sample.ts";

describe("what is typed", () => {
  it("is read as a list of n with ranges, or refused", () => {
    expect(parseList("2-5, 8")).toEqual([2, 3, 4, 5, 8]);
    expect(parseList("8 3;4")).toEqual([3, 4, 8]);
    expect(parseList("")).toBe("auto");
    for (const wrong of ["2-", "5-3", "0", "a", "1.5"]) expect(parseList(wrong)).toBeNull();
  });

  it("is read as a number with point or comma, or refused", () => {
    expect(parseNumber("2,172")).toBe(2.172);
    expect(parseNumber("1e-3")).toBe(0.001);
    for (const wrong of ["", "abc", "1.2.3"]) expect(parseNumber(wrong)).toBeNull();
  });
});

describe("the ledger", () => {
  it("writes value(uncertainty) unit, and not determined in words", () => {
    expect(valueText({ quantity: symmetric(0.09213, 0.00031), scale: 1e3, unit: "meV" })).toEqual({
      // Derived: 92.13(31) meV, two digits of sigma since 31 lies within 10 to 35
      value: "92.13(31)",
      unit: "meV",
    });
    expect(valueText({ quantity: NOT_DETERMINED, scale: 1, unit: "eV" })).toEqual({
      value: "not determined",
      unit: "",
    });
  });

  it("gives gap, Rydberg energy and defect first, in this order, and the systematic part apart", () => {
    const sections = ladderLedger(sampleResult());
    expect(sections[0]!.entries.slice(0, 3).map((entry) => entry.id)).toEqual(["gap", "rydberg", "defect0"]);
    expect(sections[1]!.title).toContain("Systematic");
  });

  it("has the readings of n on a card of their own, and says which was chosen", () => {
    const reading = ladderLedger(sampleResult())[0]!.entries.find((entry) => entry.id === "reading")!;
    expect(reading.plain).toBe("as read; 2 ranked");
    // Derived: the sample's two readings
    expect(reading.table!.rows.map((row) => row[0])).toEqual(["as read", "+1"]);
  });

  it("quotes errors widened by the scatter where the law is rejected, and the plain ones apart", () => {
    const titles = (result: RunglineResult): string[] => ladderLedger(result).map(({ title }) => title);
    expect(titles(sampleResult())).not.toContain("Without the scatter around the law");
    const { series } = sampleResult();
    const scaled = {
      gap_eV: { ...series!.gap_eV, sigma: 0.01 },
      rydberg_eV: series!.rydberg_eV,
      defect0: series!.defect0,
    };
    const rejected = sampleResult({ series: { ...series!, scaled } });
    expect(titles(rejected)).toContain("Without the scatter around the law");
    // Derived: the scaled error put in above
    expect(ladderLedger(rejected)[0]!.entries[0]!.quantity.sigma).toBe(0.01);
  });

  it("says that an exponent was held, not that it is exact", () => {
    const width = ladderLedger(sampleResult()).find(({ title }) => title === "Width law")!;
    const exponent = width.entries.find((entry) => entry.id === "exponent")!;
    // Derived: the sample's exponent is 3 with a standard error of zero
    expect(valueText(exponent)).toEqual({ value: "3", unit: "(held)" });
  });

  it("prints the minus sign of the axes, and copies the hyphen that other programs read", () => {
    const below = valueText({ quantity: symmetric(-12345.678, 0.011), scale: 1, unit: "" }).value;
    // Derived: rounding of sigma to two digits, groups of three digits
    expect(below).toBe("−12\u2009345.678(11)");
    expect(plainText(below)).toBe("-12 345.678(11)");
    expect(valueText({ quantity: NOT_DETERMINED, scale: 1, unit: "", plain: "TH-B – TH-A, -3" }).value).toBe(
      "TH-B – TH-A, −3",
    );
  });

  it("puts the doubt of a number beside it, with its correlations", () => {
    const gap = ladderLedger(sampleResult())[0]!.entries[0]!;
    expect(gap.notes.map((note) => note.code)).toEqual(["law-rejected"]);
    // Derived: the matrix of the sample
    expect(gap.correlations.map((one) => one.value)).toEqual([0.91, 0.87]);
  });

  it("has the numbers of a chosen line, and nothing for a level that was only predicted", () => {
    expect(lineSection(sampleResult(), 6)!.entries).toHaveLength(8);
    expect(lineSection(sampleResult(), 12)).toBeNull();
  });
});
