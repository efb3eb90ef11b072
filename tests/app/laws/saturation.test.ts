import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  SATURATION,
  linearQuadraticLaw,
  saturationLaw,
  scannedProbePeak,
  scannedProbeWidth,
  type SaturationLaw,
} from "../../../app/laws/index.ts";
import { derivative } from "../lines/differences.ts";

const LAWS: SaturationLaw[] = ["separate-pump", "scanned-probe", "gaussian-self"];

function at(law: SaturationLaw, power: number, area0: number, saturation: number): Float64Array {
  const out = new Float64Array(SATURATION.size);
  saturationLaw(law, power, area0, saturation, out);
  return out;
}
const area = (...args: Parameters<typeof at>): number => at(...args)[SATURATION.area]!;

describe("saturation laws", () => {
  test("their derivatives agree with differences, also where the logarithm meets its series", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...LAWS),
        fc.double({ min: -5, max: 2, noNaN: true }),
        fc.double({ min: -1, max: 1, noNaN: true }),
        (law, exponent, powerExponent) => {
          const power = 10 ** powerExponent;
          const saturation = 10 ** exponent / power;
          const out = at(law, power, 3, saturation);
          const bend = (1 / power + saturation) / 400;
          const byS = derivative((v) => area(law, power, 3, v), saturation, bend);
          const byP = derivative(
            (v) => area(law, v, 3, saturation),
            power,
            ((1 / saturation + power) * 1) / 400,
          );
          // Derived: central differences
          expect(Math.abs(out[SATURATION.bySaturation]! - byS)).toBeLessThan(
            1e-10 * power * 3 + 1e-16 / bend,
          );
          expect(Math.abs(out[SATURATION.byPower]! - byP)).toBeLessThan(
            1e-9 * saturation * 3 + 1e-16 / power,
          );
          expect(out[SATURATION.byArea0]! * 3).toBeCloseTo(out[SATURATION.area]!, 13);
        },
      ),
      { seed: 23, numRuns: 500 },
    );
  });

  test.each(LAWS)("%s begins as 1 - S P and knows the power zero", (law) => {
    // Derived: common first-order term
    expect(area(law, 0, 2, 5)).toBe(2);
    expect(at(law, 0, 2, 5)[SATURATION.byPower]).toBeCloseTo(-10, 13);
    expect((1 - area(law, 1e-6, 1, 1)) / 1e-6).toBeCloseTo(1, 5);
  });

  test("named points of each law", () => {
    // Derived: S P = 1: 1/2; S P = 1.5: 1/sqrt(4); S P = (e - 1)/2: 1/(e - 1)
    expect(area("separate-pump", 2, 1, 0.5)).toBeCloseTo(0.5, 15);
    expect(area("scanned-probe", 3, 1, 0.5)).toBeCloseTo(0.5, 15);
    expect(area("gaussian-self", 1, 1, (Math.E - 1) / 2)).toBeCloseTo(1 / (Math.E - 1), 14);
  });

  test("the Gaussian self-probing law is the hyperbola averaged over its own beam", () => {
    const s = 0.8;
    // Local S P is 2 s exp(-2 r^2/w^2); weights are the same intensity: average of 1/(1 + 2 s v) over v uniform on (0, 1).
    const n = 20000;
    let sum = 0;
    for (let k = 0; k < n; k++) sum += 1 / (1 + (2 * s * (k + 0.5)) / n) / n;
    // Derived: midpoint sum, error 1/n^2
    expect(area("gaussian-self", 1, 1, s)).toBeCloseTo(sum, 8);
  });

  test("a swept laser keeps peak times width equal to the area", () => {
    // Derived: 1/(1 + s) sqrt(1 + s) = 1/sqrt(1 + s)
    const product = scannedProbePeak(0.7, 2) * scannedProbeWidth(1, 0.7, 2);
    expect(product).toBeCloseTo(area("scanned-probe", 2, 1, 0.7), 14);
  });

  test("reading a Gaussian self-probed series with the plain hyperbola reads S low by a tenth to a half", () => {
    // Best A0 and S of A0/(1 + S P) for equal relative errors on 200 even powers from 0 to S P_max; A0 is solved for.
    const shortfall = (top: number): number => {
      const powers = Array.from({ length: 200 }, (_, i) => (i / 199) * top);
      const data = powers.map((p) => area("gaussian-self", p, 1, 1));
      const cost = (s: number): number => {
        const ratio = powers.map((p, i) => area("separate-pump", p, 1, s) / data[i]!);
        const [one, two] = ratio.reduce(([a, b], r) => [a + r, b + r * r], [0, 0]);
        return 200 - (one * one) / two;
      };
      let best = 1;
      for (let s = 0.2; s < 1.2; s += 0.002) if (cost(s) < cost(best)) best = s;
      return 1 - best;
    };
    // Source: project notes on the physics, section 9: 13, 29, 44, 55 per cent; the weights behind them are not stated there,
    // hence the margin of 2.5 points
    const stated = [0.13, 0.29, 0.44, 0.55];
    [0.5, 2, 5, 10].forEach((top, i) => expect(Math.abs(shortfall(top) - stated[i]!)).toBeLessThan(0.025));
  });

  test("outside their domain the laws say NaN", () => {
    // Derived: 1 + S P <= 0 or 1 + 2 S P < 0
    for (const law of LAWS) expect(area(law, 1, 1, -1.5)).toBeNaN();
  });

  test("the linear-quadratic test has plain derivatives and any sign of S", () => {
    const out = new Float64Array(SATURATION.size);
    linearQuadraticLaw(2, 3, -0.1, 0.02, out);
    // Derived: 3 (1 + 0.2 + 0.08), 1.28, -6, 3 (0.08 + 0.1), 12
    expect(out[SATURATION.area]).toBeCloseTo(3.84, 14);
    expect(out[SATURATION.byArea0]).toBeCloseTo(1.28, 14);
    expect(out[SATURATION.bySaturation]).toBeCloseTo(-6, 14);
    expect(out[SATURATION.byPower]).toBeCloseTo(0.54, 14);
    expect(out[SATURATION.byCurvature]).toBeCloseTo(12, 14);
  });
});
