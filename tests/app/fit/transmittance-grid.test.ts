import { describe, expect, it } from "vitest";
import { applySlit, makeSlitGrid, slitBias } from "../../../app/fit/index.ts";
import { fiveLines, transmitted, unevenEnergies, type PlainLight } from "./plain-light.ts";

const SURFACE = { model: "none", reflectance: 0 } as const;

function worst(light: PlainLight, energy: Float64Array): { error: number; nodes: number; row: number } {
  const grid = makeSlitGrid(energy, light.slitFwhm / Math.sqrt(8 * Math.LN2), light.lines);
  const sharp = { ...light, slitFwhm: 0 };
  const values = Float64Array.from(grid.nodes, (e) => transmitted(sharp, e));
  const out = new Float64Array(energy.length);
  applySlit(grid, values, 0, out, 0);
  let error = 0;
  energy.forEach((e, i) => (error = Math.max(error, Math.abs(out[i]! - transmitted(light, e)))));
  return { error, nodes: grid.nodes.length, row: grid.share.length / energy.length };
}

describe("the mean over the slit", () => {
  const light = (peakDepth: number, slitFwhm: number): PlainLight => ({
    lines: fiveLines(peakDepth),
    asymmetry: -0.2,
    background: [0.3, 0.1],
    slitFwhm,
    surface: SURFACE,
  });

  it.each([
    [1, 5e-6, 700],
    [1, 60e-6, 700],
    [4, 60e-6, 700],
    [4, 400e-6, 700],
    // The step of the points, 70 to 250 ueV, is coarser than the slit and than most lines.
    [4, 60e-6, 90],
  ])("agrees with brute force for peak depth %d, slit %d eV, %d uneven points", (depth, slit, count) => {
    const { error } = worst(light(depth, slit), unevenEnergies(0.975, 1.0005, count));
    // Derived: six-point interpolation on 12 nodes per distance to the nearest pole, 1.2e-6 of T by Cauchy's bound, and
    // the slit cut at 5.3 standard deviations, 1.2e-7.
    expect(error).toBeLessThan(1.5e-6);
  });

  it("does not convolve what is smooth", () => {
    const { row, nodes } = worst(light(1, 20e-6), unevenEnergies(0.975, 1.0005, 2000));
    // Derived: far from the lines a row needs the six nodes of its polynomial; only rows at lines as narrow as the slit
    // need tens.
    expect(row).toBeLessThan(20);
    expect(nodes).toBeLessThan(2000);
  });

  it("is the identity without a slit", () => {
    const energy = unevenEnergies(0.98, 1, 50);
    const grid = makeSlitGrid(energy, 0, []);
    const out = new Float64Array(50);
    applySlit(grid, energy, 0, out, 0);
    expect(grid.identity).toBe(true);
    expect(Array.from(out)).toEqual(Array.from(energy));
  });

  it("keeps a constant exactly, at the ends too", () => {
    const energy = unevenEnergies(0.98, 1, 300);
    const grid = makeSlitGrid(energy, 50e-6, fiveLines(1));
    const out = new Float64Array(300);
    applySlit(grid, new Float64Array(grid.nodes.length).fill(0.7), 0, out, 0);
    // Derived: every row sums to 1, up to rounding.
    for (const value of out) expect(Math.abs(value - 0.7)).toBeLessThan(1e-14);
  });
});

describe("the area that a fit of the logarithm loses to the slit", () => {
  it.each([
    // Source: design notes of this project on the physics, section 3 (checked numerically there), peak optical depth 1, slit/G and loss of area in %, two digits.
    [0.2, -0.55, 0.01],
    [0.5, -2.6, 0.06],
    [1, -6.3, 0.06],
  ])("is the published one at slit/G = %d", (ratio, percent, half) => {
    expect(Math.abs(100 * slitBias(1, ratio).area - percent)).toBeLessThan(half);
  });

  it.each([0.2, 0.5, 1])("is that of a brute-force fit on a background of 0.3 at slit/G = %d", (ratio) => {
    // Derived: Voigt line by 401-step quadrature, scanned in width, linear in area and constant, evenly spaced points
    // over +-12 G; a constant background multiplies T and drops out of the logarithm's shape.
    expect(Math.abs(slitBias(1, ratio).area - bruteForceBias(ratio))).toBeLessThan(4e-4);
  });

  it("is nothing without slit or line", () => {
    expect(slitBias(1, 0)).toEqual({ area: 0, width: 0 });
    expect(slitBias(0, 1)).toEqual({ area: 0, width: 0 });
  });
});

function bruteForceBias(ratio: number): number {
  const s = ratio / Math.sqrt(8 * Math.log(2));
  const mean = (f: (e: number) => number, e: number): number => {
    let sum = 0;
    let weights = 0;
    for (let k = -80; k <= 80; k++) {
      const u = k / 16;
      const weight = Math.exp((-u * u) / 2);
      sum += weight * f(e + u * s);
      weights += weight;
    }
    return sum / weights;
  };
  const lorentz = (e: number, width: number): number => 1 / (1 + (2 * e) ** 2 / width ** 2);
  const energies = Array.from({ length: 481 }, (_, i) => -12 + i / 20);
  const depth = energies.map((e) => -Math.log(mean((x) => Math.exp(-0.3 - lorentz(x, 1)), e)));
  const fit = (width: number): { chi2: number; area: number } => {
    const shape = energies.map((e) => mean((x) => lorentz(x, width), e));
    const count = energies.length;
    let sx = 0;
    let sy = 0;
    let sxx = 0;
    let sxy = 0;
    shape.forEach((x, i) => {
      sx += x;
      sy += depth[i]!;
      sxx += x * x;
      sxy += x * depth[i]!;
    });
    const slope = (count * sxy - sx * sy) / (count * sxx - sx * sx);
    const constant = (sy - slope * sx) / count;
    let chi2 = 0;
    shape.forEach((x, i) => (chi2 += (depth[i]! - slope * x - constant) ** 2));
    return { chi2, area: slope * width - 1 };
  };
  let [low, high] = [0.9, 1.1];
  for (let round = 0; round < 24; round++) {
    const a = low + (high - low) / 3;
    const b = high - (high - low) / 3;
    if (fit(a).chi2 < fit(b).chi2) high = b;
    else low = a;
  }
  return fit((low + high) / 2).area;
}
