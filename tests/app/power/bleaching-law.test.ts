import { describe, expect, test } from "vitest";
import { bleaching, describeBeam, spotArea, unbleach, type BleachingLaw } from "../../../app/power/index.ts";
import { DEFAULT_PROTOCOL } from "../../../app/protocol/index.ts";

/** Midpoint rule: shares nothing with the room's quadrature. */
function integrate(f: (x: number) => number, from: number, to: number, steps = 20000): number {
  const h = (to - from) / steps;
  let sum = 0;
  for (let i = 0; i < steps; i++) sum += f(from + (i + 0.5) * h);
  return sum * h;
}

/** Area and peak of a Lorentz line of half width 1 that the light which reads it bleaches with the local s(x). */
function sweptArea(s: number): number {
  // Variable x = tan(a): the Lorentzian becomes the measure.
  return (
    integrate(
      (a) => {
        const lorentz = Math.cos(a) ** 2;
        return 1 / (1 + s * lorentz);
      },
      -Math.PI / 2,
      Math.PI / 2,
    ) / Math.PI
  );
}

/** Mean over a Gaussian probe of 1/e2 radius q of f(local s), pump of radius p, s at the centre of the pump. */
function overBeam(f: (s: number) => number, s: number, p: number, q: number): number {
  const weight = (r: number): number => Math.exp((-2 * r * r) / (q * q)) * r;
  const local = (r: number): number => s * Math.exp((-2 * r * r) / (p * p));
  const reach = 6 * q;
  return integrate((r) => f(local(r)) * weight(r), 0, reach) / integrate(weight, 0, reach);
}

describe("bleaching laws", () => {
  test("a swept laser bleaches the peak to 1/(1 + s) and the area to 1/sqrt(1 + s), s twice the initial fall of the area", () => {
    for (const s of [0.1, 1, 10, 100]) {
      // Derived: numerical integral over the line of the absorption that the laser leaves at its own place
      expect(bleaching("scanned-probe", s / 2).factor).toBeCloseTo(sweptArea(s), 9);
      // Derived: the same on resonance
      expect(bleaching("separate-pump", s).factor).toBeCloseTo(1 / (1 + s), 12);
    }
  });

  test("in a Gaussian beam that reads itself the hyperbola becomes a logarithm, a swept line a root", () => {
    for (const u of [0.05, 0.5, 2, 10, 100]) {
      // Derived: numerical mean over the beam; s at the centre is 2 S P for an area pi w^2
      expect(bleaching("gaussian-self", u).factor).toBeCloseTo(
        overBeam((s) => 1 / (1 + s), 2 * u, 1, 1),
        6,
      );
      // Derived: the same of the swept area; its initial fall is half, so s at the centre is 4 S P
      expect(bleaching("gaussian-scanned", u).factor).toBeCloseTo(
        overBeam((s) => 1 / Math.sqrt(1 + s), 4 * u, 1, 1),
        6,
      );
    }
  });

  test("two Gaussian beams of any ratio agree with the mean over the probe, and with the limits", () => {
    for (const [probe, u] of [
      [0.3, 0.5],
      [0.5, 20],
      [2, 0.3],
      [3, 50],
    ] as const) {
      const ratio = probe * probe;
      // Derived: power over pi (1 + probe^2)/2 is the mean intensity seen, so s at the centre is (1 + probe^2) S P
      expect(bleaching("gaussian-two-beam", u, ratio).factor).toBeCloseTo(
        overBeam((s) => 1 / (1 + s), (1 + ratio) * u, 1, probe),
        6,
      );
    }
    for (const u of [0.1, 3, 200]) {
      // Derived: exact limits, equal beams and a needle of a probe
      expect(bleaching("gaussian-two-beam", u, 1).factor).toBeCloseTo(Math.log1p(2 * u) / (2 * u), 9);
      expect(bleaching("gaussian-two-beam", u, 0).factor).toBeCloseTo(1 / (1 + u), 12);
    }
  });

  test("each begins as 1 - S P, its slope is its derivative and its inverse undoes it", () => {
    const laws: BleachingLaw[] = [
      "separate-pump",
      "scanned-probe",
      "gaussian-self",
      "gaussian-scanned",
      "gaussian-two-beam",
    ];
    for (const law of laws) {
      // Derived: definition of S
      expect((1 - bleaching(law, 1e-6, 0.4).factor) / 1e-6).toBeCloseTo(1, 4);
      for (const u of [-0.05, 0.01, 0.7, 30]) {
        const h = 1e-6 * (1 + u);
        const difference = (bleaching(law, u + h, 0.4).factor - bleaching(law, u - h, 0.4).factor) / (2 * h);
        // Derived: central difference
        expect(bleaching(law, u, 0.4).slope).toBeCloseTo(difference, 7);
        // Derived: inverse
        expect(unbleach(law, bleaching(law, u, 0.4).factor, 0.4)).toBeCloseTo(u, 7);
      }
    }
  });
});

describe("beams", () => {
  test("spot areas by profile and definition", () => {
    // Derived: pi D^2/4
    expect(spotArea("flat", "full", 100)).toBeCloseTo(Math.PI * 2500, 9);
    // Derived: pi w^2 with w = D/2
    expect(spotArea("gaussian", "1/e2", 100)).toBeCloseTo(Math.PI * 2500, 9);
    // Source: Gaussian beam, w = 0.8493 FWHM (four digits; Siegman, Lasers (1986), ch. 17)
    expect(Math.sqrt(spotArea("gaussian", "fwhm", 1) / Math.PI)).toBeCloseTo(0.8493, 4);
    // Derived: pi (w_pump^2 + w_probe^2)/2 with a probe of half the size
    expect(spotArea("gaussian", "1/e2", 100, 0.25)).toBeCloseTo((Math.PI * (2500 + 625)) / 2, 9);
    // Derived: the area is power over the mean intensity that the probe sees
    const [p, q] = [2, 3];
    const peak = 2 / (Math.PI * p * p);
    const seen = overBeam((s) => s, peak, p, q);
    expect(spotArea("gaussian", "1/e2", 2 * p, (q / p) ** 2)).toBeCloseTo(1 / seen, 5);
  });

  test("the law follows how the series was taken", () => {
    const power = DEFAULT_PROTOCOL.power;
    const law = (changes: object): string => describeBeam({ ...power, ...changes }).areaLaw;
    // Derived: design notes of this project on the physics, section 9, the table of excitation and profile
    expect(law({})).toBe("separate-pump");
    expect(law({ excitation: "scanned-probe" })).toBe("scanned-probe");
    expect(law({ spot_profile: "gaussian" })).toBe("gaussian-self");
    expect(law({ spot_profile: "gaussian", excitation: "scanned-probe" })).toBe("gaussian-scanned");
    expect(law({ spot_profile: "gaussian", spot_diameter_um: 100, probe_diameter_um: 50 })).toBe(
      "gaussian-two-beam",
    );
    // Derived: the peak's s is twice the initial fall of the area
    expect(describeBeam({ ...power, excitation: "scanned-probe" }).areaToVolume).toBe(2);
  });
});
