import { describe, expect, it } from "vitest";
import { comparisonToLatex, latexNumber, resultToLatex } from "../../../app/report/index.ts";
import { escapeLatex, unitToLatex } from "../../../app/report/table-to-latex.ts";
import { compareSamples } from "../../../app/tasks/index.ts";
import { makeResult } from "../../main/make-result.ts";
import { reportSamples } from "../../support/report-samples.ts";

describe("numbers for siunitx", () => {
  it.each([
    // Source: J. Wright, siunitx v3 manual, "Parsing numbers": value(error in the last place), value +- error, e for powers of ten
    [2.17204979, 1.5e-7, "2.17204979(15)"],
    [98.7, 1.2, "98.7 +- 1.2"],
    [1.234e-7, 4e-9, "1.23(4)e-7"],
    [-0.21, 0.018, "-0.210(18)"],
    [120, 30, "120(30)"],
    [3, 0, "3"],
  ])("%d with error %d", (value, sigma, text) => {
    expect(latexNumber(value, sigma)).toBe(text);
  });

  it("are not made of what is not determined", () => {
    expect(latexNumber(null, null)).toBeNull();
    expect(latexNumber(NaN, 1)).toBeNull();
  });

  it("carry units as macros", () => {
    expect(unitToLatex("eV", "\\unit")).toBe("\\unit{\\electronvolt}");
    expect(unitToLatex("eV/cm", "\\unit")).toBe("\\unit{\\electronvolt\\per\\centi\\metre}");
    expect(unitToLatex("(1/cm^3)", "\\unit")).toBe("\\unit{\\per\\centi\\metre\\cubed}");
    expect(unitToLatex("µm^{3}", "\\unit")).toBe("\\unit{\\micro\\metre\\cubed}");
    expect(unitToLatex("furlong", "\\unit")).toBe("\\unit{\\text{furlong}}");
  });
});

describe("tables for LaTeX", () => {
  const text = resultToLatex(makeResult());

  it("give quantities with their unit and columns lined up at the decimal mark", () => {
    expect(text).toMatch(/\\qty\{2\.172083\(12\)\}\{\\electronvolt\}/);
    expect(text).toMatch(/S\[table-format=1\.\d+\(\d\)\]/);
    expect(text).toContain("\\toprule");
  });

  it("say of a held number that it is held", () => {
    expect(text).toContain("\\num{3} (held)");
  });

  it("balance their braces and dollars, and have as many cells a row as columns", () => {
    const results = reportSamples(4);
    const compared = compareSamples(results, {}, { version: "0", node: "0", started: "0" });
    if (!compared.ok) throw new Error("no comparison");
    for (const all of [text, resultToLatex(...results), comparisonToLatex(compared.value)]) {
      const bare = all.replace(/^%.*$/gm, "").replace(/\\[{}$%&#_]/g, "");
      expect(bare.split("{").length).toBe(bare.split("}").length);
      expect(bare.split("$").length % 2).toBe(1);
      for (const table of bare.split("\\begin{tabular}").slice(1)) {
        const rows = table.split("\\midrule")[1]!.split("\\bottomrule")[0]!.trim().split("\n");
        const head = table.split("\\toprule")[1]!.split("\\midrule")[0]!;
        for (const row of rows) expect(row.split("&").length).toBe(head.split("&").length);
      }
    }
  });

  it("set powers of ten in words as powers", () => {
    expect(escapeLatex("<\u00a01.8 × 10⁻⁵ µeV")).toBe("<~1.8 $\\times$ 10$^{-5}$ \\textmu{}eV");
  });

  it("keep the marks of LaTeX in names as they are", () => {
    expect(escapeLatex("50 % of A_1 & B#2 {x} $5 ~ ^ \\")).toBe(
      "50 \\% of A\\_1 \\& B\\#2 \\{x\\} \\$5 \\textasciitilde{} \\textasciicircum{} \\textbackslash{}",
    );
  });
});
