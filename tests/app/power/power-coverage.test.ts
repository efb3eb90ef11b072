import { expect, test } from "vitest";
import { powerCoverage } from "../../support/power-coverage.ts";

test("the 68.3 % interval of the exponent of S_n holds the truth as often as it says, over 100 seeded series", () => {
  const coverage = powerCoverage(1, 100);
  const share = coverage.covered / coverage.series;
  // Derived: 68.3 % with three binomial standard errors of 4.7 %
  expect(share).toBeGreaterThanOrEqual(0.54);
  expect(share).toBeLessThanOrEqual(0.82);
  // Derived: pulls of width one
  expect(Math.max(...coverage.pulls.map(Math.abs))).toBeLessThan(4);
  expect(Math.max(...coverage.saturationPulls.map(Math.abs))).toBeLessThan(4);
});
