import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  STRENGTH,
  WIDTH,
  strength,
  strengthLaw,
  widthBase,
  widthLaw,
  type WidthBase,
  type WidthFloorKind,
} from "../../../app/laws/index.ts";
import { derivative } from "../lines/differences.ts";

const BASES: WidthBase[] = ["n", "n-delta", "p-envelope"];
const FLOORS: WidthFloorKind[] = ["lorentzian", "gaussian"];

function width(
  n: number,
  delta: number,
  p: number[],
  base: WidthBase,
  floorKind: WidthFloorKind,
): Float64Array {
  const out = new Float64Array(WIDTH.size);
  widthLaw(n, delta, { floor: p[0]!, coefficient: p[1]!, exponent: p[2]!, base, floorKind }, out);
  return out;
}

describe("width law", () => {
  test("its derivatives agree with differences for every base and floor", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...BASES),
        fc.constantFrom(...FLOORS),
        fc.double({ min: 2, max: 40, noNaN: true }),
        fc.double({ min: -0.5, max: 0.9, noNaN: true }),
        fc.double({ min: 0.001, max: 1, noNaN: true }),
        fc.double({ min: 1.5, max: 4.5, noNaN: true }),
        (base, floorKind, n, delta, floor, exponent) => {
          // Floor in units of the term, so that both matter.
          const p = [floor * 0.016 * n ** -exponent, 0.016, exponent];
          const out = width(n, delta, p, base, floorKind);
          const value = out[WIDTH.width]!;
          for (let j = 0; j < 3; j++) {
            const step = p[j]! / 400;
            const difference = derivative(
              (v) => width(n, delta, p.with(j, v), base, floorKind)[WIDTH.width]!,
              p[j]!,
              step,
            );
            // Derived: central differences
            expect(Math.abs(out[WIDTH.byFloor + j]! - difference)).toBeLessThan((1e-10 * value) / step);
          }
          const byDelta = derivative((v) => width(n, v, p, base, floorKind)[WIDTH.width]!, delta, 0.01);
          const byN = derivative((v) => width(v, delta, p, base, floorKind)[WIDTH.width]!, n, 0.01);
          expect(Math.abs(out[WIDTH.byDefect]! - byDelta)).toBeLessThan(1e-8 * value);
          expect(Math.abs(out[WIDTH.byN]! - byN)).toBeLessThan(1e-8 * value);
        },
      ),
      { seed: 22, numRuns: 600 },
    );
  });

  test("with exponent 3 the p envelope is exactly (n^2 - 1)/n^5", () => {
    for (const n of [2, 3, 10, 25]) {
      // Derived: definition of the base
      expect(
        width(n, 0, [0, 1, 3], "p-envelope", "lorentzian")[WIDTH.width]! / ((n * n - 1) / n ** 5),
      ).toBeCloseTo(1, 13);
    }
    // Derived: b -> n
    expect(widthBase(1000, 0, "p-envelope") / 1000).toBeCloseTo(1, 6);
  });

  test("a Lorentzian floor adds and a Gaussian floor adds in quadrature", () => {
    // Derived: term 16/8 = 2; 1.5 + 2 and sqrt(1.5^2 + 2^2)
    expect(width(2, 0, [1.5, 16, 3], "n", "lorentzian")[WIDTH.width]).toBeCloseTo(3.5, 14);
    expect(width(2, 0, [1.5, 16, 3], "n", "gaussian")[WIDTH.width]).toBeCloseTo(2.5, 14);
    expect(width(2, 0, [0, 0, 3], "n", "gaussian").every(Number.isFinite)).toBe(true);
  });
});

describe("strength law", () => {
  test("its derivatives agree with differences for every envelope and base", () => {
    const out = new Float64Array(STRENGTH.size);
    for (const envelope of ["cubic", "p-envelope", "sheet"] as const) {
      for (const base of ["n", "n-delta"] as const) {
        for (const [n, delta] of [
          [2, 0.23],
          [7, -0.3],
          [31, 0.5],
        ] as const) {
          strengthLaw(n, delta, envelope, base, out);
          const byDelta = derivative((v) => strength(n, v, envelope, base), delta, 0.005);
          const byN = derivative((v) => strength(v, delta, envelope, base), n, 0.005);
          // Derived: central differences
          expect(Math.abs(out[STRENGTH.byDefect]! - byDelta)).toBeLessThan(1e-8 * out[STRENGTH.strength]!);
          expect(Math.abs(out[STRENGTH.byN]! - byN)).toBeLessThan(1e-8 * out[STRENGTH.strength]!);
        }
      }
    }
  });

  test("p lines 2, 3, 4 stand as 3/32 to 8/243 to 15/1024", () => {
    // Derived: (n^2 - 1)/n^5 of Elliott, Phys. Rev. 108, 1384 (1957), in whole numbers
    expect(strength(2, 0, "p-envelope", "n")).toBeCloseTo(3 / 32, 15);
    expect(strength(3, 0, "p-envelope", "n")).toBeCloseTo(8 / 243, 15);
    expect(strength(4, 0, "p-envelope", "n")).toBeCloseTo(15 / 1024, 15);
  });

  test("a sheet's lines go as (n - 1/2)^-3, and its defect takes the place of the half", () => {
    // Derived: 1/0.5^3 = 8
    expect(strength(1, 0.2, "sheet", "n")).toBeCloseTo(8, 13);
    expect(strength(1, 0.5, "sheet", "n-delta")).toBeCloseTo(8, 13);
  });

  test("every law falls as n^-3 in the end", () => {
    for (const envelope of ["cubic", "p-envelope", "sheet"] as const) {
      // Derived: leading term
      expect(strength(1e4, 0.3, envelope, "n-delta") * 1e12).toBeCloseTo(1, 3);
    }
  });
});
