import { describe, expect, it } from "vitest";
import { splitColumnName } from "../../../app/table/index.ts";
import { rowsOf, skippedOf, tableOf } from "./reading.ts";

describe("a header cell is name and unit, as written", () => {
  // Derived: the unit is what the heading states to be one; a value in the heading belongs to the name.
  const NAMES: readonly (readonly [string, string, string])[] = [
    ["Energy (eV)", "Energy", "eV"],
    ["Energy(eV)", "Energy", "eV"],
    ["Photon energy / meV", "Photon energy", "meV"],
    ["Wellenlänge [nm]", "Wellenlänge", "nm"],
    ["Longueur d'onde en nm", "Longueur d'onde", "nm"],
    ["Energy in eV", "Energy", "eV"],
    ["Energie, eV", "Energie", "eV"],
    ["Energy eV", "Energy", "eV"],
    ["Wavenumber (cm-1)", "Wavenumber", "cm-1"],
    ["Wavenumber (cm⁻¹)", "Wavenumber", "cm⁻¹"],
    ["Wavenumber / cm^{-1}", "Wavenumber", "cm^{-1}"],
    ["Wavelength (Å)", "Wavelength", "Å"],
    ["Wavelength (nm, air)", "Wavelength (air)", "nm"],
    ["Wavelength (air) (nm)", "Wavelength (air)", "nm"],
    ["Frequency (THz)", "Frequency", "THz"],
    ["Transmission [%]", "Transmission", "%"],
    ["T(%)", "T", "%"],
    ["%T", "%T", ""],
    ["Absorbance", "Absorbance", ""],
    ["OD", "OD", ""],
    ["alpha (1/cm)", "alpha", "1/cm"],
    ["alpha / 1/cm", "alpha", "1/cm"],
    ["alpha 1/cm", "alpha", "1/cm"],
    ["alpha_per_cm", "alpha", "per cm"],
    ["α / cm⁻¹", "α", "cm⁻¹"],
    ["λ/nm", "λ", "nm"],
    ["wavelength_nm", "wavelength", "nm"],
    ["E_eV", "E", "eV"],
    ["eV", "", "eV"],
    ["T", "T", ""],
    ["5 uW", "5 uW", ""],
    ["0.1 mW", "0.1 mW", ""],
    ["P = 20 µW", "P = 20 µW", ""],
    ["P = 20 µW (%)", "P = 20 µW", "%"],
    ["T (5 uW)", "T (5 uW)", ""],
    ["alpha (corrected)", "alpha (corrected)", ""],
    ["ln(1/T)", "ln(1/T)", ""],
    ["-log10(1/T)", "-log10(1/T)", ""],
    ["I/I0", "I/I0", ""],
    ["Counts", "Counts", ""],
    ["Intensity (arb. units)", "Intensity", "arb. units"],
    ["Reflectance contrast", "Reflectance contrast", ""],
    ["", "", ""],
  ];
  for (const [header, name, unit] of NAMES)
    it(`"${header}"`, () => {
      expect(splitColumnName(header)).toEqual({ name, unit });
    });
});

const ROWS = "2.1,0.5\n2.2,0.4\n2.3,0.3\n";

describe("the heading is found where instruments put it", () => {
  const CASES: readonly (readonly [
    string,
    string,
    number | null,
    number | null,
    number,
    readonly string[],
  ])[] = [
    ["none at all", ROWS, null, null, 1, ["|", "|"]],
    ["the line above the rows", "Energy (eV),T\n" + ROWS, 1, null, 2, ["Energy|eV", "T|"]],
    ["a comment above the rows", "# Energy (eV), T\n" + ROWS, 1, null, 2, ["Energy|eV", "T|"]],
    ["names, then units", "Energy,T\neV,%\n" + ROWS, 1, 2, 3, ["Energy|eV", "T|%"]],
    ["names, then units in brackets", "Energy,T\n[eV],[-]\n" + ROWS, 1, 2, 3, ["Energy|eV", "T|"]],
    ["units only", "eV,%\n" + ROWS, 1, null, 2, ["|eV", "|%"]],
    ["names, units and labels", "Energy,T\neV,%\n,5 uW\n" + ROWS, 1, 2, 4, ["Energy|eV", "T 5 uW|%"]],
    ["a blank line below it", "Energy (eV),T\n\n" + ROWS, 1, null, 3, ["Energy|eV", "T|"]],
    ["a rule below it", "Energy (eV),T\n------------\n" + ROWS, 1, null, 3, ["Energy|eV", "T|"]],
    [
      "facts above it",
      "Temperature,4.2 K\nPower,5 uW\nEnergy (eV),T\n" + ROWS,
      3,
      null,
      4,
      ["Energy|eV", "T|"],
    ],
    ["facts and no heading", "Temperature,4.2 K\nSample,A7\n" + ROWS, null, null, 3, ["|", "|"]],
    ["a comment that states facts", "# Temperature: 4.2 K, power: 5 uW\n" + ROWS, null, null, 2, ["|", "|"]],
    ["quoted, over two lines", '"Energy\n(eV)",T\n' + ROWS, 1, null, 3, ["Energy|eV", "T|"]],
    ["tabs above commas", "Energy (eV)\tT\n" + ROWS, 1, null, 2, ["Energy|eV", "T|"]],
    ["separators in excess", "Energy (eV),T,,\n" + ROWS, 1, null, 2, ["Energy|eV", "T|"]],
    ["columns and rows counted above it", "2,3\nEnergy (eV),T\n" + ROWS, 2, null, 3, ["Energy|eV", "T|"]],
  ];
  for (const [title, text, headerLine, unitLine, firstDataLine, columns] of CASES)
    it(title, () => {
      const table = tableOf(text);
      expect(table.dialect).toMatchObject({ headerLine, unitLine, firstDataLine });
      expect(table.columns.map((column) => `${column.name}|${column.unit}`)).toEqual(columns);
      expect(rowsOf(table)).toEqual([
        [2.1, 0.5],
        [2.2, 0.4],
        [2.3, 0.3],
      ]);
    });

  const SPACED: readonly (readonly [string, readonly string[]])[] = [
    ["Energy(eV) T", ["Energy|eV", "T|"]],
    ["Energy (eV) T (%)", ["Energy|eV", "T|%"]],
    ["Photon energy (eV)   Transmission (%)", ["Photon energy|eV", "Transmission|%"]],
    ["E / eV T / %", ["E|eV", "T|%"]],
    ["Energy eV T %", ["Energy|eV", "T|%"]],
    ["Energy (eV), T", ["Energy|eV", "T|"]],
    ["#Energy T", ["Energy|", "T|"]],
  ];
  for (const [line, columns] of SPACED)
    it(`"${line}" above rows set apart by spaces`, () => {
      const table = tableOf(`${line}\n  2.1  0.5\n  2.2  0.4\n  2.3  0.3\n`);
      expect(table.columns.map((column) => `${column.name}|${column.unit}`)).toEqual(columns);
      expect(table.dialect.headerLine).toBe(1);
    });

  it("powers name the signal columns, with or without a heading above", () => {
    const bare = tableOf(";5;10\n2.1;1;2\n2.2;3;4\n2.3;5;6\n");
    expect(bare.columns.map((column) => column.header)).toEqual(["", "5", "10"]);
    expect(bare.rows).toBe(3);
    const below = tableOf("Energy (eV);T;T\nPower (uW);5;10\n2.1;1;2\n2.2;3;4\n2.3;5;6\n");
    expect(below.columns.map((column) => column.name)).toEqual(["Energy", "T 5 uW", "T 10 uW"]);
    const words = tableOf("Energy (eV);P = 5 µW;P = 10 µW\n2.1;1;2\n2.2;3;4\n2.3;5;6\n");
    expect(words.columns.map((column) => column.name)).toEqual(["Energy", "P = 5 µW", "P = 10 µW"]);
  });

  it("a first row with a bad axis is no heading", () => {
    const table = tableOf("Energy (eV),T\nbad,0.5\n" + ROWS);
    expect(table.dialect).toMatchObject({ headerLine: 1, firstDataLine: 3 });
    expect(skippedOf(table)).toEqual([[2, null, "non-numeric"]]);
  });

  it("the user's header line wins, and 0 means none", () => {
    const text = "Long name,Short\nEnergy (eV),T\n" + ROWS;
    expect(tableOf(text, { headerLine: 1 }).columns[0]!.header).toBe("Long name");
    expect(tableOf(text, { headerLine: 0 }).columns[0]!.header).toBe("");
    expect(tableOf(text, { headerLine: 0 }).rows).toBe(3);
  });

  it("ragged rows near the top do not push the table down", () => {
    const table = tableOf("x,y1,y2\n1.0,2.0,3.0\n1.1,2.1,3.1\n1.2,2.2\n1.3,2.3\n1.4,2.4,3.4\n");
    expect(table.dialect.firstDataLine).toBe(2);
    expect(skippedOf(table)).toEqual([
      [4, null, "ragged"],
      [5, null, "ragged"],
    ]);
  });
});
