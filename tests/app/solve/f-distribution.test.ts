import { describe, expect, it } from "vitest";
import { chiSquareSurvival, fSurvival } from "../../../app/solve/index.ts";

describe("survival function of the F distribution", () => {
  it.each([
    // Source: upper 5 % and 1 % points as printed in statistical tables (Abramowitz and Stegun, Table 26.9), 3 decimals
    [161.4, 1, 1, 0.05, 2e-4],
    [6.388, 4, 4, 0.05, 2e-5],
    [4.965, 1, 10, 0.05, 2e-5],
    [5.994, 4, 10, 0.01, 2e-5],
    [3.098, 3, 20, 0.05, 2e-5],
  ])("F = %f with %d and %d degrees of freedom leaves the printed probability", (f, d1, d2, p, tolerance) => {
    expect(Math.abs(fSurvival(f, d1, d2) - p)).toBeLessThan(tolerance);
  });

  it("is elementary for two degrees of freedom above", () => {
    // Derived: for d1 = 2, Q = (1 + 2 f/d2)^(-d2/2)
    for (const d2 of [1, 3, 10, 57]) {
      for (const f of [0.01, 0.5, 1, 4, 60]) {
        const exact = (1 + (2 * f) / d2) ** (-d2 / 2);
        expect(Math.abs(fSurvival(f, 2, d2) / exact - 1)).toBeLessThan(1e-12);
      }
    }
  });

  it("goes over into chi square when the denominator is known", () => {
    // Derived: d2 to infinity gives the chi square distribution of d1 f
    expect(Math.abs(fSurvival(2.5, 3, 1e9) - chiSquareSurvival(7.5, 3))).toBeLessThan(1e-7);
  });
});
