import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  conventionalShift,
  exponentCurve,
  fitStrengths,
  fitWidths,
  rankReadings,
  type WidthInput,
} from "../../../app/series/index.ts";
import { areaOf, chained, drawChained, LINES, mustBe, TRUTH, widthOf } from "./synthetic-series.ts";

const widthSigmas = LINES.map((n) => 0.02 * widthOf(n));
const areaSigmas = LINES.map((n) => 0.01 * areaOf(n));

function widths(seed: number | null, change: Partial<WidthInput> = {}): WidthInput {
  const noise = seed === null ? new Float64Array(LINES.length) : drawChained(widthSigmas, makeRandom(seed));
  return {
    n: LINES,
    width_eV: Float64Array.from(LINES, (n, i) => widthOf(n) + noise[i]!),
    covariance: chained(widthSigmas),
    exponent: 3,
    base: "n",
    floorKind: "lorentzian",
    ...change,
  };
}

describe("the width law", () => {
  test("gives floor, coefficient and exponent back from exact widths", () => {
    const fit = mustBe(fitWidths(widths(null, { exponent: "free" })));
    const [floor, coefficient, exponent] = fit.estimates.values;
    // Derived: the numbers that made the widths.
    expect(floor! / TRUTH.floor).toBeCloseTo(1, 7);
    expect(coefficient! / TRUTH.coefficient).toBeCloseTo(1, 7);
    expect(exponent!).toBeCloseTo(3, 7);
  });

  test.each([3, "free"] as const)(
    "has a profile of the exponent that rises to one at its interval (%s)",
    (exponent) => {
      const input = widths(7, { exponent });
      const fit = mustBe(fitWidths(input));
      const { low, high, value } = fit.exponentTest!;
      const points = exponentCurve(input, fit);
      // Derived: six steps on each side and the minimum
      expect(points.length).toBe(13);
      expect(points[6]).toEqual([value, 0]);
      for (const [one, rise] of points) if (one !== value) expect(rise > 1).toBe(one < low! || one > high!);
    },
  );

  test("has pulls of width one", () => {
    const seeds = 300;
    let floor = 0;
    let coefficient = 0;
    for (let seed = 1; seed <= seeds; seed++) {
      const { estimates } = mustBe(fitWidths({ ...widths(seed), judgeRange: false, testExponent: false }));
      floor += (estimates.values[0]! - TRUTH.floor) ** 2 / estimates.covariance[0]!;
      coefficient += (estimates.values[1]! - TRUTH.coefficient) ** 2 / estimates.covariance[4]!;
    }
    // Derived: spread of the mean of 300 squared pulls 0.08, taken to 4 of these.
    expect(Math.abs(floor / seeds - 1)).toBeLessThan(0.33);
    expect(Math.abs(coefficient / seeds - 1)).toBeLessThan(0.33);
  });

  test("reads a smaller exponent where a floor of 2 ueV is denied", () => {
    const width_eV = Float64Array.from(LINES, (n) => 2e-6 + 0.016 / n ** 3);
    const covariance = new Float64Array(LINES.length ** 2);
    // Equal relative errors, as for a straight line in logarithms.
    LINES.forEach((_, i) => (covariance[i * (LINES.length + 1)] = (0.02 * width_eV[i]!) ** 2));
    const fit = mustBe(
      fitWidths({ ...widths(null), width_eV, covariance, exponent: "free", floorKind: "none" }),
    );
    // Derived: design notes of this project on the physics, section 7: ignoring a floor lowers the exponent (2.78 for lines up to 25).
    expect(fit.estimates.values[2]!).toBeLessThan(2.96);
    expect(fit.estimates.values[2]!).toBeGreaterThan(2.7);
  });

  test("keeps the floor at zero where the widths ask for less, and says so", () => {
    const width_eV = Float64Array.from(LINES, (n) => 0.016 / n ** 3 - 3e-6);
    const fit = mustBe(fitWidths({ ...widths(null), width_eV, judgeRange: false }));
    expect(fit.estimates.values[0]).toBe(0);
    expect(fit.floorAtZero).toBe(true);
    expect(fit.notes.map((note) => note.code)).toContain("width-floor-at-zero");
  });

  test("adds a Gaussian floor in quadrature", () => {
    const width_eV = Float64Array.from(LINES, (n) => Math.hypot(20e-6, 0.016 / n ** 3));
    const fit = mustBe(fitWidths({ ...widths(null), width_eV, floorKind: "gaussian" }));
    // Derived: the numbers that made the widths.
    expect(fit.estimates.values[0]! / 20e-6).toBeCloseTo(1, 6);
    expect(fit.estimates.values[1]! / 0.016).toBeCloseTo(1, 6);
  });

  test("leaves out a lowest line that does not follow the others, and only then", () => {
    const broad = widths(4);
    const width_eV = Float64Array.from(broad.width_eV);
    width_eV[0]! *= 1.3;
    const fit = mustBe(fitWidths({ ...broad, width_eV }));
    expect(fit.leftOut).toEqual([2]);
    expect(mustBe(fitWidths(widths(4))).leftOut).toEqual([]);
  });

  test("tests a held exponent by freeing it, with a profile interval", () => {
    const fit = mustBe(fitWidths(widths(12)));
    const free = fit.exponentTest!;
    // Derived: the true exponent lies within four standard errors.
    expect(Math.abs(free.value - 3)).toBeLessThan(4 * free.sigma);
    expect(free.low!).toBeLessThan(free.value);
    expect(free.high!).toBeGreaterThan(free.value);
    const wrong = mustBe(fitWidths(widths(12, { exponent: 2.5, judgeRange: false })));
    expect(wrong.notes.map((note) => note.code)).toContain("width-exponent-differs");
  });
});

describe("the strength law", () => {
  const strengths = (
    change: (n: number) => number,
    seed: number | null,
  ): Parameters<typeof fitStrengths>[0] => {
    const noise = seed === null ? new Float64Array(LINES.length) : drawChained(areaSigmas, makeRandom(seed));
    return {
      n: LINES,
      area: Float64Array.from(LINES, (n, i) => areaOf(n) * change(n) + noise[i]!),
      covariance: chained(areaSigmas),
      law: "p-envelope",
      base: "n",
    };
  };

  test("gives the coefficient of all lines where all follow", () => {
    const fit = mustBe(fitStrengths(strengths(() => 1, 3)));
    const sigma = Math.sqrt(fit.estimates.covariance[0]!);
    expect(Math.abs(fit.estimates.values[0]! - TRUTH.strength)).toBeLessThan(4 * sigma);
    expect(fit.leftOut).toEqual([]);
    expect(fit.half_at_n).toBeNull();
  });

  test("finds where the areas fall to half of the law, without letting the fallen lines bend it", () => {
    const fit = mustBe(fitStrengths(strengths((n) => (n <= 7 ? 1 : 1 - 0.15 * (n - 7)), null)));
    // Derived: 1 - 0.15 (n - 7) is 0.55 at n = 10 and 0.40 at n = 11, so one half at 10 1/3.
    expect(fit.half_at_n!).toBeCloseTo(10 + 1 / 3, 2);
    expect(fit.estimates.values[0]! / TRUTH.strength).toBeCloseTo(1, 2);
    expect(fit.notes.map((note) => note.code)).toContain("strength-rolls-off");
  });
});

describe("readings of n", () => {
  test("moves the defect into the convention, but never below the first line of the envelope", () => {
    // Derived: |delta - (3 - D)/2| <= 1/2.
    expect(conventionalShift(1.21, 3, 2, 3)).toBe(-1);
    expect(conventionalShift(0.21, 3, 2, 2)).toBe(0);
    expect(conventionalShift(-0.79, 3, 2, 2)).toBe(1);
    expect(conventionalShift(1.21, 3, 2, 2)).toBe(0);
    expect(conventionalShift(0.5, 2, 1, 1)).toBe(0);
    expect(conventionalShift(-0.4, 2, 1, 1)).toBe(1);
    expect(conventionalShift(0.5, 3, 1, 1)).toBe(0);
  });

  test("ranks the true reading first by strengths and widths and says that energies do not decide", () => {
    const input = widths(2);
    const noise = drawChained(areaSigmas, makeRandom(5));
    const found = rankReadings({
      defect0: 0.21,
      defectFree: true,
      dimension: 3,
      envelope: "P",
      pinned: false,
      widths: input,
      strengths: {
        n: LINES,
        area: Float64Array.from(LINES, (n, i) => areaOf(n) + noise[i]!),
        covariance: chained(areaSigmas),
        law: "p-envelope",
        base: "n",
      },
    });
    expect(found.shift).toBe(0);
    expect(found.readings[0]).toMatchObject({ shift: 0, chosen: true });
    expect(found.notes.map((note) => note.code)).toEqual(["n-not-decided-by-energies"]);
  });

  test("disputes a pinned reading that strengths and widths contradict", () => {
    const moved = LINES.map((n) => n + 1);
    const found = rankReadings({
      defect0: 1.21,
      defectFree: true,
      dimension: 3,
      envelope: "P",
      pinned: true,
      widths: { ...widths(2), n: moved },
      strengths: {
        n: moved,
        area: Float64Array.from(LINES, areaOf),
        covariance: chained(areaSigmas),
        law: "p-envelope",
        base: "n",
      },
    });
    expect(found.notes.map((note) => note.code)).toContain("reading-disputed");
    expect(found.readings[0]!.shift).toBe(-1);
  });
});
