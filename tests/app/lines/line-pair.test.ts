import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  GAUSS_FWHM,
  faddeeva,
  faddeevaDerivative,
  linePair,
  linePairByGaussStd,
  linePairWithDerivatives,
  voigt,
  voigtFwhm,
  voigtFwhmApproximation,
} from "../../../app/lines/index.ts";
import { derivative } from "./differences.ts";

function pair(energy: number, center: number, width: number, gaussStd: number): [number, number] {
  const a = new Float64Array(1);
  const d = new Float64Array(1);
  linePair(Float64Array.of(energy), 0, 1, center, width, gaussStd, a, d);
  return [a[0]!, d[0]!];
}

function all(energy: number, center: number, width: number, gaussStd: number): number[] {
  const out = Array.from({ length: 8 }, () => new Float64Array(1));
  const e = Float64Array.of(energy);
  linePairWithDerivatives(
    e,
    0,
    1,
    center,
    width,
    gaussStd,
    out[0]!,
    out[1]!,
    out[2]!,
    out[3]!,
    out[4]!,
    out[5]!,
  );
  if (gaussStd > 0) linePairByGaussStd(e, 0, 1, center, width, gaussStd, out[6]!, out[7]!);
  return out.map((column) => column[0]!);
}

/** Distance from the line, width and instrument width, all log-spread around one unit. */
const settings = fc.record({
  distance: fc.double({ min: -3, max: 3, noNaN: true }),
  sign: fc.constantFrom(-1, 1),
  width: fc.double({ min: -2, max: 2, noNaN: true }),
  gauss: fc.double({ min: -2, max: 1, noNaN: true }),
});

describe("line pair", () => {
  test("without an instrument it is the Lorentzian and its partner", () => {
    // Derived: g = 1, E - E0 = 2: (1/pi) 1/5 and (1/pi) 2/5
    expect(pair(5, 3, 2, 0)[0]).toBeCloseTo(1 / (5 * Math.PI), 15);
    expect(pair(5, 3, 2, 0)[1]).toBeCloseTo(2 / (5 * Math.PI), 15);
  });

  test("a window writes its own places only and leaves the others alone", () => {
    const energies = Float64Array.from({ length: 6 }, (_, i) => i);
    const absorptive = new Float64Array(12).fill(7);
    const dispersive = new Float64Array(12).fill(7);
    linePair(energies, 2, 4, 3, 1, 0.2, absorptive, dispersive, 6);
    // Derived: offset 6 and indices 2 and 3
    expect([...absorptive].flatMap((value, i) => (value === 7 ? [] : [i]))).toEqual([8, 9]);
    expect([...dispersive].flatMap((value, i) => (value === 7 ? [] : [i]))).toEqual([8, 9]);
  });

  test.each([0, 0.3, 3])("the absorptive part has unit area with an instrument of std %f", (gaussStd) => {
    // E = tan-like map t -> sinh, so that the wings are integrated to 1e7 widths; the rest is (2/pi) g/1e7.
    const n = 40000;
    let area = 0;
    const limit = Math.asinh(1e7);
    const step = (2 * limit) / n;
    for (let i = 0; i <= n; i++) {
      const t = -limit + i * step;
      area += pair(Math.sinh(t), 0, 1, gaussStd)[0] * Math.cosh(t) * step;
    }
    // Derived: unit area, less the wings beyond 1e7
    expect(area).toBeCloseTo(1 - 1 / (Math.PI * 1e7), 8);
  });

  test("both parts equal a brute-force convolution of the Lorentzian pair with a Gaussian", () => {
    for (const [width, gaussStd] of [
      [1, 0.4],
      [0.5, 1],
      [2, 0.1],
    ] as const) {
      for (const energy of [-6, -1.3, 0, 0.2, 2.5, 9]) {
        // The trapezoidal rule converges exponentially here; step s/200 leaves exp(-2 pi g/step) at most.
        const step = Math.min(gaussStd, width) / 60;
        let a = 0;
        let d = 0;
        for (let t = -Math.ceil((9 * gaussStd) / step); t * step <= 9 * gaussStd; t++) {
          const u = t * step;
          const gauss = Math.exp(-(u * u) / (2 * gaussStd * gaussStd)) / (gaussStd * Math.sqrt(2 * Math.PI));
          const lorentz = pair(energy - u, 0, width, 0);
          a += lorentz[0] * gauss * step;
          d += lorentz[1] * gauss * step;
        }
        const [absorptive, dispersive] = pair(energy, 0, width, gaussStd);
        // Derived: convolution by direct summation
        expect(Math.abs(absorptive - a)).toBeLessThan(1e-13);
        expect(Math.abs(dispersive - d)).toBeLessThan(1e-13);
      }
    }
  });

  test("a vanishing instrument goes over into the bare line without a step", () => {
    for (const energy of [-30, -0.2, 0, 0.7, 4]) {
      const bare = pair(energy, 0, 1, 0);
      const thin = pair(energy, 0, 1, 1e-8);
      // Derived: relative change of order (s/g)^2 = 4e-16
      expect(Math.abs(thin[0] / bare[0] - 1)).toBeLessThan(5e-15);
      expect(Math.abs(thin[1] - bare[1])).toBeLessThanOrEqual(5e-15 * Math.abs(bare[1]));
    }
  });

  test("a line of no width is the Gaussian of the instrument", () => {
    // Derived: Gaussian of std 2 at 3
    expect(pair(3, 0, 0, 2)[0]).toBeCloseTo(Math.exp(-9 / 8) / (2 * Math.sqrt(2 * Math.PI)), 15);
  });

  test("derivatives by energy, width and instrument agree with differences everywhere", () => {
    fc.assert(
      fc.property(settings, ({ distance, sign, width, gauss }) => {
        const [e, g, s] = [sign * 10 ** distance, 10 ** width, 10 ** gauss];
        const values = all(e, 0, g, s);
        const bare = all(e, 0, g, 0);
        const size = Math.hypot(e, g / 2, s);
        // Each derivative is compared on the scale value/(distance in the complex plane).
        const check = (analytic: number, f: (x: number) => number, at: number, bend: number): void => {
          const scale = Math.max(Math.abs(f(at)), 1e-3 * Math.hypot(values[0]!, values[1]!)) / bend;
          const error = Math.abs(analytic - derivative(f, at, bend / 100)) / scale;
          expect(error).toBeLessThan(2e-10);
        };
        const bend = Math.max(Math.hypot(g / 2, s), Math.abs(e) / 8);
        for (const part of [0, 1] as const) {
          check(values[2 + 2 * part]!, (x) => pair(e, x, g, s)[part], 0, bend);
          check(values[3 + 2 * part]!, (x) => pair(e, 0, x, s)[part], g, Math.min(g, size));
          check(values[6 + part]!, (x) => pair(e, 0, g, x)[part], s, Math.min(s, size));
          const bareBend = Math.max(g / 2, Math.abs(e) / 4);
          check(bare[2 + 2 * part]!, (x) => pair(e, x, g, 0)[part], 0, bareBend / 2);
          check(bare[3 + 2 * part]!, (x) => pair(e, 0, x, 0)[part], g, g / 2);
        }
      }),
      { seed: 11, numRuns: 1000 },
    );
  });

  test("wings written out in the loops equal the complex error function and its derivative", () => {
    const w = new Float64Array(2);
    for (const g of [0, 1e-3, 0.5, 30, 4000]) {
      for (let k = -20; k <= 60; k++) {
        const x = (k % 2 === 0 ? 1 : -1) * 10 ** (k / 10);
        faddeeva(x, g, w);
        const [re, im] = [w[0]!, w[1]!];
        faddeevaDerivative(x, g, re, im, w);
        // Derived: with s = 1/sqrt(2) z is x + i g, and L = Re w/sqrt(pi), dL/dE0 = -Re w'/sqrt(pi) and so on
        const root = Math.sqrt(Math.PI);
        const expected = [re, im, -w[0]!, -w[1]! / 2, -w[1]!, w[0]! / 2].map((v) => v / root);
        const found = all(x, 0, 2 * g, Math.SQRT1_2);
        const slope = Math.hypot(w[0]!, w[1]!) / root;
        expected.forEach((v, j) => {
          const scale = j < 2 ? Math.abs(v) : slope;
          expect(Math.abs(found[j]! - v)).toBeLessThanOrEqual((j < 2 ? 4e-15 : 1e-13) * scale);
        });
      }
    }
  });

  test("values from both kernels are the same to the last bit", () => {
    for (const s of [0, 0.3]) {
      for (const e of [0, 0.4, 3, 50]) {
        // Derived: same formula
        expect(
          all(e, 0, 1, s)
            .slice(0, 2)
            .map((v) => v.toPrecision(15)),
        ).toEqual(pair(e, 0, 1, s).map((v) => v.toPrecision(15)));
      }
    }
  });

  test("derivatives obey the Cauchy-Riemann relations and the far field its power laws", () => {
    const [, , aE, aG, dE, dG] = all(1e5, 0, 1, 2);
    // Derived: dL/dG = (1/2) dD/dE0, dD/dG = -(1/2) dL/dE0
    expect(aG! / (dE! / 2)).toBeCloseTo(1, 14);
    expect(dG! / (-aE! / 2)).toBeCloseTo(1, 14);
    // Derived: L -> g/(pi e^2) [1 + O(s^2/e^2)], so dL/dE0 -> 2 g/(pi e^3) and dD/dE0 -> 1/(pi e^2)
    expect(aE! * Math.PI * 1e15).toBeCloseTo(1, 8);
    expect(dE! * Math.PI * 1e10).toBeCloseTo(1, 8);
  });
});

describe("width of a Voigt profile", () => {
  test("half the peak is reached at half the width", () => {
    fc.assert(
      fc.property(fc.double({ min: -3, max: 3, noNaN: true }), (ratio) => {
        const g = 10 ** ratio;
        const half = voigt(voigtFwhm(1, g) / 2, 1, g);
        // Derived: definition of the full width at half maximum
        expect(Math.abs((2 * half) / voigt(0, 1, g) - 1)).toBeLessThan(1e-13);
      }),
      { seed: 5, numRuns: 200 },
    );
  });
  test("limits are the Gaussian and the Lorentzian width", () => {
    // Derived: 2 sqrt(2 ln 2) s and 2 g
    expect(voigtFwhm(1, 0)).toBeCloseTo(GAUSS_FWHM, 14);
    expect(voigtFwhm(0, 1)).toBe(2);
    expect(voigtFwhm(1e-6, 1)).toBeCloseTo(2, 11);
  });
  test("the approximation of Olivero and Longbothum is within 0.025 percent", () => {
    for (let k = -30; k <= 30; k++) {
      const g = 10 ** (k / 10);
      // Source: Olivero and Longbothum, JQSRT 17, 233 (1977): 0.02 per cent (from memory)
      expect(Math.abs(voigtFwhmApproximation(GAUSS_FWHM, 2 * g) / voigtFwhm(1, g) - 1)).toBeLessThan(2.5e-4);
    }
  });
});
