import { expect, test } from "vitest";
import { splitSeries } from "../../../app/analysis/split-series.ts";
import type { Peak } from "../../../app/analysis/find-peaks.ts";

const GAP = 2.172;
const RYDBERG = 0.0917;
const CHOICES = { defectCentre: 0.23, defectHeld: false, lowestN: 2, highestN: 40 };

function peaksOf(defect: number, ns: readonly number[], height: number): Peak[] {
  return ns.map((n) => ({
    energy_eV: GAP - RYDBERG / (n - defect) ** 2,
    width_eV: 0.016 / n ** 3,
    height,
    odd: 0,
    significance: 40,
  }));
}

const P = peaksOf(0.22, [2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12], 250);
const inOrder = (peaks: Peak[]): Peak[] => peaks.sort((a, b) => a.energy_eV - b.energy_eV);

test("weak lines half way between strong ones are a series of their own, and the strong ones keep their Rydberg energy", () => {
  const peaks = inOrder([...P, ...peaksOf(0.65, [3, 4, 5, 6, 7, 8, 9], 25)]);
  const split = splitSeries(peaks, CHOICES, 2)!;
  // Derived: a reading of peaks is a start, good to a part of the tolerance of n; read as one series it would be 4.
  expect(Math.abs(split.assignments[0]!.rydberg_eV / RYDBERG - 1)).toBeLessThan(0.05);
  expect(split.assignments[0]!.matched.map(({ n }) => n)).toEqual([2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12]);
  expect(split.weak).toHaveLength(1);
  expect(split.weak[0]!.n).toEqual([3, 4, 5, 6, 7, 8, 9]);
  // Derived: the fit follows the defect of an extra series over 0.35 to either side.
  expect(Math.abs(split.weak[0]!.defect - 0.65)).toBeLessThan(0.2);
});

test("one series alone, a few satellites, and lines that fade are no second series", () => {
  expect(splitSeries(P, CHOICES, 2)).toBeNull();
  expect(splitSeries(inOrder([...P, ...peaksOf(0.65, [4, 6, 8], 25)]), CHOICES, 2)).toBeNull();
  const fading = P.map((peak, i) => ({ ...peak, height: i > 6 ? 250 * 0.3 ** (i - 6) : 250 }));
  expect(splitSeries(fading, CHOICES, 2)).toBeNull();
});
