import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { areaOf, cleanSignal, energyOf, widthOf, type SyntheticSeries } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

/**
 * Light through a slit, as a file of transmission; the mean over the slit is taken by plain sums over a fine grid, the
 * lines are those of make-spectrum.ts. What is asked: no wrong gap, Rydberg energy or defect without a doubt.
 */
const yellow = PRESET_CASES[0]!;
const clean: SyntheticSeries = { ...yellow.series, offsets_eV: {} };
const material = { preset: yellow.preset };
const fast = { uncertainty: { systematic: false, profile: false } };
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;
const DEPTH = 68e-4;
const signal = { thickness_um: 68, quantity: "transmittance" };

function slitFile(series: SyntheticSeries, fwhm: number, seed: number, sigmaT = 0.001): Uint8Array {
  const random = makeRandom(seed);
  const step = 4e-6;
  const low = 2.137;
  const count = Math.round((2.1735 - low) / step);
  const grid = Float64Array.from({ length: count }, (_, i) => low + i * step);
  const T = cleanSignal(grid, series).map((alpha) => Math.exp(-DEPTH * alpha));
  const s = fwhm / Math.sqrt(8 * Math.log(2));
  const half = Math.ceil((5 * s) / step);
  const weights = Array.from({ length: 2 * half + 1 }, (_, k) =>
    Math.exp(-0.5 * (((k - half) * step) / s) ** 2),
  );
  const total = weights.reduce((sum, one) => sum + one, 0);
  const rows: string[] = [];
  for (let i = 250; i < count - 250; i += grid[i]! < 2.16 ? 4 : 1) {
    let sum = 0;
    for (let k = -half; k <= half; k++) sum += weights[k + half]! * T[i + k]!;
    rows.push(`${grid[i]!.toFixed(8)},${(sum / total + sigmaT * random.normal()).toFixed(6)},${sigmaT}`);
  }
  return new TextEncoder().encode(["Photon energy (eV),Transmission,sigma", ...rows, ""].join("\n"));
}

function right(result: RunglineResult): boolean {
  return result.series !== null && KEYS.every((key) => Math.abs(pullOf(result.series![key], clean[key])) < 4);
}

describe("a slit on the transmitted light", () => {
  const fwhm = 120e-6;

  test.each([1, 2])("given, seed %i: series, areas and widths are right", (seed) => {
    const result = resultOf(slitFile(clean, fwhm, seed), {
      material,
      ...fast,
      signal,
      lines: { slit_fwhm_eV: fwhm },
    });
    expect(result.fit!.domain).toBe("transmittance");
    expect(right(result)).toBe(true);
    for (const line of result.lines.filter(({ n }) => n < 9)) {
      expect(Math.abs(pullOf(line.area, areaOf(clean, line.n))), `n = ${line.n}`).toBeLessThan(4);
      expect(Math.abs(pullOf(line.width_eV, widthOf(clean, line.n))), `n = ${line.n}`).toBeLessThan(4);
    }
  });

  test("given, with a width held and the widths of two lines shared: constraints hold in the light too", () => {
    const result = resultOf(slitFile(clean, fwhm, 3), {
      material,
      ...fast,
      signal,
      lines: {
        slit_fwhm_eV: fwhm,
        constraints: [
          { n: 4, parameter: "width", hold: widthOf(clean, 4) },
          { n: 5, parameter: "area", low: 0.5 * areaOf(clean, 5), high: 2 * areaOf(clean, 5) },
          { n: 6, parameter: "area", hold: areaOf(clean, 6) },
        ],
      },
      width: { mode: "tied" },
      series: { mode: "tied" },
    });
    expect(result.fit!.domain).toBe("transmittance");
    expect(right(result)).toBe(true);
    expect(result.lines.find(({ n }) => n === 4)!.width_eV.sigma).toBe(0);
    expect(result.lines.find(({ n }) => n === 6)!.area.value).toBe(areaOf(clean, 6));
    expect(Math.abs(pullOf(result.lines.find(({ n }) => n === 5)!.area, areaOf(clean, 5)))).toBeLessThan(4);
    expect(Math.abs(pullOf(result.width_law!.coefficient_eV, clean.coefficient_eV))).toBeLessThan(4);
  });

  test.each([4, 5])("not given, seed %i: the series is right, or a doubt is said", (seed) => {
    const result = resultOf(slitFile(clean, fwhm, seed), { material, ...fast, signal });
    expect(right(result) || doubtsOf(result).length > 0).toBe(true);
  });

  test("in nm, growing as E^2, it is taken off as in eV", () => {
    const result = resultOf(slitFile(clean, fwhm, 6), {
      material,
      ...fast,
      signal,
      // Derived: d lambda = hc dE/E^2 at the gap.
      lines: { slit_fwhm_nm: (fwhm * 1239.841984332) / clean.gap_eV ** 2 },
    });
    expect(result.fit!.domain).toBe("transmittance");
    expect(right(result)).toBe(true);
  });
});

describe("satellites of another series", () => {
  test.each([7, 8])("unnamed, seed %i: the series is right, or a doubt names them", (seed) => {
    const extraLines = [3, 4, 5, 6, 7].map((n) => ({
      energy_eV: energyOf({ ...clean, defect0: -0.02 }, n),
      width_eV: widthOf(clean, n),
      area: 0.05 * areaOf(clean, n),
    }));
    const result = resultOf(slitFile({ ...clean, extraLines }, 1e-6, seed), { material, ...fast, signal });
    const said = doubtsOf(result);
    expect(
      right(result) ||
        ["satellite", "misfit", "law-rejected", "low-n-off-law"].some((code) => said.includes(code)),
    ).toBe(true);
  });
});
