import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { resolveProtocol } from "../../app/protocol/index.ts";
import { readSpectrum } from "../../app/spectrum/index.ts";
import { readTable } from "../../app/table/index.ts";

const bytes = readFileSync(new URL("../../fixtures/reference/balmer_a0v.csv", import.meta.url));

function readStar(): Extract<ReturnType<typeof readSpectrum>, { ok: true }>["value"] {
  const table = readTable("balmer_a0v.csv", bytes, {});
  const protocol = resolveProtocol({ signal: { quantity: "transmittance" } });
  if (!table.ok || !protocol.ok) throw new Error("not read");
  const spectrum = readSpectrum(table.value, "0", protocol.value);
  if (!spectrum.ok) throw new Error(JSON.stringify(spectrum.issues));
  return spectrum.value;
}

describe("a measured stellar spectrum with a hydrogen series", () => {
  const spectrum = readStar();

  it("is read as wavelengths in Angstrom in air, flux as transmittance, sd as standard deviation", () => {
    expect(spectrum.axisUnitRead).toBe("Angstrom");
    expect(spectrum.medium).toBe("air");
    expect(spectrum.quantityRead).toBe("transmittance");
    expect(spectrum.columns.map((column) => column.role)).toEqual(["axis", "signal", "sigma"]);
    expect(spectrum.noise.source).toBe("column");
  });

  it("keeps every row, and T above one", () => {
    // Source: the file: 3600 to 7600 Angstrom in steps of 5
    expect(spectrum.energy_eV.length).toBe(801);
    expect(spectrum.used.every((flag) => flag === 1)).toBe(true);
    // Source: the file, row 3725.0 1.066856
    expect(spectrum.transmittance!.value[801 - 1 - 25]).toBeCloseTo(1.066856, 12);
    expect(Math.max(...spectrum.transmittance!.value)).toBeGreaterThan(1);
    expect(spectrum.signal.some((value) => value < 0)).toBe(true);
  });

  it("ends at the energies of its air wavelengths", () => {
    // Source: fixtures/reference/air_index.csv, Ciddor at 750 and 780 nm, interpolated to 760.2 nm: 1.0002753155
    expect(Math.abs(spectrum.energy_eV[0]! - 1239.841984332 / (760 * 1.0002753155))).toBeLessThan(1e-7);
    // Source: as above, 350 and 365.12 nm, interpolated to 360.1 nm: 1.0002853334 (a straight line, good to 5e-8)
    expect(Math.abs(spectrum.energy_eV.at(-1)! - 1239.841984332 / (360 * 1.0002853334))).toBeLessThan(3e-7);
  });

  it("takes a standard deviation of zero as missing and says how many", () => {
    const zeros = bytes
      .toString("utf8")
      .split(/\r?\n/)
      .filter((line) => /,0\.0+$/.test(line)).length;
    const note = spectrum.notes.find((one) => one.code === "sigma-missing")!;
    // Derived: counted in the file's text
    expect(note.text).toContain(`${zeros} points of 801`);
    expect(spectrum.sigma.every((value) => value > 0 && Number.isFinite(value))).toBe(true);
  });
});
