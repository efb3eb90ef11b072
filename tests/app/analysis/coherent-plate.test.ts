import { describe, expect, test } from "vitest";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { amplitude, plateBytes, type CoherentPlate } from "../../support/coherent-plate.ts";
import { areaOf, cleanSignal, energyOf, widthOf } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

/** Light by characteristic matrices through a crystal of 34 um whose lines have their own index: peak depth 0.6 to 1. */
const yellow = PRESET_CASES[0]!;
const series = { ...yellow.series, offsets_eV: {} };
const plate: CoherentPlate = { series, strength: 1, index: 2.95, thickness_cm: 34e-4 };
const energies = yellow.sampling.grid.flatMap(([from, to, count]) =>
  Array.from({ length: count }, (_, j) => from + ((j + 0.5) * (to - from)) / count),
);
// Derived: hc/(2 n d), 1.2398e-4 eV cm over 2 x 2.95 x 34e-4 cm.
const period_eV = 0.00618;
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;

const fit = (one: CoherentPlate, phase: "auto" | "lines" | "constant", seed: number): RunglineResult =>
  resultOf(plateBytes(one, energies, 0.002, seed), {
    material: { preset: yellow.preset },
    uncertainty: { systematic: false, profile: false },
    signal: { thickness_um: 34, quantity: "transmittance", surface: { model: "single", index: 2.95 } },
    background: [
      { term: "polynomial", order: 2 },
      { term: "square-root", onset_eV: 2.0464 },
      { term: "fringes", period_eV, phase },
    ],
  });

const pulls = (result: RunglineResult): number[] =>
  KEYS.map((key) => Math.abs(pullOf(result.series![key], series[key])));

/** Energies, widths and areas of n = 2 to 8 in standard errors. */
const linePulls = (result: RunglineResult): number[] =>
  result.lines
    .filter((line) => line.n <= 8)
    .flatMap((line) => [
      Math.abs(pullOf(line.energy_eV, energyOf(series, line.n))),
      Math.abs(pullOf(line.width_eV, widthOf(series, line.n))),
      Math.abs(pullOf(line.area, areaOf(series, line.n))),
    ]);

describe("fringes under strong lines", () => {
  test("the plate's own absorption is that of the other generator of spectra", () => {
    const some = Float64Array.from([2.14, 2.1613, 2.168, 2.1712, 2.1725]);
    const alpha = cleanSignal(some, series);
    some.forEach((e, i) => {
      const own = amplitude(plate, e)[1] + series.background(e);
      // Derived: they differ in how the continuum is cut in slices, a few 1e-4 of it.
      expect(Math.abs(own / alpha[i]! - 1)).toBeLessThan(2e-3);
    });
  });

  test("lines turn the phase: energies, widths, areas and the series come out", () => {
    const result = fit(plate, "auto", 1);
    expect(result.fit!.domain).toBe("transmittance");
    // Derived: 4 standard errors, the project's bar.
    for (const pull of [...pulls(result), ...linePulls(result)]) expect(pull).toBeLessThan(4);
    expect(doubtsOf(result)).not.toContain("misfit");
    expect(doubtsOf(result)).not.toContain("low-n-coherent");
    expect(result.notes.find(({ code }) => code === "fringes-fitted")!.text).toContain("index of the lines");
  });

  test("a constant index puts lines off by as much of their width as the note says, and is no silent answer", () => {
    const result = fit(plate, "constant", 1);
    const off = result.lines
      .filter((line) => line.n <= 8)
      .map((line) => Math.abs(line.energy_eV.value! - energyOf(series, line.n)) / widthOf(series, line.n));
    const said = Number(
      /off by ([\d.]+) of its width/.exec(
        result.notes.find(({ code }) => code === "low-n-coherent")!.text,
      )![1],
    );
    // Derived: q = (a/2) sin phi over the lines of a window of several periods, and 0.95 q of the width.
    expect(Math.max(...off)).toBeGreaterThan(0.4 * said);
    expect(Math.max(...off)).toBeLessThan(1.2 * said);
    expect(doubtsOf(result)).toEqual(expect.arrayContaining(["misfit", "low-n-coherent"]));
  });

  test("an index that does not know of the lines is found out", () => {
    const result = fit({ ...plate, dispersion: 0 }, "auto", 2);
    for (const pull of [...pulls(result), ...linePulls(result)]) expect(pull).toBeLessThan(4);
    expect(doubtsOf(result)).toContain("low-n-coherent");
    expect(doubtsOf(result)).not.toContain("misfit");
  });
});
