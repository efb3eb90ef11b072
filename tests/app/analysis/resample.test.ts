import { describe, expect, it } from "vitest";
import { analyse, drawSpectra, withResampling } from "../../../app/analysis/index.ts";
import { Cancelled, makeRandom, type Watch } from "../../../app/base/index.ts";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { readFile } from "../../../app/tasks/index.ts";
import { analyseBytes, resultOf, SILENT } from "../../support/analyse-bytes.ts";
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

  it("are the same drawn in slices, in any order", () => {
    const read = readFile({
      file: "test.csv",
      bytes,
      choices: choices({ resample: "parametric", resamples: 12, seed: 4 }),
    });
    if (!read.ok) throw new Error("unreadable");
    const { spectrum, protocol } = read.value;
    const whole = analyse(spectrum, protocol, SILENT);
    const later = analyse(spectrum, protocol, SILENT, { resampling: "later" });
    const plan = structuredClone(later.resampling!);
    const last = drawSpectra(plan, 5, 12, SILENT);
    const draws = [...drawSpectra(plan, 0, 5, SILENT), ...last];
    expect(withResampling(later.result, plan, draws)).toEqual(whole.result);
    expect(whole.resampling).toBe(null);
  });

  it("have the correlation of the residuals where the protocol allows for it", () => {
    const random = makeRandom(17);
    const made = makeSpectrum(kind.series, { ...kind.sampling, seed: 3 });
    let last = random.normal();
    const signal = made.clean.map((value) => {
      last = 0.7 * last + Math.sqrt(1 - 0.49) * random.normal();
      return value + kind.sampling.sigma * last;
    });
    const file = spectrumFile({ ...made, signal }, kind.sampling.sigma, kind.heading);
    const run = (correlated: string): RunglineResult =>
      resultOf(file, {
        ...choices({ resample: "parametric", correlated }),
        noise: { sigma: kind.sampling.sigma },
      });
    const allowed = run("allow");
    const white = run("note");
    expect(white.resampled!.autoregression).toBe(undefined);
    // Derived: the sequence was made with 0.7; 1,200 points give it with an error of 0.02, the fit takes a little
    expect(Math.abs(allowed.resampled!.autoregression![0]! - 0.7)).toBeLessThan(0.12);
    const half = ({ low, high }: { low: number | null; high: number | null }): number => (high! - low!) / 2;
    // Derived: noise of this correlation widens errors of lines many points wide by sqrt((1 + 0.7)/(1 - 0.7)) = 2.4
    const wider = half(allowed.resampled!.gap_eV) / half(white.resampled!.gap_eV);
    expect(wider).toBeGreaterThan(1.5);
    expect(wider).toBeLessThan(3.2);
    for (const name of ["gap_eV", "rydberg_eV"] as const) {
      const ratio = half(allowed.resampled![name]) / allowed.series![name].sigma!;
      // Derived: 80 draws know their interval to 13 %, four of it; both estimates of the correlation to a tenth
      expect(Math.abs(ratio - 1)).toBeLessThan(0.6);
    }
  });

  it("keep the ties of the fit", () => {
    const tied = resultOf(bytes, {
      ...choices({ resample: "parametric", resamples: 60 }),
      width: { mode: "tied" },
    });
    const { width_exponent: drawn, lines, failed } = tied.resampled!;
    expect(failed).toBeLessThan(6);
    // Derived: 60 draws know their interval to 16 %; four of it
    expect(Math.abs((drawn.high! - drawn.low!) / (2 * tied.width_law!.exponent.sigma!) - 1)).toBeLessThan(
      0.64,
    );
    const widths = lines.map(({ width_eV: w }) => (w.high! - w.low!) / 2);
    tied.lines.forEach((line, j) => {
      // Derived: as above, for every line
      if (line.width_eV.sigma! > 0) expect(Math.abs(widths[j]! / line.width_eV.sigma! - 1)).toBeLessThan(0.7);
    });
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
