import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import {
  CODATA_2018,
  CODATA_2022,
  HBAR_UEV_PS,
  HC_EV_NM,
  type ConstantSymbol,
} from "../../app/units/index.ts";

const rows = readFileSync(new URL("../../fixtures/reference/constants.csv", import.meta.url), "utf8")
  .split(/\r?\n/)
  .filter((line) => line !== "" && !line.startsWith("#"))
  .slice(1)
  .map((line) => {
    const cells = line.split(",");
    const [exact, unit, uncertainty, value, year] = cells.reverse();
    return {
      symbol: cells.at(-1)! as ConstantSymbol,
      exact,
      unit,
      year,
      value: Number(value),
      uncertainty: Number(uncertainty),
    };
  });

describe("constants of nature", () => {
  it("are all there, in both editions", () => {
    expect(new Set(rows.map((row) => row.symbol))).toEqual(new Set(Object.keys(CODATA_2022)));
  });

  it.each(rows)("$symbol of $year has the published value, uncertainty and unit", (row) => {
    const found = (row.year === "2018" ? CODATA_2018 : CODATA_2022)[row.symbol];
    // Source: CODATA 2018 and 2022 recommended values, fixtures/reference/constants.csv
    expect(Math.abs(found.value / row.value - 1)).toBeLessThan(row.exact === "yes" ? 4e-16 : 1e-16);
    // Source: as above
    expect(found.uncertainty).toBe(row.uncertainty);
    expect(found.unit).toBe(row.unit);
    expect(String(found.edition)).toBe(row.year);
  });

  it("agree among each other: Ry = R_inf hc, E_h = 2 Ry, Ry = m_e c^2 alpha^2/2", () => {
    for (const table of [CODATA_2018, CODATA_2022]) {
      // Derived: definitions; to a few parts of the uncertainty of the listed numbers
      expect(table.R_inf.value * table.inverse_m_to_eV.value).toBeCloseTo(table.Ry_eV.value, 10);
      // Derived: Hartree energy is twice the Rydberg energy
      expect(2 * table.Ry_eV.value).toBeCloseTo(table.E_h_eV.value, 10);
      // Derived: Ry = m_e c^2 alpha^2 / 2
      const ry = (table.m_e_c2_MeV.value * 1e6 * table.alpha.value ** 2) / 2;
      expect(Math.abs(ry / table.Ry_eV.value - 1)).toBeLessThan(1e-9);
    }
  });

  it("that everything rests on have the digits of the design", () => {
    // Source: fixtures/reference/constants.csv, hc_eV_nm
    expect(HC_EV_NM).toBeCloseTo(1239.841984332, 9);
    // Source: fixtures/reference/constants.csv, hbar_over_1ueV_ps
    expect(HBAR_UEV_PS).toBeCloseTo(658.2119569509, 9);
  });
});
