import { describe, expect, test } from "vitest";
import { pullOf, resultOf } from "../support/analyse-bytes.ts";
import { seriesBounds } from "../support/cramer-rao.ts";
import { makeSpectrum, spectrumFile } from "../support/make-spectrum.ts";
import { PRESET_CASES, type PresetCase } from "../support/presets.ts";

/**
 * The outside check of accuracy: synthetic files of every preset, a cold start with nothing but `material.preset`, and the
 * bound that no unbiased estimator can undercut, from a forward model that shares no code with app/.
 */
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;
const SEEDS = [1, 2, 3];

function boundsFor(one: PresetCase, energy: Float64Array, result: ReturnType<typeof resultOf>) {
  const [low, high] = result.fit!.window_eV;
  const middle = (low + high) / 2;
  const half = (high - low) / 2;
  const yellow = one.preset === "cuprous-oxide-yellow-p";
  return seriesBounds(
    energy.filter((e) => e >= low && e <= high),
    one.series,
    one.sampling.sigma,
    {
      ns: result.lines.map((line) => line.n),
      fitN: result.series!.fit_n,
      defectFree: true,
      exponentFree: !yellow,
      background: (energies) => [
        ...[0, 1, 2].map((power) => energies.map((e) => ((e - middle) / half) ** power)),
        ...(yellow ? [energies.map((e) => Math.sqrt(e - 2.0464))] : []),
      ],
    },
  );
}

describe("from a cold start, gap, Rydberg energy and defect lie at the truth with the smallest error possible for", () => {
  for (const one of PRESET_CASES) {
    test.each(SEEDS)(`${one.preset}, noise seed %i`, (seed) => {
      const spectrum = makeSpectrum(one.series, { ...one.sampling, seed });
      const bytes = spectrumFile(spectrum, one.sampling.sigma, one.heading);
      const result = resultOf(bytes, { material: { preset: one.preset } });
      expect(result.status).toBe("converged");
      const bound = boundsFor(one, spectrum.energy, result);
      for (const key of KEYS) {
        // Derived: 4 standard errors, the project's bar; by chance one number in 16,000.
        expect(Math.abs(pullOf(result.series![key], one.series[key])), key).toBeLessThan(4);
        const ratio = result.series![key].sigma! / bound[key];
        // Derived: the project's bar against the Cramer-Rao bound at the true noise.
        expect(ratio, key).toBeGreaterThan(0.95);
        expect(ratio, key).toBeLessThan(1.5);
        // Derived: what is left when the noise estimated from the data is put in place of the true one.
        const known = (ratio * one.sampling.sigma) / result.reading.noise.median_sigma!;
        expect(known, `${key}, noise apart`).toBeGreaterThan(0.98);
        expect(known, `${key}, noise apart`).toBeLessThan(1.05);
      }
    });
  }
});
