import { describe, expect, it } from "vitest";
import {
  airRefractivity,
  airRefractivityDerivative,
  densityFactor,
  energiesFromReadings,
  energyFromReading,
  energySigma,
  energySlope,
  lightScale,
  readingFromEnergy,
  refractionOfAir,
  STANDARD_AIR,
  type LightUnit,
  type Medium,
} from "../../../app/units/index.ts";

const UNITS: readonly LightUnit[] = ["eV", "meV", "nm", "Angstrom", "um", "cm-1", "THz"];
const MEDIA: readonly Medium[] = ["vacuum", "air"];
const both = UNITS.flatMap((unit) => MEDIA.map((medium) => ({ unit, medium })));

describe("light axis", () => {
  it("knows one energy in every unit", () => {
    const E = 2.17;
    const vacuum = (unit: LightUnit): number =>
      readingFromEnergy(E, lightScale(unit, "vacuum", STANDARD_AIR));
    // Derived: hc/E with hc = 1239.8419843320026 eV nm
    expect(vacuum("nm")).toBeCloseTo(571.355753148388, 9);
    // Derived: as above, 10 Angstrom in 1 nm
    expect(vacuum("Angstrom")).toBeCloseTo(5713.55753148388, 8);
    // Derived: as above
    expect(vacuum("um")).toBeCloseTo(0.571355753148388, 12);
    // Source: fixtures/reference/constants.csv, 1 eV = 8065.5439373492116 cm^-1
    expect(vacuum("cm-1")).toBeCloseTo(2.17 * 8065.543937349212, 8);
    // Source: fixtures/reference/constants.csv, 1 eV = 241798924208491.8 Hz
    expect(vacuum("THz")).toBeCloseTo(2.17 * 241.7989242084918, 9);
    // Derived: 1000 meV in 1 eV
    expect(vacuum("meV")).toBeCloseTo(2170, 9);
    expect(vacuum("eV")).toBe(2.17);
  });

  it.each(both)("$unit in $medium there and back gives the same reading", ({ unit, medium }) => {
    const scale = lightScale(unit, medium, STANDARD_AIR);
    for (const E of [0.5, 1.5, 2.17, 3.4, 5]) {
      const back = energyFromReading(readingFromEnergy(E, scale), scale);
      // Derived: identity
      expect(Math.abs(back / E - 1)).toBeLessThan(1e-15);
    }
  });

  it.each(both)("$unit in $medium has the slope of its differences", ({ unit, medium }) => {
    const scale = lightScale(unit, medium, STANDARD_AIR);
    const x = readingFromEnergy(2.17, scale);
    const step = x * 1e-5;
    const numeric = (energyFromReading(x + step, scale) - energyFromReading(x - step, scale)) / (2 * step);
    // Derived: central difference
    expect(Math.abs(energySlope(x, scale) / numeric - 1)).toBeLessThan(1e-8);
    // Derived: sigma_E = |dE/dx| sigma_x
    expect(energySigma(x, 0.01, scale)).toBeCloseTo(0.01 * Math.abs(energySlope(x, scale)), 15);
    // Derived: Jacobian |dx/dE|
    expect(densityFactor(x, scale) * Math.abs(energySlope(x, scale))).toBeCloseTo(1, 14);
  });

  it("has the dispersion's slope by differences, moist air too", () => {
    const air = refractionOfAir({ temperature_C: 22, pressure_Pa: 98000, humidity: 0.6, co2_ppm: 500 });
    for (const um of [0.35, 0.571, 1.2]) {
      const numeric = (airRefractivity(um + 1e-4, air) - airRefractivity(um - 1e-4, air)) / 2e-4;
      // Derived: central difference
      expect(Math.abs(airRefractivityDerivative(um, air) / numeric - 1)).toBeLessThan(1e-5);
    }
  });

  it("says that wavelengths run against the energy", () => {
    expect(lightScale("nm", "air", STANDARD_AIR).reversed).toBe(true);
    expect(lightScale("cm-1", "vacuum", STANDARD_AIR).reversed).toBe(false);
  });

  it("finds no energy in readings of zero, below, or not a number", () => {
    for (const unit of UNITS)
      for (const bad of [0, -1, NaN])
        expect(energyFromReading(bad, lightScale(unit, "air", STANDARD_AIR))).toBeNaN();
  });

  it("has no air left at zero pressure", () => {
    const empty = lightScale("nm", "air", { ...STANDARD_AIR, pressure_Pa: 0 });
    // Derived: n = 1
    expect(energyFromReading(571, empty)).toBe(
      energyFromReading(571, lightScale("nm", "vacuum", STANDARD_AIR)),
    );
  });

  it("converts arrays in the order of the readings", () => {
    const scale = lightScale("nm", "vacuum", STANDARD_AIR);
    const out = energiesFromReadings(Float64Array.of(570, 571), scale);
    expect([...out]).toEqual([energyFromReading(570, scale), energyFromReading(571, scale)]);
  });
});
