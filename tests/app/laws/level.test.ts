import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  LEVEL,
  defectAt,
  effectiveNAt,
  levelEnergy,
  levelLaw,
  levelSpacing,
} from "../../../app/laws/index.ts";
import { derivative } from "../lines/differences.ts";

const cases = fc.record({
  n: fc.integer({ min: 3, max: 60 }),
  gap: fc.double({ min: 0.5, max: 3, noNaN: true }),
  rydberg: fc.double({ min: 0.003, max: 0.2, noNaN: true }),
  defect0: fc.double({ min: -0.6, max: 0.9, noNaN: true }),
  defect2: fc.double({ min: -0.5, max: 0.5, noNaN: true }),
  defect4: fc.double({ min: -0.5, max: 0.5, noNaN: true }),
});

function law(n: number, p: number[]): Float64Array {
  const out = new Float64Array(LEVEL.size);
  const [gap, rydberg, defect0, defect2, defect4] = p as [number, number, number, number, number];
  levelLaw(n, { gap, rydberg, defect0, defect2, defect4 }, out);
  return out;
}

describe("level law", () => {
  test("its derivatives agree with differences", () => {
    fc.assert(
      fc.property(cases, ({ n, gap, rydberg, defect0, defect2, defect4 }) => {
        const p = [gap, rydberg, defect0, defect2, defect4];
        const out = law(n, p);
        const steps = [0.01, rydberg / 50, 0.01, 0.01, 0.01];
        for (let j = 0; j < 5; j++) {
          const f = (v: number): number => law(n, p.with(j, v))[LEVEL.energy]! - gap;
          const difference = derivative(j === 0 ? (v) => f(v) : f, p[j]!, steps[j]!);
          // Derived: central differences
          expect(Math.abs(out[LEVEL.byGap + j]! - difference)).toBeLessThan(
            1e-9 * (1 + Math.abs(difference)),
          );
        }
        const byN = derivative((v) => law(v, p)[LEVEL.energy]! - gap, n, 0.01);
        expect(Math.abs(out[LEVEL.byN]! - byN)).toBeLessThan(1e-9 * (1 + Math.abs(byN)));
      }),
      { seed: 21, numRuns: 500 },
    );
  });

  test("n and a constant defect cannot be told apart", () => {
    // Derived: (n + 1) - (delta + 1) = n - delta
    expect(levelEnergy(7, 2, 0.1, 1.25)).toBe(levelEnergy(6, 2, 0.1, 0.25));
  });

  test("an ideal sheet has defect one half and binds the first level by 4 Ry", () => {
    // Derived: Ry/(1/2)^2
    expect(levelEnergy(1, 2, 0.1, 0.5)).toBeCloseTo(2 - 0.4, 14);
  });

  test("the Ritz defect is the expansion in (n - delta0)^-2", () => {
    // Derived: m = 4: 0.5 + 0.32/16 + 2.56/256
    expect(defectAt(4.5, 0.5, 0.32, 2.56)).toBeCloseTo(0.53, 14);
    expect(law(4.5, [0, 1, 0.5, 0.32, 2.56])[LEVEL.effectiveN]).toBeCloseTo(3.97, 14);
  });

  test("spacing is the difference of neighbours and nears 2 Ry/n^3", () => {
    const direct = levelEnergy(9, 2, 0.09, 0.2, 0.1) - levelEnergy(8, 2, 0.09, 0.2, 0.1);
    // Derived: definition, and the derivative of the level law at high n
    expect(levelSpacing(8, 0.09, 0.2, 0.1) / direct).toBeCloseTo(1, 10);
    expect((levelSpacing(1000, 0.09) * 1000.5 ** 3) / 0.18).toBeCloseTo(1, 5);
  });

  test("an energy gives back its effective quantum number, and none above the gap", () => {
    // Derived: inverse of the law
    expect(effectiveNAt(levelEnergy(12, 2, 0.09, 0.23), 2, 0.09)).toBeCloseTo(11.77, 9);
    expect(effectiveNAt(2.1, 2, 0.09)).toBeNaN();
  });
});
