import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { noiseCorrelation } from "../../../app/spectrum/correlated-noise.ts";
import { cleanSignal } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

/** A yellow series as T of a thin crystal, without noise. */
function transmission(points: number): { x: Float64Array; T: Float64Array } {
  const { series } = PRESET_CASES[0]!;
  const x = Float64Array.from({ length: points }, (_, i) => 2.14 + (0.033 * i) / (points - 1));
  return { x, T: cleanSignal(x, series).map((alpha) => Math.exp(-34e-4 * alpha)) };
}

function whiteNoiseOf(points: number, sigma: number, seed: number): Float64Array {
  const random = makeRandom(seed);
  return Float64Array.from({ length: points }, () => sigma * random.normal());
}

function runningMean(y: Float64Array, size: number): Float64Array {
  const half = size >> 1;
  return y.map((_, i) => {
    let sum = 0;
    for (let k = -half; k <= half; k++) sum += y[Math.min(y.length - 1, Math.max(0, i + k))]!;
    return sum / size;
  });
}

const SIGMA = 0.003;

describe("whether neighbours share their noise", () => {
  it.each([8000, 3000, 1200])("white noise on %i points with lines is independent", (points) => {
    const { x, T } = transmission(points);
    for (let seed = 1; seed <= 6; seed++) {
      const noise = whiteNoiseOf(points, SIGMA, seed);
      const y = T.map((value, i) => value + noise[i]!);
      // Derived: made independent
      expect(noiseCorrelation(x, y, new Float64Array(points).fill(SIGMA))).toEqual({ scale: 1, length: 1 });
    }
  });

  it.each([3, 5, 11])("the mean of %i neighbours is seen, with its scatter", (size) => {
    const { x, T } = transmission(8000);
    const noise = whiteNoiseOf(8000, SIGMA, 10 + size);
    const y = runningMean(
      T.map((value, i) => value + noise[i]!),
      size,
    );
    const { scale, length } = noiseCorrelation(x, y, new Float64Array(8000).fill(1));
    // Derived: the mean of k independent readings scatters by sigma/sqrt(k); k of them count as one
    expect(scale / (SIGMA / Math.sqrt(size))).toBeGreaterThan(0.75);
    expect(scale / (SIGMA / Math.sqrt(size))).toBeLessThan(1.35);
    // Derived: the length is known to a factor of two and a little
    expect(length).toBeGreaterThan(size / 2.5);
    expect(length).toBeLessThan(size * 2.5);
  });

  it("says one spectrum's noise whatever sigma is handed in", () => {
    const { x, T } = transmission(8000);
    const noise = whiteNoiseOf(8000, SIGMA, 3);
    const y = runningMean(
      T.map((value, i) => value + noise[i]!),
      5,
    );
    const one = noiseCorrelation(x, y, new Float64Array(8000).fill(1));
    const other = noiseCorrelation(x, y, new Float64Array(8000).fill(1e-3));
    // Derived: invariance to scale
    expect(other.scale / one.scale).toBeCloseTo(1000, 6);
    expect(other.length).toBeCloseTo(one.length, 9);
  });
});
