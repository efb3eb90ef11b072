import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { chiSquareSurvival } from "../../../app/solve/index.ts";
import { doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { makeSpectrum, spectrumFile, widthOf, type SyntheticSeries } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

const yellow = PRESET_CASES[0]!;
const clean: SyntheticSeries = { ...yellow.series, offsets_eV: {} };
const material = { preset: yellow.preset };
const fast = { uncertainty: { systematic: false, profile: false } };
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;

function fileOf(series: SyntheticSeries, seed = 3): Uint8Array {
  const { grid, sigma } = yellow.sampling;
  return spectrumFile(makeSpectrum(series, { grid, sigma, seed }), sigma, yellow.heading);
}

describe("a Lorentzian instrument", () => {
  const laser = 40e-6;
  const seen: SyntheticSeries = { ...clean, floor_eV: clean.floor_eV + laser };

  test("is taken off every width and the floor of their law; energies, areas and the gap stay", () => {
    const bytes = fileOf(seen);
    const plain = resultOf(bytes, { material, ...fast });
    const freed = resultOf(bytes, { material, ...fast, lines: { instrument_lorentz_fwhm_eV: laser } });
    expect(freed.lines.length).toBe(plain.lines.length);
    for (const line of freed.lines) {
      const other = plain.lines.find(({ n }) => n === line.n)!;
      // Derived: Lorentzians convolve to a Lorentzian of the summed width; 4 standard errors for each line.
      expect(Math.abs(pullOf(line.width_eV, widthOf(clean, line.n)))).toBeLessThan(4);
      // Derived: the same fit in another variable, to 0.05 standard errors.
      expect(Math.abs(line.width_eV.value! + laser - other.width_eV.value!)).toBeLessThan(
        0.05 * line.width_eV.sigma!,
      );
      expect(Math.abs(line.area.value! - other.area.value!)).toBeLessThan(0.05 * line.area.sigma!);
    }
    for (const key of KEYS) expect(Math.abs(pullOf(freed.series![key], clean[key]))).toBeLessThan(4);
  });
});

describe("a slit given in other units", () => {
  const slitOfLine = 60e-6;
  const bytes = fileOf(clean);
  const energy = clean.gap_eV;

  test("cm^-1: the same as the same width in eV", () => {
    const inEv = resultOf(bytes, { material, ...fast, lines: { slit_fwhm_eV: slitOfLine, domain: "alpha" } });
    const other = resultOf(bytes, {
      material,
      ...fast,
      // Source: hc = 1.239841984e-4 eV cm (CODATA 2018, exact).
      lines: { slit_fwhm_cm1: slitOfLine / 1.239841984332e-4, domain: "alpha" },
    });
    for (const key of KEYS) {
      // Derived: one conversion factor.
      expect(Math.abs(other.series![key].value! - inEv.series![key].value!)).toBeLessThan(
        1e-3 * inEv.series![key].sigma!,
      );
    }
  });

  test("nm: the same at the gap, narrower as E^2 below it, so that the lowest line comes out wider", () => {
    const inEv = resultOf(bytes, { material, ...fast, lines: { slit_fwhm_eV: 300e-6, domain: "alpha" } });
    const inNm = resultOf(bytes, {
      material,
      ...fast,
      // Derived: d lambda = hc dE/E^2.
      lines: { slit_fwhm_nm: (300e-6 * 1239.841984332) / energy ** 2, domain: "alpha" },
    });
    const width = (result: typeof inEv, n: number): number =>
      result.lines.find((line) => line.n === n)!.width_eV.value!;
    // Derived: at n = 2 the slit is (E_2/gap)^2 = 0.973 of that at the gap; taken off a width of some 2 meV it is worth
    // 0.6 s^2/G of the difference of squares (Voigt width after Olivero and Longbothum), here about 1 ueV.
    expect(width(inNm, 2) - width(inEv, 2)).toBeGreaterThan(0.5e-6);
    expect(width(inNm, 2) - width(inEv, 2)).toBeLessThan(5e-6);
    // Two slits at once are refused.
    expect(() => resultOf(bytes, { lines: { slit_fwhm_eV: 1e-4, slit_fwhm_nm: 0.01 } })).toThrow(/slit/);
  });
});

describe("an axis that jitters by 1 ueV from line to line", () => {
  const jittered = (seed: number): Uint8Array => {
    const random = makeRandom(100 + seed);
    const offsets_eV = Object.fromEntries(
      Array.from({ length: 30 }, (_, i) => [i + 2, 1e-6 * random.normal()]),
    );
    return fileOf({ ...clean, offsets_eV }, seed);
  };

  test("named in the protocol: the series is right within its errors, and chi square is as it should be", () => {
    let chi2 = 0;
    let dof = 0;
    for (const seed of [1, 2, 3]) {
      const result = resultOf(jittered(seed), { material, ...fast, axis: { jitter_eV: 1e-6 } });
      // Derived: 4 standard errors, the project's bar.
      for (const key of KEYS) expect(Math.abs(pullOf(result.series![key], clean[key]))).toBeLessThan(4);
      // Derived: no energy is known better than the axis.
      for (const line of result.lines) expect(line.energy_eV.sigma ?? 1).toBeGreaterThan(1e-6);
      chi2 += result.series!.chi2!;
      dof += result.series!.dof;
    }
    // Derived: bounds at 1e-4 of chi square.
    expect(chiSquareSurvival(chi2, dof)).toBeGreaterThan(1e-4);
    expect(chiSquareSurvival(chi2, dof)).toBeLessThan(1 - 1e-4);
  });

  test.each([1, 2, 3])("not named, seed %i: what goes wrong is said", (seed) => {
    const result = resultOf(jittered(seed), { material, ...fast });
    const right = KEYS.every((key) => Math.abs(pullOf(result.series![key], clean[key])) < 4);
    const said = ["law-rejected", "low-n-off-law"].some((code) => doubtsOf(result).includes(code));
    expect(right || said).toBe(true);
  });

  test("tied levels carry it to the law", () => {
    const choices = { material, ...fast, series: { mode: "tied" }, axis: { jitter_eV: 1e-6 } };
    const result = resultOf(fileOf(clean), choices);
    const without = resultOf(fileOf(clean), { ...choices, axis: { jitter_eV: 0 } });
    // Derived: with line errors of some 0.1 ueV the axis is most of the error of the gap.
    expect(result.series!.gap_eV.sigma!).toBeGreaterThan(2 * without.series!.gap_eV.sigma!);
  });
});
