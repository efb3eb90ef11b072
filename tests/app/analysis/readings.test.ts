import { describe, expect, it } from "vitest";
import { doubtsOf, resultOf } from "../../support/analyse-bytes.ts";
import { coldStart, judgeColdStart } from "../../support/cold-start.ts";
import { COVERAGE_KINDS } from "../../support/coverage.ts";
import { makeSpectrum, spectrumFile } from "../../support/make-spectrum.ts";

describe("readings of n that the peaks alone get wrong", () => {
  it.each([
    [11, "n = 5 of 6 is missing"],
    [147, "n = 3 of 8 is missing"],
    [9, "a foreign line stands between n = 1 and 2"],
  ])("are put right by the fit (spectrum %i: %s)", (seed) => {
    const verdict = judgeColdStart(coldStart(seed));
    expect(verdict.outcome).toBe("right");
    expect(verdict.converged).toBe(true);
  });

  it("start from two peaks where the fit finds the third line in its place", () => {
    const one = coldStart(14);
    const verdict = judgeColdStart(one);
    expect(verdict.result.lines.map((line) => line.n)).toEqual([1, 2, 3]);
    expect(verdict.outcome).toBe("right");
  });
});

describe("the systematic part", () => {
  const kind = COVERAGE_KINDS[0]!;
  const bytes = (bend: number): Uint8Array =>
    spectrumFile(
      makeSpectrum(
        { ...kind.series, background: (e) => 100 + 400 * (e - 2.5) + bend * ((e - 2.47) / 0.03) ** 3 },
        { ...kind.sampling, seed: 1 },
      ),
      kind.sampling.sigma,
      kind.heading,
    );

  it("names a background that describes the spectrum clearly better than the one asked for", () => {
    const choices = { ...kind.choices, background: [{ term: "polynomial", order: 1 }] };
    expect(doubtsOf(resultOf(bytes(60), choices))).toContain("background-better");
    expect(doubtsOf(resultOf(bytes(0), choices))).not.toContain("background-better");
  });

  it("carries errors of the axis to the gap, and of the thickness to the areas", () => {
    const depth = new TextDecoder()
      .decode(bytes(0))
      .replace("alpha (1/cm)", "Absorbance")
      .split("\n")
      .map((row, i) => {
        if (i === 0 || row === "") return row;
        const [energy, alpha] = row.split(",");
        // A plate of 2 um: decadic absorbance.
        return `${energy},${((Number(alpha) * 2e-4) / Math.LN10).toFixed(8)}`;
      })
      .join("\n");
    const result = resultOf(new TextEncoder().encode(depth), {
      ...kind.choices,
      signal: { thickness_um: 2, thickness_sigma_um: 0.1 },
      axis: { offset_sigma_eV: 1e-4 },
    });
    // Derived: alpha = depth/d, 0.1 of 2
    expect(result.systematic!.area_relative).toBeCloseTo(0.05, 12);
    // Derived: 100 ueV in quadrature with a spread that is far smaller
    expect(result.systematic!.gap_eV!).toBeGreaterThanOrEqual(1e-4);
    expect(result.systematic!.gap_eV!).toBeLessThan(1.1e-4);
  });
});
