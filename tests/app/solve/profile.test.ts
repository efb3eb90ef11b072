import { describe, expect, test } from "vitest";
import { profileInterval } from "../../../app/solve/index.ts";

describe("profile intervals", () => {
  test("a parabola gives plus and minus sigma times the root of the rise", () => {
    const parabola = (v: number): number => 7 + ((v - 3) / 0.2) ** 2;
    const one = profileInterval({ minimised: parabola, best: 3, chi2: 7, sigma: 0.2 });
    // Derived: chi2 rises by 1 at one sigma
    expect(one.low!).toBeCloseTo(2.8, 4);
    expect(one.high!).toBeCloseTo(3.2, 4);
    expect(one.parabolic).toBe(true);
    expect(one.better).toBe(null);
    expect(one.evaluations).toBeLessThan(5);
    const wide = profileInterval({ minimised: parabola, best: 3, chi2: 7, sigma: 0.2, rise: 3.841 });
    expect(wide.high!).toBeCloseTo(3 + 0.2 * Math.sqrt(3.841), 4);
  });

  test("a wrong sigma costs evaluations, not the answer", () => {
    const parabola = (v: number): number => (v / 0.2) ** 2;
    for (const sigma of [0.002, 0.05, 1, 20]) {
      const interval = profileInterval({ minimised: parabola, best: 0, chi2: 0, sigma });
      // Derived: as above
      expect(Math.abs(interval.low! + 0.2)).toBeLessThan(2e-4 * Math.max(0.2, sigma));
      expect(Math.abs(interval.high! - 0.2)).toBeLessThan(2e-4 * Math.max(0.2, sigma));
      expect(interval.parabolic).toBe(false);
    }
  });

  test("a skew profile has unequal sides and is not called parabolic", () => {
    // ln v normal about 0 with width 0.5
    const interval = profileInterval({
      minimised: (v) => (Math.log(v) / 0.5) ** 2,
      best: 1,
      chi2: 0,
      sigma: 0.5,
    });
    // Derived: ends exp(-0.5), exp(0.5)
    expect(interval.low!).toBeCloseTo(Math.exp(-0.5), 4);
    expect(interval.high!).toBeCloseTo(Math.exp(0.5), 4);
    expect(interval.parabolic).toBe(false);
  });

  test("an end that is not reached within the bounds, or where nothing can be fitted, is null", () => {
    const bounded = profileInterval({ minimised: (v) => v * v, best: 0, chi2: 0, sigma: 1, lower: -0.5 });
    expect(bounded.low).toBe(null);
    // Derived: chi2 = v^2
    expect(bounded.high!).toBeCloseTo(1, 4);
    const flat = profileInterval({
      minimised: (v) => 1 - Math.exp(-v * v),
      best: 0,
      chi2: 0,
      sigma: 1,
      rise: 2,
    });
    expect(flat.low).toBe(null);
    const broken = profileInterval({ minimised: (v) => (v > 0.5 ? NaN : v * v), best: 0, chi2: 0, sigma: 1 });
    expect(broken.high).toBe(null);
    expect(broken.low!).toBeCloseTo(-1, 4);
    expect(profileInterval({ minimised: (v) => v, best: 0, chi2: 0, sigma: NaN }).high).toBe(null);
  });

  test("a lower chi square on the way is reported", () => {
    const interval = profileInterval({
      minimised: (v) => (v > 0.9 ? -3 : v * v),
      best: 0,
      chi2: 0,
      sigma: 1,
    });
    expect(interval.better!.chi2).toBe(-3);
  });
});
