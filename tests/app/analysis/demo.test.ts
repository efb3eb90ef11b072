import { describe, expect, test } from "vitest";
import { doubtsOf, fixtureBytes, fixtureJson, pullOf, resultOf } from "../../support/analyse-bytes.ts";

/** The demo laboratory's files against the parameters that made them, with nothing set but the preset. */
interface Truth {
  readonly series: {
    readonly gap_eV: number;
    readonly rydberg_eV: number;
    readonly defect0: number;
    readonly asymmetry: number;
    readonly offsets_eV: Readonly<Record<string, number>>;
  };
  readonly width_law: { readonly floor_eV: number; readonly coefficient_eV: number };
  readonly strength_law: { readonly coefficient: number };
  readonly lines: readonly {
    readonly n: number;
    readonly energy_eV: number;
    readonly width_eV: number;
    readonly area: number;
  }[];
}

const YELLOW = { material: { preset: "cuprous-oxide-yellow-p" } };
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;
const FILES = [
  ["TH-A1_transmission.csv", 5],
  ["TH-A2_transmission.txt", 2],
  ["TH-A3_alpha.csv", 5],
  ["TH-B1_transmission.csv", 5],
] as const;

const truthOf = (file: string): Truth =>
  fixtureJson<Truth>(`demo/${file.replace(/\.[a-z]+$/, ".truth.json")}`);

describe.each(FILES)("%s", (file, firstOnLaw) => {
  const truth = truthOf(file);
  const result = resultOf(fixtureBytes(`demo/${file}`), YELLOW);

  test("gives gap, Rydberg energy and defect within four standard errors", () => {
    expect(result.status).toBe("converged");
    // Derived: 4 standard errors, the project's bar.
    for (const key of KEYS)
      expect(Math.abs(pullOf(result.series![key], truth.series[key])), key).toBeLessThan(4);
  });

  test("reads the series upward without a gap, and the law from the right line on", () => {
    const ns = result.lines.map((line) => line.n);
    expect(ns).toEqual(Array.from({ length: ns.length }, (_, i) => 2 + i));
    // Derived: offsets of the lowest lines in the truth.
    expect(result.series!.fit_n).toEqual([firstOnLaw, ns[ns.length - 1]]);
    // Derived: n = 11 of the broadest sample is as wide as 0.9 spacings and still many standard errors strong.
    expect(ns[ns.length - 1]).toBeGreaterThanOrEqual(11);
  });

  test("gives every line's energy, width and area with honest errors", () => {
    const pulls = result.lines.flatMap((line) => {
      const made = truth.lines.find((one) => one.n === line.n)!;
      return [
        pullOf(line.energy_eV, made.energy_eV),
        pullOf(line.width_eV, made.width_eV),
        pullOf(line.area, made.area),
      ];
    });
    // Derived: of some 45 normal numbers 0.12 lie beyond 3 on average, two or more in less than one set of 150.
    expect(pulls.filter((pull) => Math.abs(pull) > 3).length).toBeLessThanOrEqual(2);
    expect(Math.max(...pulls.map(Math.abs))).toBeLessThan(5);
    const square = pulls.reduce((sum, pull) => sum + pull * pull, 0) / pulls.length;
    // Derived: mean of about 45 squares, correlated in pairs: spread about 0.3.
    expect(square).toBeGreaterThan(0.3);
    expect(square).toBeLessThan(2);
  });

  test("gives the asymmetry, the law of the widths and the strength", () => {
    // Derived: 4 standard errors each.
    expect(Math.abs(pullOf(result.lines[0]!.asymmetry, truth.series.asymmetry))).toBeLessThan(4);
    expect(Math.abs(pullOf(result.width_law!.floor_eV, truth.width_law.floor_eV))).toBeLessThan(4);
    expect(Math.abs(pullOf(result.width_law!.coefficient_eV, truth.width_law.coefficient_eV))).toBeLessThan(
      4,
    );
    expect(Math.abs(pullOf(result.strength_law!.coefficient, truth.strength_law.coefficient))).toBeLessThan(
      4,
    );
    // Derived: the tail of the data is the law itself.
    expect(Math.abs(pullOf(result.tail!.factor, 1))).toBeLessThan(4);
  });

  test("gives the offsets of the lowest lines from the law", () => {
    for (const [n, offset] of Object.entries(truth.series.offsets_eV)) {
      const line = result.lines.find((one) => one.n === Number(n))!;
      expect(line.in_level_fit).toBe(false);
      // Derived: 4 standard errors.
      expect(Math.abs(pullOf(line.law_offset_eV, offset)), `n = ${n}`).toBeLessThan(4);
    }
  });

  test("carries no doubt but those that the data deserve", () => {
    const deserved = ["highest-line-blended", ...(firstOnLaw > 2 ? ["low-n-off-law"] : [])];
    expect(doubtsOf(result).filter((code) => !deserved.includes(code))).toEqual([]);
  });
});

test("TH-B2, whose slit is said to be none, says that the widths are not those of the lines", () => {
  const told = { ...YELLOW, lines: { slit_fwhm_eV: 0 } };
  const result = resultOf(fixtureBytes("demo/TH-B2_absorbance.csv"), told);
  const doubts = doubtsOf(result);
  // Derived: a slit of 60 ueV broadens the lines n > 8, as wide as 170 ueV, by a tenth and more: no floor explains that.
  expect(doubts.some((code) => code === "width-law-rejected" || code.startsWith("slit"))).toBe(true);
  const truth = truthOf("TH-B2_absorbance.csv");
  // Derived: the slit is nearly symmetric about each line, so energies stay; the bar is the same.
  for (const key of KEYS)
    expect(Math.abs(pullOf(result.series![key], truth.series[key])), key).toBeLessThan(4);
});

test("TH-B2, with the slit that its header names, has the widths of its lines and no doubt of them", () => {
  const result = resultOf(fixtureBytes("demo/TH-B2_absorbance.csv"), YELLOW);
  expect(result.fit?.domain).toBe("transmittance");
  expect(result.notes.map(({ code }) => code)).toContain("slit-from-header");
  expect(doubtsOf(result).filter((code) => code !== "low-n-off-law")).toEqual(["highest-line-blended"]);
  // Derived: the exponent and the floor that the file was made with, to 4 standard errors.
  expect(Math.abs(pullOf(result.width_law!.floor_eV, 140e-6))).toBeLessThan(4);
});
