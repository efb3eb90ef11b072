import { expect, test } from "vitest";
import { campaignCase, judgeCase } from "../../support/campaign.ts";

/** Notes that say nothing against the numbers of the series. */
const MILD = ["highest-line-blended", "low-n-coherent", "sampling-coarse", "window-short", "low-n-off-law"];

test("in random spectra of three to fourteen lines every n is right, or the result says why it may not be", () => {
  const seeds = Array.from({ length: 40 }, (_, i) => 1 + i);
  const tally = { right: 0, none: 0, wrong: 0 };
  for (const seed of seeds) {
    const one = campaignCase(seed);
    const verdict = judgeCase(one);
    tally[verdict.assignment]++;
    const grave = verdict.doubts.filter((code) => !MILD.includes(code));
    if (verdict.assignment !== "right") expect(grave, `seed ${seed}`).not.toEqual([]);
    // A line that stands out is not overlooked: no series only where three or four are all there is.
    if (verdict.assignment === "none")
      expect(one.visible, `seed ${seed}`).toBeLessThan(one.series.firstN + 4);
    // Derived: 5 standard errors; by chance one gap in a million.
    if (Math.abs(verdict.gapPull ?? 0) > 5) expect(grave, `seed ${seed}`).not.toEqual([]);
  }
  // Derived: none wrong of 40 means a share of wrong numbers below 7 % at 95 % confidence (0.93^40 = 0.055);
  // tests/bench/assignment.bench.ts bounds it better.
  expect(tally.wrong).toBe(0);
  // Derived: of the 40, spectra with three or four visible lines are 1/6 of the draw; the others must be read.
  expect(tally.right).toBeGreaterThanOrEqual(32);
});
