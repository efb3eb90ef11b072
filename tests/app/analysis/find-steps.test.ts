import { describe, expect, test } from "vitest";
import { findSteps } from "../../../app/analysis/find-steps.ts";
import { makeRandom } from "../../../app/base/index.ts";

function residuals(seed: number, misfit: (i: number) => number): Float64Array {
  const random = makeRandom(seed);
  return Float64Array.from({ length: 6000 }, (_, i) => random.normal() + misfit(i));
}

describe("steps in residuals", () => {
  test("are found to the reading, from four standard deviations on", () => {
    for (let seed = 1; seed <= 5; seed++)
      for (const height of [4, -6, 20]) {
        const found = findSteps(
          residuals(seed, (i) => (i < 2500 ? 0 : height) + Math.sin(i / 900)),
          1,
        );
        // Derived: made there
        expect(found).toHaveLength(1);
        expect(Math.abs(found[0]!.place - 2500)).toBeLessThanOrEqual(1);
        expect(Math.abs(found[0]!.height / height - 1)).toBeLessThan(0.35);
      }
  });

  test.each([
    ["noise", () => 0],
    ["a narrow one", (i: number) => 30 / (1 + ((i - 3000) / 6) ** 2)],
    ["a smooth edge", (i: number) => 20 * Math.tanh((i - 3000) / 15)],
    ["a background that is too stiff", (i: number) => 8 * Math.sin(i / 500)],
  ])("are not seen in %s", (_, misfit) => {
    for (let seed = 1; seed <= 10; seed++) expect(findSteps(residuals(seed, misfit), 1)).toEqual([]);
  });

  test("nor beside a line that does not fit", () => {
    for (let seed = 1; seed <= 10; seed++) {
      const off = residuals(seed, (i) => 15 / (1 + ((i - 3000) / 40) ** 2));
      // Derived: within 0.7 of its width of 80 points a line's own top may look broken, and is not asked
      expect(findSteps(off, 1).filter(({ place }) => Math.abs(place - 3000) > 56)).toEqual([]);
    }
  });
});
