import { describe, expect, it } from "vitest";
import {
  absorbanceFromDepth,
  depthFromAbsorbance,
  depthFromTransmittance,
  depthSigma,
  PER_CM,
  reflectance,
  transmittanceFromDepth,
  transmittanceSlope,
} from "../../../app/units/index.ts";

const MODELS = ["none", "single", "all"] as const;

describe("transmittance and optical depth", () => {
  it.each(MODELS)("with surfaces %s go there and back, negative absorption included", (model) => {
    for (const R of [0, 0.05, 0.244, 0.9])
      for (const depth of [-0.05, 0, 1e-6, 0.3, 2, 12]) {
        if (model === "all" && R * Math.exp(-depth) >= 1) continue;
        const T = transmittanceFromDepth(depth, R, model);
        // Derived: identity; a depth near zero carries the rounding of T
        expect(Math.abs(depthFromTransmittance(T, R, model) - depth)).toBeLessThan(
          4e-15 * (1 + Math.abs(depth)),
        );
      }
  });

  it("without reflection is minus the logarithm in every model", () => {
    for (const model of MODELS) {
      // Derived: R = 0 leaves T = exp(-a); no 0/0 there
      expect(depthFromTransmittance(0.25, 0, model)).toBeCloseTo(Math.log(4), 15);
    }
  });

  it("keeps T above one and above (1-R)/(1+R)", () => {
    expect(depthFromTransmittance(1.1, 0, "none")).toBeLessThan(0);
    expect(depthFromTransmittance(0.7, 0.244, "all")).toBeLessThan(0);
    // Derived: T = (1-R)/(1+R) is a plate without absorption
    expect(depthFromTransmittance((1 - 0.244) / (1 + 0.244), 0.244, "all")).toBeCloseTo(0, 14);
  });

  it("agrees with the plate formula in its textbook form", () => {
    const R = 0.244;
    const T = 0.3;
    const through = (1 - R) ** 2;
    const x = (-through + Math.sqrt(through ** 2 + 4 * T * T * R * R)) / (2 * T * R * R);
    // Derived: the root of T = (1-R)^2 x/(1 - R^2 x^2), incoherent reflections summed
    expect(depthFromTransmittance(T, R, "all")).toBeCloseTo(-Math.log(x), 13);
  });

  it.each(MODELS)("has the slope of its differences and the matching noise (%s)", (model) => {
    const R = 0.244;
    for (const depth of [0.1, 1, 3]) {
      const h = 1e-5;
      const numeric =
        (transmittanceFromDepth(depth + h, R, model) - transmittanceFromDepth(depth - h, R, model)) / (2 * h);
      // Derived: central difference
      expect(Math.abs(transmittanceSlope(depth, R, model) / numeric - 1)).toBeLessThan(1e-9);
      const T = transmittanceFromDepth(depth, R, model);
      // Derived: sigma_a = sigma_T/|dT/da|
      expect(depthSigma(T, 0.001, R, model)).toBeCloseTo(0.001 / Math.abs(numeric), 9);
    }
  });

  it("knows no absorption of light below zero", () => {
    expect(depthFromTransmittance(-0.01, 0.2, "all")).toBeNaN();
    expect(depthFromTransmittance(0, 0.2, "all")).toBe(Infinity);
  });

  it("takes the reflectance from the index", () => {
    // Source: design notes of this project on the physics, section 10, index 2.95 (R 0.244)
    expect(reflectance(2.95)).toBeCloseTo(0.2437, 4);
    // Derived: [(2.95 - 1.028)/(2.95 + 1.028)]^2
    expect(reflectance(2.95, 1.028)).toBeCloseTo((1.922 / 3.978) ** 2, 14);
    // Derived: [(n-1)^2 + k^2]/[(n+1)^2 + k^2] = (4 + 1)/(16 + 1)
    expect(reflectance(3, 1, 1)).toBeCloseTo(5 / 17, 15);
  });

  it("converts decadic and natural logarithms and units of alpha", () => {
    // Derived: ln 10, 1 absorbance = 2.302585 nepers
    expect(depthFromAbsorbance(1)).toBeCloseTo(2.302585, 6);
    // Derived: identity
    expect(absorbanceFromDepth(depthFromAbsorbance(0.7))).toBeCloseTo(0.7, 15);
    // Derived: 1/mm = 10/cm, 1/um = 1e4/cm, 1/m = 0.01/cm
    expect([PER_CM["1/mm"], PER_CM["1/um"], PER_CM["1/m"]]).toEqual([10, 1e4, 0.01]);
  });
});
