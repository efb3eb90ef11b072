import { describe, expect, test } from "vitest";
import { RUN, SILENT, doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import {
  areaOf,
  energyOf,
  makeSpectrum,
  spectrumFile,
  widthOf,
  type SyntheticSeries,
} from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";
import { resultSchema, type RunglineResult } from "../../../app/protocol/index.ts";
import { analyseFile } from "../../../app/tasks/index.ts";

const yellow = PRESET_CASES[0]!;
const clean: SyntheticSeries = { ...yellow.series, offsets_eV: {} };
const material = { preset: yellow.preset };
const fast = { uncertainty: { systematic: false, profile: false } };
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;

function bytesOf(series: SyntheticSeries, seed = 4): Uint8Array {
  const { grid, sigma } = yellow.sampling;
  return spectrumFile(makeSpectrum(series, { grid, sigma, seed }), sigma, yellow.heading);
}
const bytes = bytesOf(clean);
const fitted = (choices: object, of = bytes): RunglineResult =>
  resultOf(of, { material, ...fast, ...choices });
const free = fitted({});
const lineOf = (result: RunglineResult, n: number): RunglineResult["lines"][number] =>
  result.lines.find((line) => line.n === n)!;

function expectSeries(result: RunglineResult): void {
  expect(result.status).toBe("converged");
  // Derived: 4 standard errors, the project's bar.
  for (const key of KEYS) expect(Math.abs(pullOf(result.series![key], clean[key])), key).toBeLessThan(4);
}

describe("held parameters", () => {
  test.each([
    ["energy", "energy_eV", energyOf(clean, 6)],
    ["width", "width_eV", widthOf(clean, 6)],
    ["area", "area", areaOf(clean, 6)],
    ["asymmetry", "asymmetry", clean.asymmetry],
  ] as const)(
    "the %s of n = 6 keeps its value and has no error; the rest comes back",
    (parameter, key, hold) => {
      const result = fitted({ lines: { constraints: [{ n: 6, parameter, hold }] } });
      expectSeries(result);
      // Derived: held.
      expect(lineOf(result, 6)[key]).toEqual({ value: hold, sigma: 0, low: hold, high: hold });
      expect(result.notes.map(({ code }) => code)).toContain("parameters-held");
      // Derived: one parameter less (an asymmetry of one line is none of the shared one's).
      expect(free.fit!.parameters - result.fit!.parameters).toBe(parameter === "asymmetry" ? 0 : 1);
      expect(result.fit!.chi2 - free.fit!.chi2).toBeLessThan(16);
    },
  );

  test("a held energy says nothing of the law: its level is not among those fitted", () => {
    const wrong = energyOf(clean, 6) + 20e-6;
    const result = fitted({ lines: { constraints: [{ n: 6, parameter: "energy", hold: wrong }] } });
    expect(lineOf(result, 6).in_level_fit).toBe(false);
    for (const key of KEYS) expect(Math.abs(pullOf(result.series![key], clean[key]))).toBeLessThan(8);
    expect(doubtsOf(result).some((code) => code === "misfit" || code === "satellite")).toBe(true);
  });
});

describe("bounded parameters", () => {
  test("a bound that the data do not reach changes nothing", () => {
    const result = fitted({
      lines: {
        constraints: [
          { n: [5, 6], parameter: "width", low: 1e-5, high: 1e-3 },
          { n: 7, parameter: "area", low: 0 },
        ],
      },
    });
    expectSeries(result);
    expect(doubtsOf(result)).not.toContain("constraint-at-bound");
    for (const line of result.lines) {
      const other = lineOf(free, line.n);
      // Derived: the same minimum; passes agree to a few hundredths of a standard error.
      expect(Math.abs(line.width_eV.value! - other.width_eV.value!)).toBeLessThan(
        0.1 * other.width_eV.sigma!,
      );
      expect(line.area.sigma! / other.area.sigma!).toBeCloseTo(1, 2);
    }
  });

  test.each([
    ["energy", { high: energyOf(clean, 6) - 5e-6 }],
    ["width", { low: widthOf(clean, 6) + 10e-6 }],
    ["area", { low: 0, high: 0.97 * areaOf(clean, 6) }],
    ["asymmetry", { low: -0.1, high: 0.5 }],
  ] as const)("the %s of n = 6 against a wrong bound ends there, with a note", (parameter, bound) => {
    const result = fitted({ lines: { constraints: [{ n: 6, parameter, ...bound }] } });
    const note = result.notes.find(({ code }) => code === "constraint-at-bound");
    expect(note?.about).toContain("n=6");
    const line = lineOf(result, 6);
    // Derived: at a bound nothing is known of an error, so none is stated, nor for what follows from the value.
    const key = ({ energy: "energy_eV", width: "width_eV", area: "area", asymmetry: "asymmetry" } as const)[
      parameter
    ];
    expect(line[key].sigma).toBeNull();
    if (parameter === "width") expect(line.lifetime_ps.sigma).toBeNull();
    if (parameter === "area") expect(line.area_n3.sigma).toBeNull();
    if (parameter === "energy") expect(line.law_offset_eV.sigma).toBeNull();
  });
});

describe("tied parameters", () => {
  test("widths on their law: the law's parameters from the spectrum, agreeing with those from free widths", () => {
    const result = fitted({ width: { mode: "tied" } });
    expectSeries(result);
    const law = result.width_law!;
    expect(Math.abs(pullOf(law.floor_eV, clean.floor_eV))).toBeLessThan(4);
    expect(Math.abs(pullOf(law.coefficient_eV, clean.coefficient_eV))).toBeLessThan(4);
    // Derived: both are efficient estimates from the same data, so they differ by far less than their error.
    const other = free.width_law!;
    expect(Math.abs(law.coefficient_eV.value! - other.coefficient_eV.value!)).toBeLessThan(
      0.5 * other.coefficient_eV.sigma!,
    );
    expect(law.coefficient_eV.sigma! / other.coefficient_eV.sigma!).toBeGreaterThan(0.8);
    expect(law.coefficient_eV.sigma! / other.coefficient_eV.sigma!).toBeLessThan(1.1);
    expect(doubtsOf(result)).not.toContain("ties-rejected");
  });

  test("areas on their law, and everything tied at once", () => {
    const areas = fitted({ strength: { mode: "tied" } });
    expectSeries(areas);
    expect(Math.abs(pullOf(areas.strength_law!.coefficient, clean.strength))).toBeLessThan(4);
    const all = fitted({ strength: { mode: "tied" }, width: { mode: "tied" }, series: { mode: "tied" } });
    expectSeries(all);
    // Derived: laws instead of three numbers a line tell more of the gap, never less.
    expect(all.series!.gap_eV.sigma!).toBeLessThan(1.02 * free.series!.gap_eV.sigma!);
    expect(doubtsOf(all)).not.toContain("ties-rejected");
    expect(all.fit!.parameters).toBeLessThan(free.fit!.parameters - 20);
  });

  test("trials of other backgrounds and windows have the ties too", () => {
    const trial = (choices: object): { result: RunglineResult; count: number } => {
      const result = fitted({ ...choices, uncertainty: { systematic: true, profile: false } });
      const { bic, chi2, gap_eV } = result.systematic!.trials[0]!;
      // Derived: averaged points give the fit's own gap to a part of its error
      expect(Math.abs(gap_eV! - result.series!.gap_eV.value!)).toBeLessThan(
        0.5 * result.series!.gap_eV.sigma!,
      );
      return { result, count: bic! - chi2! };
    };
    const loose = trial({});
    const tight = trial({
      width: { mode: "tied" },
      strength: { mode: "tied" },
      series: { mode: "tied" },
    });
    // Derived: the criterion is chi square + parameters ln(points), and the averaged points are nearly the same
    const ratio = tight.result.fit!.parameters / loose.result.fit!.parameters;
    expect(ratio).toBeLessThan(0.5);
    expect(Math.abs(tight.count / loose.count / ratio - 1)).toBeLessThan(0.03);
  });

  test("a law that the lines do not follow is rejected against the free fit", () => {
    const rolled = bytesOf({ ...clean, share: (n) => (n === 5 ? 1.15 : n === 7 ? 0.9 : 1) });
    const result = fitted({ strength: { mode: "tied" } }, rolled);
    const said = [...doubtsOf(result)];
    expect(said.some((code) => code === "ties-rejected" || code.startsWith("strength-"))).toBe(true);
  });

  test.each(["energy", "width", "area"] as const)(
    "the %s of n = 9 alone, from the law of the others",
    (parameter) => {
      const result = fitted({ lines: { constraints: [{ n: 9, parameter, tie: "law" }] } });
      expectSeries(result);
      const key = ({ energy: "energy_eV", width: "width_eV", area: "area" } as const)[parameter];
      const truth = { energy: energyOf(clean, 9), width: widthOf(clean, 9), area: areaOf(clean, 9) }[
        parameter
      ];
      expect(Math.abs(pullOf(lineOf(result, 9)[key], truth))).toBeLessThan(4);
      expect(lineOf(result, 9)[key].sigma!).toBeLessThan(lineOf(free, 9)[key].sigma!);
    },
  );

  test("one line exempt from a tie of all", () => {
    const odd = bytesOf({ ...clean, share: (n) => (n === 5 ? 0.7 : 1) });
    const result = fitted(
      { strength: { mode: "tied" }, lines: { constraints: [{ n: 5, parameter: "area", tie: "free" }] } },
      odd,
    );
    expect(Math.abs(pullOf(lineOf(result, 5).area, 0.7 * areaOf(clean, 5)))).toBeLessThan(4);
  });

  test("shared widths of two neighbours are one number", () => {
    const result = fitted({ lines: { constraints: [{ n: [12, 13], parameter: "width", tie: "shared" }] } });
    expectSeries(result);
    expect(lineOf(result, 12).width_eV.value).toBe(lineOf(result, 13).width_eV.value);
  });

  test("asymmetries on q0 + q1/n^2: q1 is zero within its error where all lines share q", () => {
    const result = fitted({ lines: { asymmetry: "law" } });
    expectSeries(result);
    for (const line of result.lines)
      expect(Math.abs(pullOf(line.asymmetry, clean.asymmetry)), `n = ${line.n}`).toBeLessThan(4);
    // Derived: the law lets the lowest line differ, so its error is larger than that of the shared one.
    expect(lineOf(result, 2).asymmetry.sigma!).toBeGreaterThan(lineOf(free, 2).asymmetry.sigma!);
  });
});

describe("another series with the same gap and Rydberg energy", () => {
  const defect = 0.62;
  const at = (n: number): number => energyOf({ ...clean, defect0: defect }, n);
  const sides = [4, 5, 6].map((n) => ({
    energy_eV: at(n),
    width_eV: widthOf(clean, n),
    area: 0.06 * areaOf(clean, n),
  }));
  const crowded = bytesOf({ ...clean, extraLines: sides });

  test("unexplained it is a satellite; named it is measured, and the note is gone", () => {
    const without = fitted({}, crowded);
    expect(doubtsOf(without).some((code) => code === "satellite" || code === "line-unassigned")).toBe(true);
    const result = fitted({ series: { extra: [{ name: "S", defect: 0.6, n: [4, 5, 6] }] } }, crowded);
    expectSeries(result);
    expect(doubtsOf(result)).not.toContain("satellite");
    expect(doubtsOf(result)).not.toContain("line-unassigned");
    const [extra] = result.extra!;
    expect(Math.abs(pullOf(extra!.defect, defect))).toBeLessThan(4);
    for (const line of extra!.lines) {
      expect(Math.abs(pullOf(line.energy_eV, at(line.n)))).toBeLessThan(4);
      expect(Math.abs(pullOf(line.area, 0.06 * areaOf(clean, line.n)))).toBeLessThan(4);
    }
  });

  test("with widths of its own, and a series that is not there is said not to be seen", () => {
    const result = fitted(
      {
        series: {
          extra: [
            { name: "S", defect: 0.6, n: [4, 5, 6], width: "free" },
            { name: "F", defect: -0.1, n: [6], hold_defect: true },
          ],
        },
      },
      crowded,
    );
    expectSeries(result);
    for (const line of result.extra![0]!.lines)
      expect(Math.abs(pullOf(line.width_eV, widthOf(clean, line.n)))).toBeLessThan(4);
    expect(doubtsOf(result)).toContain("extra-not-seen");
  });
});

describe("what is asked", () => {
  test("is refused where it contradicts itself, and reported where it meets no line", () => {
    const bad = (constraint: object): boolean =>
      analyseFile({ file: "a.csv", bytes, choices: { lines: { constraints: [constraint] } } }, RUN, SILENT)
        .ok;
    expect(bad({ n: 5, parameter: "energy", tie: "shared" })).toBe(false);
    expect(bad({ n: 5, parameter: "width", hold: 1e-4, low: 1e-5 })).toBe(false);
    expect(bad({ n: 5, parameter: "width", low: 2, high: 1 })).toBe(false);
    const result = fitted({ lines: { constraints: [{ n: 33, parameter: "width", hold: 1e-4 }] } });
    expect(doubtsOf(result)).toContain("constraint-unused");
  });

  test("results from before these keys still read", () => {
    const old = JSON.parse(JSON.stringify(free)) as Record<string, Record<string, Record<string, unknown>>>;
    delete old["protocol"]!["lines"]!["constraints"];
    delete old["protocol"]!["series"]!["extra"];
    delete old["protocol"]!["width"]!["mode"];
    delete old["protocol"]!["strength"]!["mode"];
    delete old["protocol"]!["axis"]!["jitter_eV"];
    expect(resultSchema.safeParse(old).success).toBe(true);
  });
});
