import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  chiSquareSurvival,
  durbinWatson,
  informationCriteria,
  neighbourCorrelation,
  normalCdf,
  normalQuantile,
  runsTest,
} from "../../../app/solve/index.ts";

describe("distributions", () => {
  test("chi square meets the critical values of printed tables", () => {
    // Source: upper critical values of chi square as printed in statistical tables (six digits): [dof, area, value]
    const table = [
      [1, 0.05, 3.84146],
      [1, 0.01, 6.6349],
      [2, 0.05, 5.99146],
      [3, 0.05, 7.81473],
      [5, 0.01, 15.08627],
      [10, 0.05, 18.30704],
      [10, 0.01, 23.20925],
      [10, 0.995, 2.15586],
      [100, 0.995, 67.3276],
      [100, 0.95, 77.9295],
      [500, 0.95, 449.147],
    ] as const;
    for (const [dof, area, value] of table) {
      expect(chiSquareSurvival(value, dof) / area).toBeCloseTo(1, 4);
    }
  });

  test("chi square keeps its digits far out and at thousands of degrees of freedom", () => {
    // Derived: regularised incomplete gamma function worked out with 40 digits: [chi2, dof, survival]
    const exact = [
      [1e-3, 1, 0.9747728793699604],
      [10, 5, 0.07523524614651218],
      [30, 30, 0.46565370894400965],
      [8900, 9000, 0.7713078694645221],
      [9300, 9000, 0.013323496542137733],
      [9800, 9000, 3.3209942070149327e-9],
      [600, 200, 1.4110215102111522e-41],
      [200, 3, 4.2185411071920426e-43],
      [0.5, 12, 0.9999997261864366],
    ] as const;
    for (const [chi2, dof, survival] of exact) {
      expect(Math.abs(chiSquareSurvival(chi2, dof) / survival - 1)).toBeLessThan(1e-12);
    }
  });

  test("ends of the range of chi square", () => {
    expect(chiSquareSurvival(0, 5)).toBe(1);
    expect(chiSquareSurvival(Infinity, 5)).toBe(0);
    expect(Number.isNaN(chiSquareSurvival(1, 0))).toBe(true);
  });

  test("the normal distribution and its quantile", () => {
    // Derived: worked out with 40 digits: [x, area below]
    const exact = [
      [-38, 2.88542835e-316],
      [-20, 2.7536241186062337e-89],
      [-8, 6.220960574271784e-16],
      [-1.96, 0.024997895148220435],
      [-1, 0.15865525393145705],
      [-0.3, 0.3820885778110474],
      [0, 0.5],
      [0.5, 0.6914624612740131],
      [3, 0.9986501019683699],
    ] as const;
    for (const [x, area] of exact) {
      // The first is below the smallest normal number, where eight digits are left.
      expect(Math.abs(normalCdf(x) / area - 1)).toBeLessThan(x === -38 ? 1e-7 : 1e-12);
    }
    // Source: standard normal quantiles as printed in statistical tables: 1.95996, 1.64485, 2.57583
    expect(normalQuantile(0.975)).toBeCloseTo(1.95996, 5);
    expect(normalQuantile(0.95)).toBeCloseTo(1.64485, 5);
    expect(normalQuantile(0.995)).toBeCloseTo(2.57583, 5);
    for (const p of [1e-300, 1e-20, 0.001, 0.2, 0.5, 0.7, 0.999]) {
      // Derived: inverse functions
      expect(Math.abs(normalCdf(normalQuantile(p)) / p - 1)).toBeLessThan(1e-11);
    }
    expect(normalQuantile(0)).toBe(-Infinity);
    expect(Number.isNaN(normalQuantile(1.1))).toBe(true);
  });
});

describe("patterns in residuals", () => {
  test("Durbin-Watson and the neighbour correlation of small sequences", () => {
    // Derived: differences 2, 2, 2 squared sum to 12, squares to 4
    expect(durbinWatson([1, -1, 1, -1])).toBe(3);
    // Derived: differences 0, 2, 0 squared sum to 4, squares to 4
    expect(durbinWatson([1, 1, -1, -1])).toBe(1);
    // Derived: products of neighbours 1 - 1 + 1 over 4
    expect(neighbourCorrelation([1, 1, -1, -1])).toBe(0.25);
    expect(Number.isNaN(durbinWatson([1]))).toBe(true);
    expect(Number.isNaN(neighbourCorrelation([2, 2, 2]))).toBe(true);
  });

  test("the runs test counts as the textbook does", () => {
    const test = runsTest([1, 2, -1, -3, 1, 0, 2, -1, -1, -2]);
    expect(test.runs).toBe(4);
    // Derived: 4 positive, 5 negative: 2 4 5/9 + 1 and sqrt(40 (40 - 9)/(81 8))
    expect(test.expected).toBeCloseTo(49 / 9, 13);
    expect(test.deviation).toBeCloseTo(Math.sqrt(1240 / 648), 13);
    expect(test.p).toBeCloseTo(2 * normalCdf((4 - 49 / 9) / Math.sqrt(1240 / 648)), 13);
    expect(Number.isNaN(runsTest([1, 2, 3]).p)).toBe(true);
  });

  test("independent residuals pass: p is spread evenly, Durbin-Watson is near 2", () => {
    const random = makeRandom(11);
    let low = 0;
    let watson = 0;
    for (let i = 0; i < 400; i++) {
      const r = Float64Array.from({ length: 500 }, () => random.normal());
      if (runsTest(r).p < 0.1) low++;
      watson += durbinWatson(r) / 400;
    }
    // Derived: 40 +- 6 of 400 below 0.1; mean 2 with error sqrt(4/500/400)
    expect(Math.abs(low - 40)).toBeLessThan(24);
    expect(Math.abs(watson - 2)).toBeLessThan(0.02);
  });

  test("information criteria add their penalties", () => {
    // Derived: 100 + 2 5, 100 + 5 ln 1000
    expect(informationCriteria(100, 1000, 5).aic).toBe(110);
    expect(informationCriteria(100, 1000, 5).bic).toBeCloseTo(100 + 5 * Math.log(1000), 12);
  });
});
