import { describe, expect, test } from "vitest";
import { doubtsOf, fixtureBytes, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { makeSpectrum, spectrumFile } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";
import { resultSchema, type RunglineResult } from "../../../app/protocol/index.ts";

const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;
const [yellow, arsenide] = [PRESET_CASES[0]!, PRESET_CASES[1]!];
/** The yellow series on its law from n = 2. */
const clean = { ...yellow.series, offsets_eV: {} };
const bytes = spectrumFile(
  makeSpectrum(clean, { ...yellow.sampling, seed: 11 }),
  yellow.sampling.sigma,
  yellow.heading,
);
const material = { preset: yellow.preset };
const plain = resultOf(bytes, { material });

/** Every quantity of lines and series of a result by name. */
function quantities(result: RunglineResult): Map<string, { value: number | null; sigma: number | null }> {
  const all = new Map<string, { value: number | null; sigma: number | null }>();
  for (const key of KEYS) all.set(key, result.series![key]);
  for (const line of result.lines)
    for (const key of ["energy_eV", "width_eV", "area", "asymmetry"] as const)
      all.set(`${key} ${line.n}`, line[key]);
  all.set("floor", result.width_law!.floor_eV);
  all.set("coefficient", result.width_law!.coefficient_eV);
  all.set("tail", result.tail!.factor);
  return all;
}

describe("moving a preset's gap by 5 meV and its Rydberg energy by 15 % changes nothing in", () => {
  const files = [
    ["TH-A1", fixtureBytes("demo/TH-A1_transmission.csv"), yellow.preset, 2.17208, 0.092],
    ["TH-A2", fixtureBytes("demo/TH-A2_transmission.txt"), yellow.preset, 2.17208, 0.092],
    [
      "a gallium arsenide file",
      spectrumFile(
        makeSpectrum(arsenide.series, { ...arsenide.sampling, seed: 5 }),
        arsenide.sampling.sigma,
        arsenide.heading,
      ),
      arsenide.preset,
      1.5192,
      0.0042,
    ],
  ] as const;
  test.each(files)("%s", (name, file, preset, gap, rydberg) => {
    // The spread over backgrounds takes half the time and starts from the same fit.
    const uncertainty = { systematic: false };
    const asPreset = quantities(resultOf(file, { material: { preset }, uncertainty }));
    for (const sign of name === "TH-A1" ? [1] : [1, -1]) {
      const moved = quantities(
        resultOf(file, {
          material: { preset, gap_eV: gap + sign * 0.005, rydberg_eV: rydberg * (1 + sign * 0.15) },
          uncertainty,
        }),
      );
      expect([...moved.keys()]).toEqual([...asPreset.keys()]);
      for (const [key, { value, sigma }] of asPreset) {
        if (value === null || sigma === null || sigma === 0) continue;
        // Derived: 0.01 standard errors, the project's bar.
        expect(Math.abs(moved.get(key)!.value! - value) / sigma, key).toBeLessThan(0.01);
      }
    }
  });
});

test("levels tied to the law in the spectrum fit give what free levels and a law fit give", () => {
  const highest = plain.lines[plain.lines.length - 1]!.n;
  const n = Array.from({ length: highest - 1 }, (_, i) => 2 + i);
  const free = resultOf(bytes, { material, lines: { n } });
  const tied = resultOf(bytes, { material, lines: { n }, series: { mode: "tied" } });
  expect(tied.status).toBe("converged");
  for (const key of KEYS) {
    // Derived: both are the least-squares estimate of the same model; they differ by the curvature of chi square over
    // the errors of single lines, and by how the tail follows free lines.
    expect(
      Math.abs(tied.series![key].value! - free.series![key].value!) / free.series![key].sigma!,
      key,
    ).toBeLessThan(0.3);
    expect(tied.series![key].sigma! / free.series![key].sigma!, key).toBeGreaterThan(0.95);
    expect(tied.series![key].sigma! / free.series![key].sigma!, key).toBeLessThan(1.05);
    // Derived: 4 standard errors.
    expect(Math.abs(pullOf(tied.series![key], clean[key])), key).toBeLessThan(4);
  }
});

test("errors scaled by the residuals are the plain ones times the root of reduced chi square", () => {
  const scaled = resultOf(bytes, { material, uncertainty: { scale_by_residuals: true } });
  const root = Math.sqrt(plain.fit!.reduced_chi2!);
  expect(scaled.fit!.sigma_from).toBe("residuals");
  // Derived: the file names no standard deviation.
  expect(plain.fit!.sigma_from).toBe("estimated");
  for (const key of KEYS) {
    // Derived: definition.
    expect(scaled.series![key].sigma! / plain.series![key].sigma!).toBeCloseTo(root, 6);
    expect(scaled.series![key].value! - plain.series![key].value!).toBeCloseTo(0, 9);
  }
  scaled.lines.forEach((line, j) => {
    // Derived: definition.
    expect(line.width_eV.sigma! / plain.lines[j]!.width_eV.sigma!).toBeCloseTo(root, 6);
    expect(line.area.sigma! / plain.lines[j]!.area.sigma!).toBeCloseTo(root, 6);
  });
});

test("lines named by the user are the lines of the result, and the others stay signal", () => {
  const named = resultOf(bytes, { material, lines: { n: [5, 6, 7, 8, 9] } });
  expect(named.lines.map((line) => line.n)).toEqual([5, 6, 7, 8, 9]);
  for (const key of KEYS) expect(Math.abs(pullOf(named.series![key], clean[key])), key).toBeLessThan(4);
  const unordered = resultOf(bytes, { material, lines: { n: [9, 5, 7, 6, 8, 7] } });
  // Derived: a list is a set.
  expect(unordered.series).toEqual(named.series);
});

test("a range of n named by the user is the range of the level fit", () => {
  const named = resultOf(bytes, { material, series: { fit_n: [3, 10] } });
  expect(named.series!.fit_n).toEqual([3, 10]);
  expect(named.lines.filter((line) => line.in_level_fit).map((line) => line.n)).toEqual([
    3, 4, 5, 6, 7, 8, 9, 10,
  ]);
  for (const key of KEYS) expect(Math.abs(pullOf(named.series![key], clean[key])), key).toBeLessThan(4);
});

test("a range of n changes the law, never which lines are found or what they are", () => {
  const two = resultOf(bytes, { material, series: { fit_n: [5, 6] } });
  expect(two.series!.fit_n).toEqual([5, 6]);
  const parts = ({ lines }: RunglineResult): unknown =>
    lines.map(({ n, energy_eV, width_eV, area }) => ({ n, energy_eV, width_eV, area }));
  // Derived: two lines cannot speak for the tail, so the fit of the spectrum is the same to the bit.
  expect(parts(two)).toEqual(parts(plain));
  const more = resultOf(bytes, { material, series: { fit_n: [3, 9] } });
  expect(more.lines.map(({ n }) => n)).toEqual(plain.lines.map(({ n }) => n));
});

test("a window beside the file is named with what the file holds", () => {
  const outside = resultOf(bytes, { material, window_eV: [3, 4] });
  expect(outside.status).toBe("no-series");
  expect(outside.notes.find(({ code }) => code === "no-series")!.text).toMatch(/lies outside the file/);
});

test("the ladder ends where the user says, and the lines above it are tail", () => {
  const short = resultOf(bytes, { material, lines: { max_n: 7 } });
  expect(short.lines.map((line) => line.n)).toEqual([2, 3, 4, 5, 6, 7]);
  expect(short.tail!.from_n).toBe(8);
  // Derived: 4 standard errors.
  for (const key of KEYS) expect(Math.abs(pullOf(short.series![key], clean[key])), key).toBeLessThan(4);
});

test.each([
  ["a range of n without lines", { series: { fit_n: [20, 30] } }],
  ["a single line", { lines: { n: [5] } }],
])("%s gives no series, and a doubt says why", (_, chosen) => {
  const result = resultOf(bytes, { material, ...chosen });
  expect(result.series).toBeNull();
  expect(doubtsOf(result)).toContain("series-not-determined");
});

test("a result keeps its schema where the data do not determine the model", () => {
  // Derived: a measured background that is constant is the polynomial's first column once more.
  const result = resultOf(bytes, {
    material,
    background: [
      { term: "polynomial", order: 1 },
      { term: "measured", energy_eV: [2, 2.5], value: [1, 1] },
    ],
  });
  expect(doubtsOf(result)).toContain("parameters-degenerate");
  expect(resultSchema.parse(JSON.parse(JSON.stringify(result)))).toEqual(result);
});

test("without a defect the held value is stated as exact, and a defect in the data is seen by its cost", () => {
  const held = resultOf(bytes, { material, series: { defect: "none" } });
  // Derived: the ideal shift of a bulk series is 0.
  expect(held.series!.defect0).toEqual({ value: 0, sigma: 0, low: 0, high: 0 });
  expect(
    doubtsOf(held).some((code) => ["low-n-off-law", "law-rejected", "no-range-follows-law"].includes(code)),
  ).toBe(true);
  const ideal = { ...arsenide.series, defect0: 0 };
  const bulk = resultOf(
    spectrumFile(
      makeSpectrum(ideal, { ...arsenide.sampling, seed: 3 }),
      arsenide.sampling.sigma,
      arsenide.heading,
    ),
    { material: { preset: "gallium-arsenide" }, series: { defect: "none" } },
  );
  for (const key of ["gap_eV", "rydberg_eV"] as const) {
    // Derived: 4 standard errors.
    expect(Math.abs(pullOf(bulk.series![key], ideal[key])), key).toBeLessThan(4);
  }
});

test("a Ritz term is free when asked for, not told from zero where there is none, and costs precision", () => {
  const ritz = resultOf(bytes, { material, series: { defect: "ritz" } });
  for (const key of KEYS) {
    expect(Math.abs(pullOf(ritz.series![key], clean[key])), key).toBeLessThan(4);
    // Derived: one more nuisance parameter never lowers an error.
    expect(ritz.series![key].sigma!, key).toBeGreaterThan(plain.series![key].sigma!);
  }
  // Derived: the law of the data has no Ritz term.
  expect(Math.abs(pullOf(ritz.series!.defect2, 0))).toBeLessThan(4);
});

test("a free exponent of the widths comes out as the one in the data", () => {
  const free = resultOf(bytes, { material, width: { exponent: "free" } });
  // Derived: 4 standard errors.
  expect(Math.abs(pullOf(free.width_law!.exponent, clean.exponent))).toBeLessThan(4);
  // Derived: the preset holds the exponent; a held number has no error.
  expect(plain.width_law!.exponent).toMatchObject({ value: 3, sigma: 0 });
});

test.each(["none", "gaussian"] as const)(
  "a floor of kind %s, which the data do not have, is rejected, and a series that it spoils is doubted",
  (kind) => {
    const other = resultOf(bytes, { material, width: { floor_kind: kind } });
    const doubts = doubtsOf(other);
    expect(doubts).toContain("width-law-rejected");
    // Derived: 4 standard errors.
    const spoilt = KEYS.some((key) => Math.abs(pullOf(other.series![key], clean[key])) > 4);
    if (spoilt) expect(doubts.some((code) => code === "law-rejected" || code === "misfit")).toBe(true);
  },
);

test("a floor that adds in quadrature is found as such where the data have one", () => {
  const inhomogeneous = { ...clean, floorKind: "gaussian" as const, floor_eV: 110e-6 };
  const file = spectrumFile(
    makeSpectrum(inhomogeneous, { ...yellow.sampling, seed: 21 }),
    yellow.sampling.sigma,
    yellow.heading,
  );
  const result = resultOf(file, { material, width: { floor_kind: "gaussian" } });
  // Derived: 4 standard errors each.
  expect(Math.abs(pullOf(result.width_law!.floor_eV, inhomogeneous.floor_eV))).toBeLessThan(4);
  expect(Math.abs(pullOf(result.width_law!.coefficient_eV, inhomogeneous.coefficient_eV))).toBeLessThan(4);
  for (const key of KEYS) expect(Math.abs(pullOf(result.series![key], clean[key])), key).toBeLessThan(4);
  expect(doubtsOf(result)).not.toContain("width-law-rejected");
});

test("a Rydberg energy that is not the named material's is said", () => {
  const far = resultOf(bytes, {
    material: { ...material, rydberg_eV: 0.25 * clean.rydberg_eV },
    lines: { n: [5, 6, 7, 8, 9] },
    uncertainty: { systematic: false, profile: false },
  });
  expect(doubtsOf(far)).toContain("rydberg-unlike-material");
  expect(doubtsOf(resultOf(bytes, { material }))).not.toContain("rydberg-unlike-material");
});
