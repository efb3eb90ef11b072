import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  asymmetryFromFano,
  dipHeight,
  dipPosition,
  fanoByAsymmetry,
  fanoFromAsymmetry,
  fanoHeight,
  linePair,
  peakHeight,
  peakPosition,
} from "../../../app/lines/index.ts";
import { derivative } from "./differences.ts";

function line(energy: number, center: number, width: number, area: number, q: number): number {
  const a = new Float64Array(1);
  const d = new Float64Array(1);
  linePair(Float64Array.of(energy), 0, 1, center, width, 0, a, d);
  return area * (a[0]! + 2 * q * d[0]!);
}

const asymmetry = fc.double({ min: -5, max: 5, noNaN: true }).filter((q) => Math.abs(q) > 1e-3);

describe("asymmetric line", () => {
  test("its maximum and minimum lie where the formulas say, with the height they say", () => {
    fc.assert(
      fc.property(asymmetry, (q) => {
        const top = peakPosition(2, 0.3, q);
        const bottom = dipPosition(2, 0.3, q);
        // Derived: the slope vanishes at top and bottom
        const slope = (e: number): number => derivative((x) => line(x, 2, 0.3, 1.7, q), e, 0.002);
        const dip = dipHeight(1.7, 0.3, q);
        expect(Math.abs(slope(top)) / peakHeight(1.7, 0.3, q)).toBeLessThan(1e-8);
        expect(Math.abs(slope(bottom))).toBeLessThan(1e-8);
        expect(line(top, 2, 0.3, 1.7, q) / peakHeight(1.7, 0.3, q)).toBeCloseTo(1, 12);
        expect(Math.abs(line(bottom, 2, 0.3, 1.7, q) / dip - 1)).toBeLessThan(1e-9);
        // Derived: the zero lies at E0 - g/(2 q)
        expect(Math.abs(line(2 - 0.15 / (2 * q), 2, 0.3, 1.7, q))).toBeLessThan(1e-12);
      }),
      { seed: 3, numRuns: 300 },
    );
  });

  test("a symmetric line peaks at its energy with 2 A/(pi G)", () => {
    // Derived: limits q -> 0
    expect(peakPosition(2, 0.3, 0)).toBe(2);
    expect(peakHeight(1, 0.3, 0)).toBeCloseTo(2 / (Math.PI * 0.3), 14);
    expect(dipHeight(1, 0.3, 0)).toBeCloseTo(0, 14);
  });

  test("Fano's and Toyozawa's readings are the same line, for either sign of the area", () => {
    fc.assert(
      fc.property(
        asymmetry,
        fc.constantFrom(1.3, -0.8),
        fc.double({ min: -20, max: 20, noNaN: true }),
        (q, area, e) => {
          const [center, width] = [1.5, 0.2];
          const qf = fanoFromAsymmetry(q, area);
          const height = fanoHeight(area, width, q);
          const fano = height * ((qf + e) ** 2 / (1 + e * e) - 1);
          // Derived: (F - 1)/(q_F^2 - 1) = (1 + 2 q eps)/(1 + eps^2) with q = q_F/(q_F^2 - 1); the Fano height is positive by the choice of root
          expect(height).toBeGreaterThan(0);
          const scale = peakHeight(Math.abs(area), width, q);
          expect(
            Math.abs(fano - line(center + (e * width) / 2, center, width, area, q)) / scale,
          ).toBeLessThan(2e-9);
        },
      ),
      { seed: 4, numRuns: 500 },
    );
  });

  test("asymmetry to Fano and back is the identity on both roots", () => {
    fc.assert(
      fc.property(asymmetry, fc.constantFrom(1, -1), (q, area) => {
        const qf = fanoFromAsymmetry(q, area);
        expect(Math.abs(qf) > 1).toBe(area > 0);
        // Derived: q = q_F/(q_F^2 - 1)
        expect(Math.abs(asymmetryFromFano(qf) / q - 1)).toBeLessThan(1e-12);
        const slope = derivative((x) => fanoFromAsymmetry(x, area), q, Math.abs(q) / 40);
        expect(Math.abs(fanoByAsymmetry(q, area) / slope - 1)).toBeLessThan(1e-8);
      }),
      { seed: 6, numRuns: 300 },
    );
  });

  test("a symmetric line is a Fano line of infinite or of zero parameter", () => {
    // Derived: limits of the two roots
    expect(Math.abs(fanoFromAsymmetry(0, 1))).toBe(Infinity);
    expect(Math.abs(fanoFromAsymmetry(0, -1))).toBe(0);
    expect(asymmetryFromFano(Infinity)).toBe(0);
  });
});
