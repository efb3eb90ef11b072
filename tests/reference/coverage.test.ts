import { describe, expect, it } from "vitest";
import { COVERAGE_KINDS, countSpectrum, tally, type Counted } from "../support/coverage.ts";

/** Spectra per kind: few, so that the whole suite stays short; tests/bench/coverage.bench.ts takes 400. */
const SPECTRA = 20;

/** Probability of at most `hits` of `trials` at chance p. */
function binomialCdf(hits: number, trials: number, p: number): number {
  let term = (1 - p) ** trials;
  let sum = term;
  for (let k = 1; k <= hits; k++) {
    term *= ((trials - k + 1) / k) * (p / (1 - p));
    sum += term;
  }
  return Math.min(1, sum);
}

describe("68.3 % intervals of small synthetic spectra", () => {
  // The first three figures of one spectrum hang together, so they are judged one by one and not pooled.
  it.each(COVERAGE_KINDS.filter((kind) => kind.name !== "noisy").map((kind) => [kind.name, kind] as const))(
    "hold the truth as often as they say (%s)",
    (_name, kind) => {
      const all: Counted[] = [];
      for (let seed = 1; seed <= SPECTRA; seed++) all.push(...countSpectrum(kind, seed).counted);
      for (const row of tally(all)) {
        if (row.figure.startsWith("line ")) continue;
        const hits = Math.round(row.share * row.count);
        // Derived: binomial distribution with p = 0.683; each tail excluded at 1e-4
        expect(binomialCdf(hits, row.count, 0.683), row.figure).toBeGreaterThan(1e-4);
        expect(1 - binomialCdf(hits - 1, row.count, 0.683), row.figure).toBeGreaterThan(1e-4);
        // Derived: the mean of N normal pulls has the error 1/sqrt(N); 3.9 of them at 1e-4, both sides
        expect(Math.abs(row.mean), row.figure).toBeLessThan(3.9 / Math.sqrt(row.count));
      }
      for (const name of ["line energies", "line widths", "line areas"]) {
        // Derived: lines of one spectrum share noise and background; two independent trials a spectrum is a safe count
        const row = tally(all).find((one) => one.figure === name)!;
        const hits = Math.round(row.share * SPECTRA * 2);
        expect(binomialCdf(hits, SPECTRA * 2, 0.683), name).toBeGreaterThan(1e-4);
        expect(1 - binomialCdf(hits - 1, SPECTRA * 2, 0.683), name).toBeGreaterThan(1e-4);
      }
    },
  );
});
