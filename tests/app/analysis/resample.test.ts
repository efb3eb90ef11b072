import { describe, expect, it } from "vitest";
import { Cancelled, type Watch } from "../../../app/base/index.ts";
import { analyseBytes, resultOf } from "../../support/analyse-bytes.ts";
import { COVERAGE_KINDS } from "../../support/coverage.ts";
import { makeSpectrum, spectrumFile } from "../../support/make-spectrum.ts";

const kind = COVERAGE_KINDS[1]!;
const bytes = spectrumFile(
  makeSpectrum(kind.series, { ...kind.sampling, seed: 3 }),
  kind.sampling.sigma,
  kind.heading,
);
const choices = (uncertainty: object): object => ({
  ...kind.choices,
  uncertainty: { systematic: false, profile: false, resamples: 80, ...uncertainty },
});

describe("resampled spectra", () => {
  it.each(["parametric", "residual"] as const)(
    "give the standard errors of a clean spectrum (%s)",
    (resample) => {
      const result = resultOf(bytes, choices({ resample }));
      const { resampled, series } = result;
      expect(resampled!.count).toBe(80);
      expect(resampled!.failed).toBeLessThanOrEqual(4);
      for (const name of ["gap_eV", "rydberg_eV", "defect0"] as const) {
        const { low, high, median } = resampled![name];
        const sigma = series![name].sigma!;
        // Derived: half the interval of 80 draws has an error of about 1.2/sqrt(80) = 13 %; four of them
        expect(Math.abs((high! - low!) / (2 * sigma) - 1)).toBeLessThan(0.54);
        // Derived: the median of 80 draws has an error of 1.25/sqrt(80) = 0.14 sigma; four of them
        expect(Math.abs(median! - series![name].value!) / sigma).toBeLessThan(0.54);
      }
    },
  );

  it("are the same for the same seed and others for another", () => {
    const run = (seed: number): unknown =>
      resultOf(bytes, choices({ resample: "parametric", resamples: 10, seed })).resampled;
    expect(run(5)).toEqual(run(5));
    expect(run(5)).not.toEqual(run(6));
  });

  it("tell how far they are and stop when asked", () => {
    let told = 0;
    const watch: Watch = {
      report: (_, step) => (told += step.startsWith("drawing spectra anew") ? 1 : 0),
      cancelled: () => told > 4,
      seconds: () => 0,
    };
    expect(() => analyseBytes(bytes, choices({ resample: "residual" }), watch)).toThrow(Cancelled);
    expect(told).toBe(5);
  });
});
