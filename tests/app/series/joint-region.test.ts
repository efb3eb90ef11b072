import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  fitLevels,
  jointRegion,
  levelInfluence,
  levelProfileCurves,
  profileLevels,
  type LevelFit,
  type LevelInput,
} from "../../../app/series/index.ts";

/** Lines n = 2.. on a law, with errors of `sigma` each and a correlation of neighbours. */
function ladder(sigma: number, seed: number, defect: "none" | "constant"): LevelInput {
  const random = makeRandom(seed);
  const n = [2, 3, 4, 5, 6, 7, 8];
  const k = n.length;
  const covariance = new Float64Array(k * k);
  for (let i = 0; i < k; i++)
    for (let j = 0; j < k; j++) covariance[i * k + j] = sigma * sigma * 0.3 ** Math.abs(i - j);
  return {
    n,
    energy_eV: Float64Array.from(n, (one) => 2.172 - 0.09 / (one - 0.2) ** 2 + sigma * random.normal()),
    covariance,
    defect,
    heldDefect: 0.2,
  };
}

function fitted(input: LevelInput): LevelFit {
  const fit = fitLevels(input);
  if (!fit.ok) throw new Error("no fit");
  return fit.value;
}

describe("joint regions of two series parameters", () => {
  it("are the ellipse of the covariance where the law is linear", () => {
    const input = ladder(1e-5, 1, "none");
    const fit = fitted(input);
    const region = jointRegion(input, fit, "gap_eV", "rydberg_eV", 0.6827)!;
    const { values, covariance: c } = fit.estimates;
    const determinant = c[0]! * c[6]! - c[1]! ** 2;
    for (const [x, y] of region.points) {
      const [dx, dy] = [x - values[0]!, y - values[1]!];
      const chi2 = (c[6]! * dx * dx - 2 * c[1]! * dx * dy + c[0]! * dy * dy) / determinant;
      // Derived: with the defect held the law is linear; chi square of two degrees of freedom at 68.27 % is -2 ln 0.3173
      expect(Math.abs(chi2 / 2.2957 - 1)).toBeLessThan(5e-3);
    }
  });

  it("lie on a curve of equal likelihood where the law bends", () => {
    const input = ladder(3e-4, 2, "constant");
    const fit = fitted(input);
    const region = jointRegion(input, fit, "rydberg_eV", "defect0", 0.6827)!;
    for (const [rydberg, defect] of region.points) {
      const held = fitLevels({ ...input, defect: "none", heldDefect: defect, heldRydberg_eV: rydberg });
      // Derived: the rest (here the gap alone) minimised at each point, the rise of chi square is the same everywhere
      expect(Math.abs((held.ok ? held.value.chi2 : NaN) - fit.chi2 - 2.2957)).toBeLessThan(0.02);
    }
  });

  it("do not exist for a parameter that was held", () => {
    const input = ladder(1e-5, 1, "none");
    expect(jointRegion(input, fitted(input), "rydberg_eV", "defect0", 0.6827)).toBeNull();
  });
});

describe("influence of single lines", () => {
  it("has leverages that sum to the number of free parameters", () => {
    for (const [defect, free] of [
      ["none", 2],
      ["constant", 3],
    ] as const) {
      const input = ladder(1e-5, 3, defect);
      const sum = levelInfluence(input, fitted(input)).reduce((total, one) => total + one.leverage, 0);
      // Derived: trace of the hat matrix
      expect(sum).toBeCloseTo(free, 6);
    }
  });

  it("finds the line that was moved", () => {
    const input = ladder(1e-5, 4, "constant");
    const moved = { ...input, energy_eV: input.energy_eV.map((e, i) => (i === 3 ? e + 2e-4 : e)) };
    const influence = levelInfluence(moved, fitted(moved));
    const worst = [...influence].sort((a, b) => Math.abs(b.residual) - Math.abs(a.residual))[0]!;
    expect(worst.n).toBe(5);
    expect(Math.abs(worst.residual)).toBeGreaterThan(10);
    const without = fitted({
      ...moved,
      n: moved.n.filter((one) => one !== 5),
      energy_eV: moved.energy_eV.filter((_, i) => i !== 3),
      covariance: moved.covariance.filter((_, at) => Math.floor(at / 7) !== 3 && at % 7 !== 3),
    });
    const fit = fitted(moved);
    const change =
      (without.estimates.values[0]! - fit.estimates.values[0]!) / Math.sqrt(fit.estimates.covariance[0]!);
    // Derived: the definition, by another call
    expect(worst.gap_eV!).toBeCloseTo(change, 4);
  });
});

describe("profile curves of the series parameters", () => {
  it("are the parabola of the covariance where the law is linear, and leave out what is held", () => {
    const input = ladder(1e-5, 1, "none");
    const fit = fitted(input);
    const curves = levelProfileCurves(input, fit);
    expect(curves.map(({ name }) => name)).toEqual(["gap_eV", "rydberg_eV"]);
    curves.forEach(({ points }, i) => {
      const sigma = Math.sqrt(fit.estimates.covariance[i * 6]!);
      for (const [value, rise] of points)
        // Derived: chi square of a linear law rises as the square of the distance in standard errors
        expect(Math.abs(rise - ((value - fit.estimates.values[i]!) / sigma) ** 2)).toBeLessThan(1e-3);
    });
  });

  it("rise to one at the ends of the profile intervals where the law bends", () => {
    const input = ladder(3e-4, 2, "constant");
    const fit = fitted(input);
    const { rydberg_eV: ends } = profileLevels(input, fit);
    const { points } = levelProfileCurves(input, fit).find(({ name }) => name === "rydberg_eV")!;
    for (const end of [ends.low!, ends.high!]) {
      const above = points.findIndex(([value]) => value > end);
      const [[a, low], [b, high]] = [points[above - 1]!, points[above]!];
      // Derived: a curve through rise 1 lies on both sides of it beside that place
      expect((low - 1) * (high - 1)).toBeLessThanOrEqual(0);
      expect(a).toBeLessThan(end);
      expect(b).toBeGreaterThan(end);
    }
  });
});
