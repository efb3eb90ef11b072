import { expect, test } from "vitest";
import { applySlit, makeSlitGrid } from "../../app/fit/index.ts";

/**
 * A slit on transmitted light against the figure that spectrophotometry gives for it: peak absorbance of a Gaussian band
 * read through a slit, in terms of spectral over natural bandwidth (both full widths at half maximum). The tables of
 * Ramsay, J. Am. Chem. Soc. 74, 72 (1952), for Lorentzian bands could not be read; beside the figure stands its exact form.
 */
const BAND = 0.01;

/** Peak absorbance read over the true one. */
function peakReading(absorbance: number, ratio: number): number {
  const energy = Float64Array.from({ length: 801 }, (_, i) => 2 + (i - 400) * (BAND / 100));
  const std = (ratio * BAND) / Math.sqrt(8 * Math.LN2);
  const grid = makeSlitGrid(energy, std, [{ energy: 2, width: BAND / 2 }]);
  const light = grid.nodes.map((e) => 10 ** (-absorbance * 2 ** (-4 * ((e - 2) / BAND) ** 2)));
  const out = new Float64Array(energy.length);
  applySlit(grid, light, 0, out, 0);
  return -Math.log10(out[400]!) / absorbance;
}

test("a slit of a tenth of a Gaussian band reads its peak absorbance to 99.5 per cent or better", () => {
  // Source: "What is spectral bandwidth?", knowledge.cphnano.com (read): SBW/NBW of 0.1 or less, accuracy 99.5 % or better.
  const published = 0.995;
  for (const ratio of [0.1, 0.05, 0.02]) {
    for (const absorbance of [0.02, 0.1])
      expect(peakReading(absorbance, ratio), `${ratio}`).toBeGreaterThan(published - 5e-5);
  }
  // Derived: for a thin band both widths add in quadrature and the height falls by 1/sqrt(1 + ratio^2).
  for (const ratio of [0.1, 0.5, 1])
    expect(peakReading(1e-4, ratio)).toBeCloseTo(1 / Math.hypot(1, ratio), 4);
});

test("stronger bands lose more of their peak absorbance, as every account of the slit has it", () => {
  // Derived: light leaks in from the flanks: at absorbance A the mean of 10^-A(E) over the slit is above 10^-(mean of A).
  const readings = [0.1, 0.5, 1, 2].map((absorbance) => peakReading(absorbance, 0.5));
  for (let i = 1; i < readings.length; i++) expect(readings[i]!).toBeLessThan(readings[i - 1]!);
});
