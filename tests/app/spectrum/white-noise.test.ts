import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { estimateNoise } from "../../../app/spectrum/estimate-noise.ts";
import { smoothCurve } from "../../../app/spectrum/smooth-curve.ts";
import { whiteNoise } from "../../../app/spectrum/white-noise.ts";

/** A series of lines converging to a gap: 9,000 points of 3.7 ueV, the narrowest lines one to a few samples wide. */
function seriesTransmission(points: number, width: number): { x: Float64Array; T: Float64Array } {
  const x = Float64Array.from({ length: points }, (_, i) => 2.14 + (0.033 * i) / (points - 1));
  const T = x.map((E) => {
    let depth = 0.3;
    for (let n = 2; n < 26; n++) {
      const g = width / n ** 3 / 2;
      const u = E - (2.17208 - 0.092 / (n - 0.23) ** 2);
      depth += (3.2e-3 * ((n * n - 1) / n ** 5) * (g - 0.2 * u)) / (u * u + g * g);
    }
    return Math.exp(-depth);
  });
  return { x, T };
}

describe("noise estimated from the data", () => {
  it.each([0.016, 0.004, 0.001])("is within 5 %% of the truth beside lines of width %s eV/n^3", (width) => {
    const { x, T } = seriesTransmission(9000, width);
    for (const sigma of [1e-4, 1e-3, 1e-2])
      for (let seed = 1; seed <= 5; seed++) {
        const random = makeRandom(seed);
        const y = T.map((value) => value + sigma * random.normal());
        // Derived: the data were made with this sigma; standard error of the estimate 1.3 %
        expect(Math.abs(whiteNoise(x, y) / sigma - 1)).toBeLessThan(0.05);
      }
  });

  it("holds on an uneven grid, where differences of neighbours must follow the true places", () => {
    const random = makeRandom(3);
    let at = 2.1;
    const x = Float64Array.from({ length: 4000 }, () => (at += 1e-5 * (0.2 + 1.6 * random.uniform())));
    const y = x.map((E) => 3 * Math.sin(400 * E) + 0.01 * random.normal());
    // Derived: made with sigma 0.01; standard error 2 % at 4,000 points
    expect(Math.abs(whiteNoise(x, y) / 0.01 - 1)).toBeLessThan(0.08);
  });

  it("scales with the signal and does not move with an added line", () => {
    const { x, T } = seriesTransmission(2000, 0.016);
    const random = makeRandom(5);
    const y = T.map((value) => value + 0.001 * random.normal());
    const base = whiteNoise(x, y);
    // Derived: invariance to scale and to polynomials up to degree five
    expect(
      whiteNoise(
        x,
        y.map((value) => 7 * value),
      ) / base,
    ).toBeCloseTo(7, 6);
    expect(
      whiteNoise(
        x,
        y.map((value, i) => value + 50 * (x[i]! - 2.15)),
      ) / base,
    ).toBeCloseTo(1, 6);
  });

  it("stays a constant where the noise is one, in twenty of twenty draws", () => {
    const { x, T } = seriesTransmission(6000, 0.016);
    for (let seed = 1; seed <= 20; seed++) {
      const random = makeRandom(seed);
      const estimate = estimateNoise(
        x,
        T.map((value) => value + 0.002 * random.normal()),
        new Float64Array(x.length).fill(1),
      );
      expect(estimate.varies).toBe(false);
    }
  });

  it("follows noise that clearly changes with the height, as the logarithm of a noisy transmission has it", () => {
    const x = Float64Array.from({ length: 9000 }, (_, i) => 2.1 + 1e-5 * i);
    const depth = x.map((E) => 0.3 + 1.5 * (0.5 + 0.5 * Math.sin(300 * E)));
    for (let seed = 1; seed <= 3; seed++) {
      const random = makeRandom(seed);
      const truth = depth.map((value) => 0.002 * Math.exp(value));
      const y = depth.map((value, i) => value + truth[i]! * random.normal());
      const estimate = estimateNoise(x, y, new Float64Array(x.length).fill(1));
      expect(estimate.varies).toBe(true);
      const ratios = estimate.sigma.map((value, i) => value / truth[i]!).sort();
      // Derived: the data were made with this sigma; the quadratic form of the variance is near, not exact
      expect(ratios[450]).toBeGreaterThan(0.85);
      expect(ratios[8550]).toBeLessThan(1.15);
      expect(Math.abs(ratios[4500]! - 1)).toBeLessThan(0.06);
    }
  });

  it("sees the steps of numbers written with few digits", () => {
    const random = makeRandom(2);
    const x = Float64Array.from({ length: 800 }, (_, i) => 2.1 + 1e-4 * i);
    const y = x.map((E) => Math.round(1000 * (0.5 + 0.1 * Math.sin(60 * E) + 1e-5 * random.normal())) / 1000);
    const { sigma } = estimateNoise(x, y, new Float64Array(x.length).fill(1));
    // Derived: rounding to 0.001 has a standard deviation of 0.001/sqrt(12) = 2.9e-4
    expect(sigma[400]).toBeGreaterThanOrEqual(2.88e-4);
    expect(sigma[400]).toBeLessThan(4.5e-4);
  });
});

describe("smoothed curve for weights", () => {
  it("is nearer to the truth than the readings, and keeps the depth of narrow lines", () => {
    const { x, T } = seriesTransmission(9000, 0.016);
    const random = makeRandom(11);
    const y = T.map((value) => value + 0.005 * random.normal());
    const smooth = smoothCurve(y, new Float64Array(x.length).fill(0.005));
    let square = 0;
    let worst = 0;
    for (let i = 0; i < x.length; i++) {
      square += ((smooth[i]! - T[i]!) / 0.005) ** 2;
      worst = Math.max(worst, Math.abs(smooth[i]! - T[i]!) / 0.005);
    }
    // Frozen: 0.37 in standard deviations of a reading; the bar is half
    expect(Math.sqrt(square / x.length)).toBeLessThan(0.5);
    // Derived: a window is left when it disagrees by 2.5 standard errors with the narrower ones
    expect(worst).toBeLessThan(6);
  });

  it("returns a parabola as it is, ends included", () => {
    const y = Float64Array.from({ length: 100 }, (_, i) => 1 + 0.02 * i - 3e-4 * i * i);
    const smooth = smoothCurve(y, new Float64Array(100).fill(1));
    // Derived: local quadratics reproduce quadratics
    for (let i = 0; i < 100; i++) expect(Math.abs(smooth[i]! - y[i]!)).toBeLessThan(1e-12);
  });
});
