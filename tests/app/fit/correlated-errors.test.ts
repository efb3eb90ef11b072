import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { fitSpectrum, withCorrelatedErrors, type ModelSpec } from "../../../app/fit/index.ts";

const ENERGY = Float64Array.from({ length: 1500 }, (_, i) => 1.9985 + 4e-6 * i);
const SPEC: ModelSpec = {
  ns: [3],
  gaussStd: 0,
  asymmetry: "shared",
  tiedLevels: null,
  tail: null,
  background: [{ term: "polynomial", name: "b0", unit: "1/cm", values: new Float64Array(1500).fill(1) }],
};
const START = {
  lines: [{ n: 3, energy: 2.0015, width: 2e-4 }],
  asymmetry: 0.1,
  factor: 1,
  reach: new Map([[3, 1e-3]]),
};

function pulls(rho: number, spectra: number, allow: boolean): number[] {
  const out: number[] = [];
  for (let seed = 1; seed <= spectra; seed++) {
    const random = makeRandom(seed);
    let last = random.normal();
    const signal = ENERGY.map((e) => {
      last = rho * last + Math.sqrt(1 - rho * rho) * random.normal();
      const x = e - 2.0015;
      // Area 0.02, width 200 ueV, q = 0.1.
      return ((0.02 / Math.PI) * (1e-4 + 0.2 * x)) / (x * x + 1e-8) + 10 + last;
    });
    const plain = fitSpectrum({ energy: ENERGY, signal, sigma: new Float64Array(1500).fill(1) }, SPEC, START);
    const fit = allow ? withCorrelatedErrors(plain) : plain;
    const { energy, width, area, covariance: c } = fit.lines;
    out.push(
      (energy[0]! - 2.0015) / Math.sqrt(c[0]!),
      (width[0]! - 2e-4) / Math.sqrt(c[5]!),
      (area[0]! - 0.02) / Math.sqrt(c[10]!),
    );
  }
  return out;
}

const spread = (values: readonly number[]): number =>
  Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length);

describe("errors under correlated noise", () => {
  it("have pulls of width one where the correlation is allowed for, and twice that where it is not", () => {
    // Derived: with rho = 0.6, 1 + 2 sum rho^k = 4; a line 50 points wide sees nearly all of it, so the factor is 2
    expect(spread(pulls(0.6, 150, false))).toBeGreaterThan(1.6);
    // Derived: 450 pulls, 1 +- 0.04 by chance; Bartlett's weights and the estimate lose up to a tenth
    expect(Math.abs(spread(pulls(0.6, 150, true)) - 1)).toBeLessThan(0.18);
  });

  it("are about the plain ones where the noise is white", () => {
    // Derived: 450 pulls of width one, 1 +- 0.04 by chance, and the error of the estimated correlation
    expect(Math.abs(spread(pulls(0, 150, true)) - 1)).toBeLessThan(0.15);
  });
});
