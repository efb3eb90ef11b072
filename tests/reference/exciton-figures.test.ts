import { readFileSync } from "node:fs";
import { describe, expect, test } from "vitest";
import {
  bohrRadiusFromRydberg,
  levelSpacing,
  lifetimeFromWidth,
  meanRadius,
  RYDBERG_ENERGY,
  rydbergFromBohrRadius,
  SCALING_EXPONENTS,
} from "../../app/laws/index.ts";
import { fitLevels, type LevelFit, type LevelInput } from "../../app/series/index.ts";

/** Published exciton figures, confidence high only. Rows computed from a law are round trips and are called so. */
function readTable(name: string): Record<string, string>[] {
  const text = readFileSync(new URL(`../../fixtures/reference/${name}`, import.meta.url), "utf8");
  const [head, ...rows] = text
    .split(/\r?\n/)
    .filter((line) => line !== "" && !line.startsWith("#"))
    .map((line) =>
      [...line.matchAll(/(?:^|,)(?:"([^"]*)"|([^,]*))/g)].map((match) => match[1] ?? match[2] ?? ""),
    );
  return rows.map((row) => Object.fromEntries(head!.map((name, i) => [name, row[i] ?? ""])));
}

const lines = readTable("exciton_series.csv").filter((row) => row["confidence"] === "high");
const parameters = readTable("exciton_parameters.csv").filter((row) => row["confidence"] === "high");

function fitRows(rows: Record<string, string>[], sigma: number, rest: Partial<LevelInput>): LevelFit {
  const k = rows.length;
  const covariance = new Float64Array(k * k);
  for (let i = 0; i < k; i++) covariance[i * (k + 1)] = sigma * sigma;
  const fit = fitLevels({
    n: rows.map((row) => Number(row["n"])),
    energy_eV: Float64Array.from(rows, (row) => Number(row["energy_eV"])),
    covariance,
    defect: "constant",
    ...rest,
  });
  if (!fit.ok) throw new Error(JSON.stringify(fit.issues));
  return fit.value;
}

describe("round trips: lines that were computed from a published law give the law back", () => {
  test("cuprous oxide, yellow P lines n = 6 to 30", () => {
    const rows = lines.filter((row) => row["series"] === "yellow nP (from the published fit)");
    expect(rows.length).toBe(25);
    // Rounded to 1e-8 eV: uniform error of 1e-8/sqrt(12).
    const fit = fitRows(rows, 1e-8 / Math.sqrt(12), {});
    const [gap, rydberg, defect] = fit.estimates.values;
    const sigma = (i: number): number => Math.sqrt(fit.estimates.covariance[i * 6]!);
    // Source: Kazimierczuk et al., Nature 514, 343 (2014) (from memory): 2.17208 eV, 92 meV, 0.23.
    expect(Math.abs(gap! - 2.17208)).toBeLessThan(4 * sigma(0));
    expect(Math.abs(rydberg! - 0.092)).toBeLessThan(4 * sigma(1));
    expect(Math.abs(defect! - 0.23)).toBeLessThan(4 * sigma(2));
    expect(sigma(1)).toBeLessThan(1e-6);
    expect(fit.p).toBeGreaterThan(0.01);
  });

  test("layered perovskite with four layers, lines 2s and 3s of an ideal sheet", () => {
    const rows = lines.filter((row) => row["series"] === "ns (published 2D fit)");
    expect(rows.length).toBe(2);
    const fit = fitRows(rows, 1e-5, { defect: "none", heldDefect: 0.5 });
    // Source: Blancon et al., Nat. Commun. 9, 2254 (2018), caption of fig. 4: 2.078(12) eV, 110(40) meV.
    expect(fit.estimates.values[0]!).toBeCloseTo(2.078, 4);
    expect(fit.estimates.values[1]!).toBeCloseTo(0.11, 4);
    expect(fit.notes.map((note) => note.code)).toContain("law-not-tested");
  });

  test("gallium arsenide, gap from the lowest line and a held Rydberg energy", () => {
    const rows = lines.filter((row) => row["material"] === "GaAs" && row["energy_eV"] !== "");
    const fit = fitRows(rows, 1e-4, { defect: "none", heldRydberg_eV: 0.00377 });
    // Source: Nam et al., Phys. Rev. B 13, 761 (1976), abstract: 1.5189(1) eV and 3.77(5) meV.
    expect(fit.estimates.values[0]!).toBeCloseTo(1.5189, 5);
  });
});

describe("published figures", () => {
  test("the Bohr radius of cuprous oxide makes the mean radius at n = 25 larger than 1 um", () => {
    const row = parameters.find((one) => one["series"] === "yellow nP")!;
    const bohr = Number(row["bohr_radius_nm"]);
    // Source: Kazimierczuk et al. 2014 (from memory): Bohr radius 1.11 nm.
    expect(bohr).toBe(1.11);
    // common practice, no source: mean radius above 1 um at n = 25
    expect(meanRadius(25, 1, bohr) / 1000).toBeGreaterThan(1);
  });

  test("an 80 neV line of the paraexciton lives for at least 8 ns", () => {
    const row = lines.find((one) => one["linewidth_ueV"] === "0.08")!;
    // Source: Brandt et al., Phys. Rev. Lett. 99, 217403 (2007), abstract: 80 neV; Derived: 658.212/0.08 ps.
    expect(lifetimeFromWidth(Number(row["linewidth_ueV"]) * 1e-6)).toBeCloseTo(658.2119569509 / 0.08, 3);
  });
});

describe("common practice", () => {
  test("excitonic Rydberg energy of cuprous oxide about 100 meV", () => {
    const rydberg = rydbergFromBohrRadius(1.11, 7.5) * 1000;
    // common practice, no source: about 100 meV, published values 86-98 meV
    expect(rydberg).toBeGreaterThan(86);
    expect(rydberg).toBeLessThan(98);
    // Derived: 719.982274 meV nm/(92 meV 7.5), the other way round.
    expect(bohrRadiusFromRydberg(0.092, 7.5)).toBeCloseTo(1.043, 3);
  });

  test("excitonic Rydberg energy of gallium arsenide about 5 meV", () => {
    // common practice, no source: about 5 meV, published values 3.7-4.9 meV; mass 0.058 and permittivity 12.9 from memory
    const rydberg = ((RYDBERG_ENERGY * 0.058) / 12.9 ** 2) * 1000;
    expect(rydberg).toBeGreaterThan(3.7);
    expect(rydberg).toBeLessThan(4.9);
  });

  test("properties grow with the usual powers of n", () => {
    const [low, high] = [40, 80];
    const exponent = (of: (n: number) => number): number => Math.log2(of(high) / of(low));
    const dipole = (n: number): number => meanRadius(n, 1, 1);
    const spacing = (n: number): number => levelSpacing(n - 0.5, 1);
    // common practice, no source: transition dipole n^2
    expect(exponent(dipole)).toBeCloseTo(2, 2);
    expect(SCALING_EXPONENTS.transitionDipole).toBe(2);
    // common practice, no source: lifetime n^3 (widths n^-3)
    expect(exponent((n) => lifetimeFromWidth(0.016 / n ** 3))).toBeCloseTo(3, 12);
    expect(SCALING_EXPONENTS.lifetime).toBe(3);
    // common practice, no source: dipole-dipole C3 n^4, a dipole squared
    expect(exponent((n) => dipole(n) ** 2)).toBeCloseTo(4, 2);
    expect(SCALING_EXPONENTS.dipoleDipole).toBe(4);
    // common practice, no source: van der Waals C6 n^11, a dipole to the fourth over a spacing
    expect(exponent((n) => dipole(n) ** 4 / spacing(n))).toBeCloseTo(11, 2);
    expect(SCALING_EXPONENTS.vanDerWaals).toBe(11);
  });
});
