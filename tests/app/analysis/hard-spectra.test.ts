import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import {
  areaOf,
  energyOf,
  makeSpectrum,
  spectrumFile,
  type SyntheticSeries,
} from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

/** What goes wrong in laboratories: lines lost, lines of another origin, short windows, no series at all. */
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;
const [yellow, , allowed] = [PRESET_CASES[0]!, PRESET_CASES[1]!, PRESET_CASES[2]!];
const clean: SyntheticSeries = { ...yellow.series, offsets_eV: {} };
const material = { preset: yellow.preset };

function analyseYellow(
  series: SyntheticSeries,
  { seed = 11, sigma = yellow.sampling.sigma, grid = yellow.sampling.grid, choices = {} as object } = {},
): RunglineResult {
  return resultOf(spectrumFile(makeSpectrum(series, { grid, sigma, seed }), sigma, yellow.heading), {
    material,
    ...choices,
  });
}

/** Every line of the result stands nearest to the level whose n it carries. */
function expectRightNumbers(result: RunglineResult, series: SyntheticSeries): void {
  for (const { n, energy_eV } of result.lines) {
    const distance = (k: number): number => Math.abs(energyOf(series, k) - energy_eV.value!);
    expect(distance(n), `n = ${n}`).toBeLessThan(Math.min(distance(n - 1), distance(n + 1)));
  }
}

function expectSeries(result: RunglineResult, series: SyntheticSeries): void {
  // Derived: 4 standard errors, the project's bar.
  for (const key of KEYS) expect(Math.abs(pullOf(result.series![key], series[key])), key).toBeLessThan(4);
}

describe("a line that is not there", () => {
  test.each([4, 7, 9])("n = %i: the others keep their numbers, and a note names it", (missing) => {
    const result = analyseYellow({ ...clean, share: (n) => (n === missing ? 0 : 1) });
    expectRightNumbers(result, clean);
    expectSeries(result, clean);
    expect(result.lines.map((line) => line.n)).not.toContain(missing);
    const note = result.notes.find(({ code }) => code === "line-missing");
    expect(note?.text).toContain(`n = ${missing}`);
  });

  test("under a mask: the others keep their numbers, and n = 7 is told by its wings or not at all", () => {
    const center = energyOf(clean, 7);
    const result = analyseYellow(clean, { choices: { mask_eV: [[center - 0.00025, center + 0.00025]] } });
    expectRightNumbers(result, clean);
    expectSeries(result, clean);
    const hidden = result.lines.find((line) => line.n === 7);
    if (hidden === undefined) expect(doubtsOf(result)).toContain("line-missing");
    else {
      // Derived: 4 standard errors; without its top a line is known far worse than its neighbour.
      expect(Math.abs(pullOf(hidden.energy_eV, center))).toBeLessThan(4);
      expect(hidden.energy_eV.sigma!).toBeGreaterThan(
        3 * result.lines.find((line) => line.n === 8)!.energy_eV.sigma!,
      );
    }
  });
});

describe("a line of another origin", () => {
  const between = (low: number): number => (energyOf(clean, low) + energyOf(clean, low + 1)) / 2;
  test.each([
    ["narrow and a third as strong, between n = 6 and 7", between(6), 60e-6, 0.3 * areaOf(clean, 7)],
    ["nearly as strong as its neighbour, between n = 6 and 7", between(6), 80e-6, 0.8 * areaOf(clean, 7)],
    ["between n = 3 and 4", between(3), 150e-6, 0.1 * areaOf(clean, 4)],
  ])("%s, gets no n and a note that says where it is", (_, energy_eV, width_eV, area) => {
    const result = analyseYellow({ ...clean, extraLines: [{ energy_eV, width_eV, area }] });
    expectRightNumbers(result, clean);
    const places = result.notes
      .filter(({ code }) => code === "line-unassigned" || code === "satellite")
      .flatMap(({ text }) => [...text.matchAll(/([\d.]+) meV/g)].map((found) => Number(found[1]) / 1e3));
    // Derived: the note places it within its own width.
    expect(Math.min(...places.map((place) => Math.abs(place - energy_eV)))).toBeLessThan(width_eV);
    // An unexplained line spoils the fit of its neighbours; what is asked is that this is said.
    expect(doubtsOf(result)).toContain("misfit");
    // Masked, as the note advises, the series is as it is.
    const masked = analyseYellow(
      { ...clean, extraLines: [{ energy_eV, width_eV, area }] },
      { choices: { mask_eV: [[energy_eV - 2.5 * width_eV, energy_eV + 2.5 * width_eV]] } },
    );
    expectRightNumbers(masked, clean);
  });

  test("too weak to disturb the lines is still reported, and leaves the series where it is", () => {
    const energy_eV = between(5);
    const result = analyseYellow({
      ...clean,
      extraLines: [{ energy_eV, width_eV: 120e-6, area: 0.01 * areaOf(clean, 5) }],
    });
    expectRightNumbers(result, clean);
    expectSeries(result, clean);
    expect(doubtsOf(result)).toContain("satellite");
  });
});

describe("a series that ends early", () => {
  test("cut off above n = 9: the tail is found to be missing", () => {
    const result = analyseYellow({ ...clean, share: (n) => (n > 9 ? 0 : 1) });
    expect(result.lines.map((line) => line.n)).toEqual([2, 3, 4, 5, 6, 7, 8, 9]);
    expectSeries(result, clean);
    expect(doubtsOf(result)).toContain("tail-weaker-than-law");
    // Derived: the factor's lower bound.
    expect(result.tail!.factor.value).toBeLessThan(0.05);
  });

  test("with half the strength above n = 15: the factor of the tail is one half", () => {
    const result = analyseYellow({ ...clean, share: (n) => (n > 15 ? 0.5 : 1) });
    expectSeries(result, clean);
    expect(doubtsOf(result)).toContain("tail-weaker-than-law");
    // Derived: 4 standard errors.
    expect(Math.abs(pullOf(result.tail!.factor, 0.5))).toBeLessThan(4);
  });

  test("with half the strength above n = 10: the strengths tell where the law ends", () => {
    const result = analyseYellow({ ...clean, share: (n) => (n > 10 ? 0.5 : 1) });
    expectSeries(result, clean);
    expect(doubtsOf(result)).toContain("tail-weaker-than-law");
    expect(doubtsOf(result).some((code) => code.startsWith("strength-"))).toBe(true);
  });
});

test("lowest lines off the law: the range starts at n = 5, says so, and gives their offsets", () => {
  const result = analyseYellow(yellow.series);
  expect(result.series!.fit_n[0]).toBe(5);
  expect(doubtsOf(result)).toContain("low-n-off-law");
  expectSeries(result, yellow.series);
  for (const n of [2, 3, 4]) {
    const line = result.lines.find((one) => one.n === n)!;
    // Derived: 4 standard errors.
    expect(Math.abs(pullOf(line.law_offset_eV, yellow.series.offsets_eV![n]!))).toBeLessThan(4);
  }
});

test.each([1, 2, 3])(
  "a window that starts above n = 4: strong lines below reach in and are accounted for, seed %i",
  (seed) => {
    const result = analyseYellow(clean, { seed, grid: [[2.1675, 2.173, 2600]] });
    expect(result.lines[0]!.n).toBe(5);
    expectRightNumbers(result, clean);
    expectSeries(result, clean);
    // Derived: 4 standard errors; a polynomial in place of the wings would pull the asymmetry.
    expect(Math.abs(pullOf(result.lines[0]!.asymmetry, clean.asymmetry))).toBeLessThan(4);
  },
);

test("three lines: the defect is held and said to be, and gap and Rydberg energy are right where it is", () => {
  const three: SyntheticSeries = {
    ...allowed.series,
    defect0: 0,
    share: (n) => (n > 3 ? 0 : 1),
    continuumTop_eV: null,
  };
  const file = spectrumFile(
    makeSpectrum(three, { ...allowed.sampling, seed: 4 }),
    allowed.sampling.sigma,
    allowed.heading,
  );
  const result = resultOf(file, { material: { preset: allowed.preset }, tail: { model: "none" } });
  expect(result.lines.map((line) => line.n)).toEqual([1, 2, 3]);
  expect(result.series!.defect0).toMatchObject({ value: 0, sigma: 0 });
  expect(result.notes.map((note) => note.code)).toContain("defect-held");
  for (const key of ["gap_eV", "rydberg_eV"] as const) {
    // Derived: 4 standard errors.
    expect(Math.abs(pullOf(result.series![key], three[key])), key).toBeLessThan(4);
  }
});

describe("no series is claimed", () => {
  const empty: SyntheticSeries = { ...clean, strength: 0, continuumTop_eV: null };

  test.each([1, 2, 3, 4, 5])("on a background alone, seed %i", (seed) => {
    for (const choices of [{}, { material: { preset: null } }]) {
      const result = analyseYellow(empty, { seed, choices });
      expect(result.status).toBe("no-series");
      expect(result.series).toBeNull();
      expect(result.lines).toEqual([]);
      expect(doubtsOf(result)).toContain("no-series");
    }
  });

  test.each([1, 2, 4, 5, 7, 10])("on five lines that follow no law, seed %i", (seed) => {
    const random = makeRandom(seed);
    const extraLines = Array.from({ length: 5 }, () => ({
      energy_eV: 2.143 + 0.027 * random.uniform(),
      width_eV: 2e-4 + 2e-4 * random.uniform(),
      area: 0.2,
    }));
    for (const choices of [{}, { material: { preset: null } }]) {
      const grid = [[2.14, 2.173, 4000]] as const;
      const result = analyseYellow({ ...empty, extraLines }, { seed, sigma: 3, grid, choices });
      expect(result.status).toBe("no-series");
      expect(result.notes.find(({ code }) => code === "no-series")?.text).toMatch(/[45] significant lines/);
    }
  });

  test("where noise drowns the lines", () => {
    const result = analyseYellow(clean, { sigma: 3000 });
    expect(result.status).toBe("no-series");
    expect(doubtsOf(result)).toContain("no-series");
  });

  test.each([0.0008, 0.0031, 0.0074])("without grave doubt on pure fringes of period %f eV", (period) => {
    const fringes: SyntheticSeries = {
      ...empty,
      background: (e) => 100 + 20 * Math.cos((2 * Math.PI * e) / period),
    };
    for (const choices of [{}, { material: { preset: null } }]) {
      const result = analyseYellow(fringes, { choices });
      if (result.status === "no-series") continue;
      const doubts = doubtsOf(result);
      expect(doubts).toContain("misfit");
      expect(doubts).toContain("satellite");
    }
  });
});
