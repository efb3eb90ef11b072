import { describe, expect, it } from "vitest";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { COVERAGE_KINDS } from "../../support/coverage.ts";
import { makeSpectrum, spectrumFile } from "../../support/make-spectrum.ts";

const [plain, noisy] = COVERAGE_KINDS as unknown as [
  (typeof COVERAGE_KINDS)[number],
  (typeof COVERAGE_KINDS)[number],
];

function fitted(kind: typeof plain, choices: object, seed = 3): RunglineResult {
  const { grid, sigma } = kind.sampling;
  const bytes = spectrumFile(makeSpectrum(kind.series, { grid, sigma, seed }), sigma, kind.heading);
  const uncertainty = { systematic: false, ...(choices as { uncertainty?: object }).uncertainty };
  return resultOf(bytes, { ...kind.choices, ...choices, uncertainty });
}

const TIED = { series: { mode: "tied" }, width: { mode: "tied", exponent: "free" } };
const halves = ({ value, low, high }: { value: number | null; low: number | null; high: number | null }) =>
  [value! - low!, high! - value!] as const;

describe("profiles of the spectrum fit", () => {
  it("are the standard errors where the likelihood is a parabola, for all four parameters", () => {
    const { series, width_law } = fitted(plain, TIED);
    for (const one of [series!.gap_eV, series!.rydberg_eV, series!.defect0, width_law!.exponent]) {
      const [down, up] = halves(one);
      // Derived: at a signal to noise of hundreds the third order is a part of a standard error over the parameter
      expect(Math.abs(down / one.sigma! - 1)).toBeLessThan(0.05);
      expect(Math.abs(up / one.sigma! - 1)).toBeLessThan(0.05);
      // Not copied from the standard error.
      expect(down).not.toBe(up);
    }
  });

  it("agree with those of the law fitted to free lines, whose interval they shorten or keep", () => {
    const tied = fitted(noisy, TIED);
    const free = fitted(noisy, { width: { exponent: "free" } });
    for (const [a, b] of [
      [tied.series!.gap_eV, free.series!.gap_eV],
      [tied.series!.rydberg_eV, free.series!.rydberg_eV],
      [tied.width_law!.exponent, free.width_law!.exponent],
    ] as const) {
      // Derived: the same data and law; what ties add moves values by a part of their errors
      expect(Math.abs(a.value! - b.value!) / b.sigma!).toBeLessThan(1);
      const [down, up] = halves(a);
      const [freeDown, freeUp] = halves(b);
      expect(down + up).toBeLessThan(1.15 * (freeDown + freeUp));
    }
  });

  it("rise with the standard errors where correlated noise is allowed for", () => {
    const note = fitted(noisy, TIED);
    const allow = fitted(noisy, { ...TIED, uncertainty: { correlated: "allow" } });
    for (const [a, b] of [
      [allow.series!.gap_eV, note.series!.gap_eV],
      [allow.width_law!.exponent, note.width_law!.exponent],
    ] as const) {
      const ratio = a.sigma! / b.sigma!;
      const [down, up] = halves(a);
      const [noteDown, noteUp] = halves(b);
      // Derived: in the range of one standard error the profile's half widths go with the root of the rise
      expect(Math.abs((down + up) / (noteDown + noteUp) / ratio - 1)).toBeLessThan(0.1);
    }
  });

  it("hold the truth as a standard error does", () => {
    const results = Array.from({ length: 6 }, (_, i) => fitted(noisy, TIED, 20 + i));
    const pulls = results.flatMap(({ series, width_law }) => [
      pullOf(series!.gap_eV, noisy.series.gap_eV),
      pullOf(series!.rydberg_eV, noisy.series.rydberg_eV),
      pullOf(width_law!.exponent, noisy.series.exponent),
    ]);
    // Derived: 18 numbers of width one, four standard errors each
    expect(Math.max(...pulls.map(Math.abs))).toBeLessThan(4);
  });
});

describe("the exponent of the widths where it is held", () => {
  it("is set free as a test, with the interval of its profile", () => {
    const { width_law, protocol } = fitted(plain, { width: { exponent: 3, floor_kind: "lorentzian" } });
    expect(protocol.width.exponent).toBe(3);
    expect(width_law!.exponent.sigma).toBe(0);
    const free = width_law!.free_exponent!;
    expect(Math.abs(pullOf(free, plain.series.exponent))).toBeLessThan(4);
    const [down, up] = halves(free);
    // Derived: near a parabola
    expect(Math.abs(down / free.sigma! - 1)).toBeLessThan(0.3);
    expect(Math.abs(up / free.sigma! - 1)).toBeLessThan(0.3);
    expect(down).not.toBe(up);
  });
});
