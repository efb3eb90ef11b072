import { describe, expect, test } from "vitest";
import { chooseLevelRange, fitLevels, profileLevels } from "../../../app/series/index.ts";
import { energyOf, lineEnergies, mustBe, TRUTH } from "./synthetic-series.ts";

describe("the level law", () => {
  test("comes back exactly from exact energies, without any start value", () => {
    const fit = mustBe(fitLevels({ ...lineEnergies(null), defect: "constant" }));
    const [gap, rydberg, defect] = fit.estimates.values;
    // Derived: exact energies have the truth as their only minimum.
    expect(Math.abs(gap! - TRUTH.gap)).toBeLessThan(1e-12);
    expect(Math.abs(rydberg! - TRUTH.rydberg)).toBeLessThan(1e-11);
    expect(Math.abs(defect! - TRUTH.defect)).toBeLessThan(1e-9);
    expect(fit.converged).toBe(true);
  });

  test("has pulls of width one and chi squares of the right mean over many seeds", () => {
    const seeds = 300;
    const squares = [0, 0, 0];
    let chi2 = 0;
    for (let seed = 1; seed <= seeds; seed++) {
      const fit = mustBe(fitLevels({ ...lineEnergies(seed), defect: "constant" }));
      const truth = [TRUTH.gap, TRUTH.rydberg, TRUTH.defect];
      truth.forEach((value, i) => {
        squares[i]! += (fit.estimates.values[i]! - value) ** 2 / fit.estimates.covariance[i * 6]!;
      });
      chi2 += fit.chi2;
    }
    // Derived: the mean of 300 squared unit pulls is 1 with a spread of sqrt(2/300) = 0.08; taken to 4 of these.
    for (const sum of squares) expect(Math.abs(sum / seeds - 1)).toBeLessThan(0.33);
    // Derived: chi square of 11 lines and 3 parameters is 8 on average, spread sqrt(16/300) = 0.23.
    expect(Math.abs(chi2 / seeds - 8)).toBeLessThan(0.93);
  });

  test("is the same law in meV: a thousand times the energies, the same defect and chi square", () => {
    const lines = lineEnergies(7);
    const plain = mustBe(fitLevels({ ...lines, defect: "constant" }));
    const scaled = mustBe(
      fitLevels({
        n: lines.n,
        energy_eV: lines.energy_eV.map((e) => e * 1000),
        covariance: lines.covariance.map((v) => v * 1e6),
        defect: "constant",
      }),
    );
    // Derived: the law is linear in the unit of energy.
    expect(scaled.estimates.values[0]! / 1000).toBeCloseTo(plain.estimates.values[0]!, 10);
    expect(scaled.estimates.values[2]!).toBeCloseTo(plain.estimates.values[2]!, 6);
    expect(scaled.chi2).toBeCloseTo(plain.chi2, 5);
  });

  test("gives n + 1 the same gap and Rydberg energy and a defect larger by one", () => {
    const lines = lineEnergies(3);
    const plain = mustBe(fitLevels({ ...lines, defect: "constant" }));
    const shifted = mustBe(fitLevels({ ...lines, n: lines.n.map((n) => n + 1), defect: "constant" }));
    // Derived: n - delta is all that the law contains.
    expect(shifted.estimates.values[2]! - plain.estimates.values[2]!).toBeCloseTo(1, 7);
    expect(shifted.estimates.values[0]!).toBeCloseTo(plain.estimates.values[0]!, 11);
    expect(shifted.chi2).toBeCloseTo(plain.chi2, 6);
  });

  test("says that one degree is left with four lines and holds the defect with three", () => {
    const four = mustBe(fitLevels({ ...lineEnergies(1, [2, 3, 4, 5]), defect: "constant" }));
    expect(four.defect).toBe("constant");
    expect(four.notes.map((note) => note.code)).toContain("one-degree-left");
    const three = mustBe(fitLevels({ ...lineEnergies(1, [2, 3, 4]), defect: "constant", heldDefect: 0.21 }));
    expect(three.defect).toBe("none");
    expect(three.estimates.values[2]).toBe(0.21);
    expect(three.notes.map((note) => note.code)).toContain("defect-held");
    const two = mustBe(fitLevels({ ...lineEnergies(1, [2, 3]), defect: "constant", heldDefect: 0.21 }));
    expect(two.degreesOfFreedom).toBe(0);
    expect(two.notes.map((note) => note.code)).toContain("law-not-tested");
    const one = fitLevels({ ...lineEnergies(1, [2]), defect: "constant" });
    expect(one.ok ? null : one.issues[0]!.code).toBe("series/too-few-lines");
  });

  test("rejects the law and scales the errors where one line is off by many standard errors", () => {
    const lines = lineEnergies(null);
    const energy_eV = Float64Array.from(lines.energy_eV);
    energy_eV[5]! += 20 * Math.sqrt(lines.covariance[5 * 12]!);
    const fit = mustBe(fitLevels({ ...lines, energy_eV, defect: "constant" }));
    expect(fit.notes.map((note) => note.code)).toContain("law-rejected");
    // Derived: the scale is the root of chi square over its degrees of freedom.
    expect(fit.errorScale).toBeCloseTo(Math.sqrt(fit.chi2 / 8), 12);
  });

  test("finds a Ritz term that is there and reports it apart from the constant", () => {
    const lines = lineEnergies(null);
    const energy_eV = Float64Array.from(
      lines.n,
      (n) => TRUTH.gap - TRUTH.rydberg / (n - 0.21 - 0.05 / (n - 0.21) ** 2) ** 2,
    );
    const fit = mustBe(fitLevels({ ...lines, energy_eV, defect: "ritz" }));
    // Derived: the terms that made the energies.
    expect(fit.estimates.values[2]!).toBeCloseTo(0.21, 7);
    expect(fit.estimates.values[3]!).toBeCloseTo(0.05, 7);
    expect(fit.defect).toBe("ritz");
  });

  test("profile intervals agree with the standard errors where the law is nearly linear", () => {
    const lines = lineEnergies(11);
    const input = { ...lines, defect: "constant" as const };
    const fit = mustBe(fitLevels(input));
    const profile = profileLevels(input, fit);
    [profile.gap_eV, profile.rydberg_eV, profile.defect0].forEach(({ low, high }, i) => {
      const sigma = Math.sqrt(fit.estimates.covariance[i * 6]!);
      // Derived: chi square rises by one at one standard error in a linear problem.
      expect(Math.abs((fit.estimates.values[i]! - low!) / sigma - 1)).toBeLessThan(0.05);
      expect(Math.abs((high! - fit.estimates.values[i]!) / sigma - 1)).toBeLessThan(0.05);
    });
  });
});

describe("the range of n", () => {
  const withOffsets = (seed: number): ReturnType<typeof lineEnergies> => {
    const lines = lineEnergies(seed);
    const energy_eV = Float64Array.from(lines.energy_eV);
    // The low lines of the yellow series lie off the law of the high ones.
    [0.0042, 0.0011, 0.00035].forEach((offset, i) => (energy_eV[i]! += offset));
    return { ...lines, energy_eV };
  };

  test("starts at the lowest line that follows the law and keeps the offsets of those below visible", () => {
    const choice = mustBe(chooseLevelRange({ ...withOffsets(5), defect: "constant", fit_n: "auto" }));
    // Derived: lines n = 2, 3, 4 were moved by hundreds of standard errors, the others not.
    expect(choice.fit_n).toEqual([5, 12]);
    expect(choice.notes.map((note) => note.code)).toContain("low-n-off-law");
    const gap = choice.fit.estimates;
    expect(Math.abs(gap.values[0]! - TRUTH.gap) / Math.sqrt(gap.covariance[0]!)).toBeLessThan(4);
  });

  test("takes all lines where all follow, and the range that is asked for as it is", () => {
    expect(mustBe(chooseLevelRange({ ...lineEnergies(6), defect: "constant", fit_n: "auto" })).fit_n).toEqual(
      [2, 12],
    );
    const asked = mustBe(chooseLevelRange({ ...withOffsets(6), defect: "constant", fit_n: [3, 10] }));
    expect(asked.fit_n).toEqual([3, 10]);
    expect(asked.notes.map((note) => note.code)).toContain("law-rejected");
  });

  test("takes four lines where they follow the law and every longer range is flatly rejected", () => {
    const { n, energy_eV, covariance } = withOffsets(5);
    const k = n.length;
    const seven = {
      n: n.slice(0, 7),
      energy_eV: energy_eV.slice(0, 7),
      covariance: Float64Array.from({ length: 49 }, (_, i) => covariance[Math.floor(i / 7) * k + (i % 7)]!),
    };
    const choice = mustBe(chooseLevelRange({ ...seven, defect: "constant", fit_n: "auto" }));
    // Derived: the lines end at n = 8, and n = 2, 3, 4 were moved by hundreds of standard errors.
    expect(choice.fit_n).toEqual([5, 8]);
    expect(choice.fit.errorScale).toBeNull();
    expect(choice.notes.map(({ code }) => code)).toEqual(
      expect.arrayContaining(["low-n-off-law", "one-degree-left"]),
    );
  });

  test("lists gap, Rydberg energy and defect for every lowest and every highest n", () => {
    const choice = mustBe(chooseLevelRange({ ...lineEnergies(8), defect: "constant", fit_n: "auto" }));
    const lows = choice.ranges.filter((step) => step.n_max === 12).map((step) => step.n_min);
    const highs = choice.ranges.filter((step) => step.n_min === 2).map((step) => step.n_max);
    // Derived: two lines are the fewest that give a gap.
    expect(lows).toEqual([2, 3, 4, 5, 6, 7, 8, 9, 10, 11]);
    expect([...highs].sort((a, b) => a - b)).toEqual([3, 4, 5, 6, 7, 8, 9, 10, 11, 12]);
  });

  test("says so where no range follows the law, and still gives one", () => {
    const lines = lineEnergies(null);
    const energy_eV = Float64Array.from(lines.n, (n) => energyOf(n) + (n % 2 === 0 ? 1 : -1) * 20e-6);
    const choice = mustBe(chooseLevelRange({ ...lines, energy_eV, defect: "constant", fit_n: "auto" }));
    const codes = choice.notes.map((note) => note.code);
    expect(codes).toContain("no-range-follows-law");
    expect(codes).toContain("law-rejected");
  });
});
