import { readFileSync } from "node:fs";
import { expect, test } from "vitest";

interface Truth {
  readonly thickness_um: number;
  readonly reflectance: number;
  readonly spot: { readonly diameter_um: number };
  readonly interaction: { readonly c3_ueV_um3: number; readonly kappa: number };
  readonly exponents: { readonly saturation: number; readonly volume: number };
  readonly lines: readonly {
    readonly n: number;
    readonly energy_eV: number;
    readonly width_eV: number;
    readonly area: number;
    readonly lifetime_ps: number;
    readonly absorbed_fraction: number;
    readonly density_per_uW: number;
    readonly blockade_volume_um3: number;
    readonly saturation_per_uW: number;
  }[];
}

const fixtures = new URL("../../fixtures/", import.meta.url);
const script = new URL("generated/make-power-demo.mjs", fixtures).href;
const { makePowerFiles } = (await import(script)) as { makePowerFiles(): Map<string, string> };
const truth = JSON.parse(
  readFileSync(new URL("demo/power/TH-A4_power-series.truth.json", fixtures), "utf8"),
) as Truth;

test("the generator makes every committed power series again, byte for byte", () => {
  const files = makePowerFiles();
  // Derived: one file with its truth, five files with theirs.
  expect(files.size).toBe(8);
  for (const [path, text] of files)
    expect(readFileSync(new URL(path, fixtures), "utf8") === text, `fixtures/${path} differs`).toBe(true);
});

test("the demo's saturation follows from its density and its volume by the formula in working units", () => {
  const area = Math.PI * (truth.spot.diameter_um / 2) ** 2;
  for (const line of truth.lines.filter(({ n }) => n >= 5 && n <= 14)) {
    const absorbed = line.absorbed_fraction;
    // x = exp(-alpha_tot d) from f_abs = (1 - R)(1 - x)/(1 - R x)
    const R = truth.reflectance;
    const x = (1 - R - absorbed) / (1 - R - absorbed * R);
    const total = -Math.log(x) / (truth.thickness_um * 1e-4);
    const share = (2 * line.area) / (Math.PI * line.width_eV) / total;
    const density =
      (6.241509 * absorbed * share * line.lifetime_ps) / (line.energy_eV * area * truth.thickness_um);
    // Source: 1 uW ps/eV = 6.241509 (2019 SI, 1/e to seven digits)
    expect(line.density_per_uW / density).toBeCloseTo(1, 6);
    // Derived: S = V rho0/P
    expect(line.saturation_per_uW / (line.density_per_uW * line.blockade_volume_um3)).toBeCloseTo(1, 9);
    const sphere =
      (((4 * Math.PI) / 3) * truth.interaction.c3_ueV_um3 * line.n ** 4) /
      (truth.interaction.kappa * line.width_eV * 1e6);
    // Derived: a sphere that touches the faces of the slab only where its centre is near them loses less than 3 R/(8 d)
    expect(line.blockade_volume_um3 / sphere).toBeGreaterThan(0.97);
    expect(line.blockade_volume_um3).toBeLessThan(sphere);
  }
});

test("the demo's exponents lie below the ideal ones, since its widths have a floor", () => {
  // Derived: widths and areas exactly n^-3 give 10 and 7; any floor lowers both
  expect(truth.exponents.saturation).toBeLessThan(10);
  expect(truth.exponents.saturation).toBeGreaterThan(9);
  // Derived: the same
  expect(truth.exponents.volume).toBeLessThan(7);
  expect(truth.exponents.volume).toBeGreaterThan(6);
});
