import { expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { pointJitter } from "../../../app/analysis/axis-jitter.ts";

function lineWith(jitter: number, seed: number): ReturnType<typeof pointJitter> {
  const random = makeRandom(seed);
  const energy = Float64Array.from({ length: 2000 }, (_, i) => 2 + 1e-5 * i);
  const curve = (e: number): number => 100 / (1 + ((e - 2.01) / 2e-4) ** 2);
  const fitted = energy.map(curve);
  const residuals = energy.map((e) => curve(e + jitter * random.normal()) - curve(e) + random.normal());
  return pointJitter({ energy, signal: fitted, sigma: new Float64Array(2000).fill(1) }, fitted, residuals);
}

test("jitter of the axis shows in the residuals of steep flanks, to its size, and nowhere else", () => {
  for (let seed = 1; seed <= 5; seed++) {
    const seen = lineWith(6e-6, seed)!;
    expect(seen.significance).toBeGreaterThan(4);
    // Derived: made with 6 ueV; the slope reaches 0.32 standard deviations per ueV, so that some 100 points speak
    expect(Math.abs(seen.jitter_eV / 6e-6 - 1)).toBeLessThan(0.35);
    // Derived: no jitter; four standard errors by chance once in 30,000
    expect(lineWith(0, seed)!.significance).toBeLessThan(4);
  }
});
