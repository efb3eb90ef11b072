import { describe, expect, test } from "vitest";
import {
  continuumTerm,
  fringesTerm,
  interpolateColumn,
  measuredTerm,
  polynomialReading,
  polynomialTerm,
  squareRootOnsetTerm,
  urbachTerm,
  type BackgroundTerm,
} from "../../../app/lines/index.ts";
import { derivative } from "./differences.ts";

const energies = Float64Array.from({ length: 41 }, (_, i) => 2 + i * 0.005);

function fill(term: BackgroundTerm, nonlinear: number[]): Float64Array {
  const out = new Float64Array(term.columns.length * 41);
  term.fill(energies, 0, 41, nonlinear, out, 0, 41);
  return out;
}

describe("background terms", () => {
  test("Legendre columns are nearly orthogonal on the window", () => {
    const out = fill(polynomialTerm(3, 2.1, 0.1), []);
    const dot = (j: number, k: number): number =>
      energies.reduce((sum, _, i) => sum + out[j * 41 + i]! * out[k * 41 + i]!, 0);
    for (let j = 0; j < 4; j++) {
      for (let k = 0; k < j; k++) {
        // Derived: orthogonal up to the end-point correction of the sum, about 1/20
        expect(Math.abs(dot(j, k)) / Math.sqrt(dot(j, j) * dot(k, k))).toBeLessThan(0.12);
      }
    }
    // Derived: P_3(1) = 1 and P_3(-1) = -1
    expect(out[3 * 41 + 40]).toBeCloseTo(1, 12);
    expect(out[3 * 41]).toBeCloseTo(-1, 12);
  });

  test("Legendre coefficients read back as value, slope and curvature", () => {
    const coefficients = [0.7, -0.4, 0.3, 0.2];
    const f = (e: number): number => {
      const t = (e - 2.1) / 0.1;
      return 0.7 - 0.4 * t + 0.3 * (1.5 * t * t - 0.5) + 0.2 * (2.5 * t ** 3 - 1.5 * t);
    };
    for (const energy of [2.1, 2.04]) {
      const reading = polynomialReading(3, 2.1, 0.1, energy);
      const apply = (row: Float64Array): number => row.reduce((sum, r, k) => sum + r * coefficients[k]!, 0);
      const slope = (e: number): number => derivative(f, e, 0.01);
      // Derived: explicit P_0 ... P_3
      expect(apply(reading.value)).toBeCloseTo(f(energy), 13);
      expect(apply(reading.slope)).toBeCloseTo(slope(energy), 10);
      expect(apply(reading.curvature)).toBeCloseTo(derivative(slope, energy, 0.01), 8);
    }
  });

  test("the square-root onset starts at its energy", () => {
    const out = fill(squareRootOnsetTerm(2.1), []);
    // Derived: 0 below, sqrt(0.1) at the end
    expect(out[10]).toBe(0);
    expect(out[40]).toBeCloseTo(Math.sqrt(0.1), 12);
  });

  test("a measured spectrum is taken as it is, and written in its window only", () => {
    const out = new Float64Array(82).fill(-1);
    measuredTerm(energies).fill(energies, 3, 5, [], out, 41, 41);
    // Derived: offset 41, indices 3 and 4
    expect([...out].flatMap((v, i) => (v === -1 ? [] : [i]))).toEqual([44, 45]);
  });

  test.each([
    ["urbach", urbachTerm(2.2), [0.02]],
    ["fringes", fringesTerm(2.1), [0.013]],
    ["continuum", continuumTerm("forbidden-3d"), [2.15, 0.09, 0.004]],
  ] as const)("the derivatives of the %s term agree with differences", (_name, term, nonlinear) => {
    const count = term.columns.length;
    const out = new Float64Array(term.nonlinear.length * count * 41);
    term.differentiate(energies, 0, 41, nonlinear, out, 0, 41);
    for (let p = 0; p < nonlinear.length; p++) {
      for (let j = 0; j < count; j++) {
        for (const i of [0, 7, 20, 33, 40]) {
          const f = (v: number): number => fill(term, ([...nonlinear] as number[]).with(p, v))[j * 41 + i]!;
          const difference = derivative(f, nonlinear[p]!, p === 0 ? 1e-5 : nonlinear[p]! / 100);
          const scale = Math.max(1, Math.abs(difference));
          // Derived: central differences
          expect(Math.abs(out[(p * count + j) * 41 + i]! - difference) / scale).toBeLessThan(1e-7);
        }
      }
    }
  });
});

describe("interpolation of a measured curve", () => {
  test("straight lines are kept and points outside are counted", () => {
    const source = Float64Array.of(1, 2, 4, 5);
    const out = new Float64Array(4);
    const outside = interpolateColumn(
      source,
      Float64Array.of(3, 5, 9, 11),
      Float64Array.of(0.5, 1.5, 4.7, 6),
      0,
      4,
      out,
    );
    // Derived: y = 2 x + 1 inside, end values outside
    expect(outside).toBe(2);
    expect(out[0]).toBe(3);
    expect(out[1]).toBeCloseTo(4, 13);
    expect(out[2]).toBeCloseTo(10.4, 13);
    expect(out[3]).toBe(11);
  });
  test("a smooth curve is met to third order and no overshoot appears at a step", () => {
    const source = Float64Array.from({ length: 101 }, (_, i) => i / 100);
    const smooth = new Float64Array(50);
    const grid = Float64Array.from({ length: 50 }, (_, i) => 0.013 + i * 0.0191);
    interpolateColumn(source, source.map(Math.exp), grid, 0, 50, smooth);
    // Derived: step 0.01, error of order step^3
    for (let i = 0; i < 50; i++) expect(Math.abs(smooth[i]! - Math.exp(grid[i]!))).toBeLessThan(1e-6);
    const step = new Float64Array(50);
    interpolateColumn(
      source,
      source.map((x) => (x > 0.5 ? 1 : 0)),
      grid,
      0,
      50,
      step,
    );
    expect(Math.max(...step)).toBeLessThanOrEqual(1);
    expect(Math.min(...step)).toBeGreaterThanOrEqual(0);
  });
});
