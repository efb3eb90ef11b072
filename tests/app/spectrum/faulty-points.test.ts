import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { faultyPoints } from "../../../app/spectrum/faulty-points.ts";
import { smoothCurve } from "../../../app/spectrum/smooth-curve.ts";
import { cleanSignal } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

const NOTHING = { spikes: [], dead: [], clipped: null };

function judge(y: Float64Array, sigma: number, absorbs: 1 | -1): ReturnType<typeof faultyPoints> {
  const x = Float64Array.from(y, (_, i) => 2 + 1e-5 * i);
  const all = new Float64Array(y.length).fill(sigma);
  return faultyPoints(x, y, all, smoothCurve(y, all), absorbs);
}

describe("points that no light made", () => {
  it.each([1, 1.5, 2, 3])("are none in lines %s sampling steps wide, at any place on the grid", (width) => {
    for (let seed = 1; seed <= 10; seed++) {
      const random = makeRandom(seed);
      const centres = Array.from({ length: 40 }, (_, k) => 25 * (k + 1) + random.uniform());
      const heights = centres.map((_, k) => 10 * 1.2 ** (k % 20));
      const y = Float64Array.from({ length: 1050 }, (_, i) => {
        let sum = random.normal();
        centres.forEach((centre, k) => (sum += heights[k]! / (1 + ((2 * (i - centre)) / width) ** 2)));
        return sum;
      });
      // Derived: a Lorentz line leaves 1/(1 + 4/w^2) of its height in each neighbour, 0.2 at w = 1
      expect(judge(y, 1, 1)).toEqual(NOTHING);
      expect(
        judge(
          y.map((one) => -one),
          1,
          -1,
        ),
      ).toEqual(NOTHING);
    }
  });

  it("are none in a series that runs together with a few points a line, nor in noise", () => {
    const { series } = PRESET_CASES[0]!;
    for (const points of [300, 1000, 4000])
      for (let seed = 1; seed <= 5; seed++) {
        const random = makeRandom(seed);
        const x = Float64Array.from({ length: points }, (_, i) => 2.14 + (0.033 * i) / points);
        const T = cleanSignal(x, { ...series, floor_eV: 1e-6 }).map(
          (alpha) => Math.exp(-34e-4 * alpha) + 0.001 * random.normal(),
        );
        const sigma = new Float64Array(points).fill(0.001);
        expect(faultyPoints(x, T, sigma, smoothCurve(T, sigma), -1)).toEqual(NOTHING);
      }
  });

  it("are found where neighbours keep to the curve, two close together too", () => {
    const random = makeRandom(7);
    const y = Float64Array.from({ length: 2000 }, (_, i) => Math.sin(i / 300) * 50 + random.normal());
    const at = [300, 303, 700, 1100, 1101, 1500];
    const by = [25, 40, -12, -30, -28, 300];
    at.forEach((i, k) => (y[i]! += by[k]!));
    // Derived: placed there, beyond 15 standard deviations towards absorption and 8 away from it
    expect(judge(y, 1, 1).spikes).toEqual(at);
  });

  it("are not taken from coarse digits, where neighbours are equal by rounding", () => {
    for (const step of [0.3, 1, 3]) {
      const random = makeRandom(8);
      const y = Float64Array.from(
        { length: 5000 },
        (_, i) => Math.round((Math.sin(i / 900) * 20 + random.normal()) / step) * step,
      );
      expect(judge(y, Math.hypot(1, step / Math.sqrt(12)), 1)).toEqual(NOTHING);
    }
  });
});
