import { describe, expect, test } from "vitest";
import {
  BOLTZMANN,
  RYDBERG_TIMES_BOHR,
  SCALING_EXPONENTS,
  bohrRadiusFromMass,
  bohrRadiusFromRydberg,
  boseEinsteinGap,
  lifetimeFromWidth,
  meanRadius,
  meanRadiusInDimension,
  meanSquareRadius,
  permittivityFromSeries,
  phononWidth,
  reducedMassFromRydberg,
  rydbergFromBohrRadius,
  scaleWithN,
  varshni,
  widthFromLifetime,
} from "../../../app/laws/index.ts";
import { derivative } from "../lines/differences.ts";

type Law = (temperature: number, p: number[]) => Float64Array;
const laws: [string, Law, number[]][] = [
  ["varshni", (t, p) => run(4, (out) => varshni(t, p[0]!, p[1]!, p[2]!, out)), [1.519, 5.4e-4, 204]],
  [
    "Bose-Einstein",
    (t, p) => run(4, (out) => boseEinsteinGap(t, p[0]!, p[1]!, p[2]!, out)),
    [2.18, 0.008, 210],
  ],
  [
    "phonon width",
    (t, p) => run(5, (out) => phononWidth(t, p[0]!, p[1]!, p[2]!, p[3]!, out)),
    [1e-3, 5e-6, 0.02, 0.036],
  ],
];

function run(size: number, fill: (out: Float64Array) => void): Float64Array {
  const out = new Float64Array(size);
  fill(out);
  return out;
}

describe("temperature laws", () => {
  test.each(laws)("the derivatives of %s agree with differences", (_name, law, p) => {
    for (const t of [4, 40, 300]) {
      const out = law(t, p);
      for (let j = 0; j < p.length; j++) {
        const step = p[j]! / 100;
        const difference = derivative((v) => law(t, p.with(j, v))[0]!, p[j]!, step);
        // Derived: central differences
        expect(Math.abs(out[j + 1]! - difference)).toBeLessThan((1e-11 * Math.abs(out[0]!)) / step);
      }
    }
  });
  test("at zero temperature every law is at its limit", () => {
    // Derived: occupation 0
    expect(laws.map(([, law, p]) => law(0, p)[0])).toEqual([1.519, 2.18 - 0.008, 1e-3]);
    for (const [, law, p] of laws) expect(law(0, p).every(Number.isFinite)).toBe(true);
  });
  test("the Bose-Einstein gap becomes linear with slope -2 a k/Theta at high temperature", () => {
    const slope = derivative((t) => laws[1]![1](t, [2, 0.01, 200])[0]!, 1e5, 1000);
    // Derived: coth(x) -> 1/x
    expect(slope / ((-2 * 0.01) / 200)).toBeCloseTo(1, 5);
  });
  test("a phonon at k_B T ln 2 is occupied once", () => {
    const out = phonon(100, BOLTZMANN * 100 * Math.LN2);
    // Derived: 1/(2 - 1)
    expect(out).toBeCloseTo(1, 13);
  });
});

function phonon(temperature: number, energy: number): number {
  return run(5, (out) => phononWidth(temperature, 0, 0, 1, energy, out))[0]!;
}

describe("sizes", () => {
  test("Bohr radius, Rydberg energy and permittivity belong together", () => {
    // Derived: e^2/(8 pi eps_0) from the CODATA 2018 constants, in meV nm
    expect(RYDBERG_TIMES_BOHR * 1000).toBeCloseTo(719.982274, 6);
    // Source: design notes of this project on the physics, section 8: 92 meV and 7.5 give 1.043 nm; 1.11 nm and 7.5 imply 86.5 meV
    expect(bohrRadiusFromRydberg(0.092, 7.5)).toBeCloseTo(1.043, 3);
    expect(rydbergFromBohrRadius(1.11, 7.5)).toBeCloseTo(0.0865, 4);
    // Derived: inverses of each other
    expect(permittivityFromSeries(0.092, bohrRadiusFromRydberg(0.092, 7.5))).toBeCloseTo(7.5, 12);
    expect(
      bohrRadiusFromMass(reducedMassFromRydberg(0.092, 7.5), 7.5) / bohrRadiusFromRydberg(0.092, 7.5),
    ).toBeCloseTo(1, 12);
  });
  test("the mean radius of n = 25, l = 1 is above a micrometre for a Bohr radius of 1.11 nm", () => {
    // Derived: 0.555 (3 625 - 2) nm = 1039.5 nm; common practice: above 1 um
    expect(meanRadius(25, 1, 1.11)).toBeCloseTo(1039.515, 3);
  });
  test("hydrogen's ground state", () => {
    // Derived: <r> = 3/2 a, <r^2> = 3 a^2
    expect(meanRadius(1, 0, 1)).toBe(1.5);
    expect(meanSquareRadius(1, 0, 1)).toBe(3);
  });
  test("a sheet's ground state has half a Bohr radius", () => {
    // Derived: nu = 1/2, lam = -1/2: (1/2)(3/4 + 1/4) = 1/2, known from the wave function exp(-2 r/a)
    expect(meanRadiusInDimension(1, 0, 2, 1)).toBe(0.5);
    expect(meanRadiusInDimension(4, 1, 3, 2)).toBe(meanRadius(4, 1, 2));
  });
  test("a width of 10 ueV lives 65.8 ps", () => {
    // Source: hbar = 658.2119569509 ueV ps (CODATA 2018)
    expect(lifetimeFromWidth(1e-5)).toBeCloseTo(65.82119569509, 9);
    expect(widthFromLifetime(lifetimeFromWidth(3e-6))).toBeCloseTo(3e-6, 18);
  });
  test("properties scale with n as common practice says", () => {
    // Source: common practice: transition dipole 2, lifetime 3, dipole-dipole 4, van der Waals 11
    expect(SCALING_EXPONENTS).toMatchObject({
      transitionDipole: 2,
      lifetime: 3,
      dipoleDipole: 4,
      vanDerWaals: 11,
    });
    // Derived: blockade volume from (C6/G)^(1/2) and from C3/G
    expect(SCALING_EXPONENTS.blockadeVolume).toBe(
      (SCALING_EXPONENTS.vanDerWaals - SCALING_EXPONENTS.width) / 2,
    );
    expect(SCALING_EXPONENTS.blockadeVolume).toBe(SCALING_EXPONENTS.dipoleDipole - SCALING_EXPONENTS.width);
    expect(scaleWithN(3, 11, 5, 10)).toBeCloseTo(3 * 2048, 9);
  });
});
