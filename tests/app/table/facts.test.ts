import { describe, expect, it } from "vitest";
import { tableOf } from "./reading.ts";

const ROWS = "Energy (eV),T\n2.1,0.5\n2.2,0.4\n2.3,0.3\n";

// Derived: key, value and unit are what the line says.
const FACTS: readonly (readonly [string, string, number | null, string | null])[] = [
  ["Temperature: 4.2 K", "temperature", 4.2, "K"],
  ["Temperature (K): 4.2", "temperature", 4.2, "K"],
  ["Temperature = 4.2(1) K", "temperature", 4.2, "K"],
  ["Temperature 4.2 K", "temperature", 4.2, "K"],
  ["Temperature, 4.2 K", "temperature", 4.2, "K"],
  ["Temperature,4.2,K", "temperature", 4.2, "K"],
  ["Temperature;4.2 K", "temperature", 4.2, "K"],
  ["Temperature\t4.2 K", "temperature", 4.2, "K"],
  ['"Temperature","4.2 K"', "temperature", 4.2, "K"],
  ["Temperatur = 1,8 K", "temperature", 1.8, "K"],
  ["Température : 1,8 K", "temperature", 1.8, "K"],
  ["Temperatura: 4.2 K", "temperature", 4.2, "K"],
  ["T = 4.2 K", "temperature", 4.2, "K"],
  ["Detector temperature: -70 °C", "other", -70, "°C"],
  ["Room temperature: 295 K", "other", 295, "K"],
  ["Laser power = 5 µW", "power", 5, "µW"],
  ["Power: 5 ± 0.1 µW", "power", 5, "µW"],
  ["P: 20 uW", "power", 20, "uW"],
  ["Laserleistung: 12,5 µW", "power", 12.5, "µW"],
  ["Puissance laser: 3 mW", "power", 3, "mW"],
  ["Potencia del láser = 3 mW", "power", 3, "mW"],
  ["Probe power: 1 uW", "other", 1, "uW"],
  ["Thickness [um] = 34", "thickness", 34, "um"],
  ["d = 34 µm", "thickness", 34, "µm"],
  ["Probendicke: 34 µm", "thickness", 34, "µm"],
  ["Épaisseur: 34 µm", "thickness", 34, "µm"],
  ["Espesor: 34 µm", "thickness", 34, "µm"],
  ["Spot size: 100 um", "spot", 100, "um"],
  ["Sample: X-12", "sample", null, null],
  ["Probe: K7", "sample", null, null],
  ["Échantillon: K7", "sample", null, null],
  ["Muestra: K7", "sample", null, null],
  ["Batch: B3", "batch", null, null],
  ["Charge: B3", "batch", null, null],
  ["Date: 2024-03-01 12:30:05", "date", null, null],
  ["Datum: 01.03.2024", "date", null, null],
  ["Exposure time (s): 0.5", "exposure", 0.5, "s"],
  ["Belichtungszeit: 0,5 s", "exposure", 0.5, "s"],
  ["Accumulations: 10", "accumulations", 10, null],
  ["Grating: 1200 l/mm", "grating", 1200, "l/mm"],
  ["Slit width: 20 um", "slit", 20, "um"],
  ["Centre wavelength: 571.2 nm", "centre_wavelength", 571.2, "nm"],
  ["Center wavelength: 571.2 nm", "centre_wavelength", 571.2, "nm"],
  ["Medium: air", "medium", null, null],
  ["Gain: 1.2 e-/count", "gain", 1.2, "e-/count"],
  ["Detector: CCD 3", "detector", null, null],
  ["Polarisation: 45 deg", "polarisation", 45, "deg"],
  ["Polarization: H", "polarisation", null, null],
  ["Direction: [110]", "direction", null, null],
  ["Magnetic field: 2 T", "field", 2, "T"],
  ["Scan direction: up", "scan_direction", null, null],
  ["Scan speed = 2 GHz/s", "scan_speed", 2, "GHz/s"],
  ["Pump energy: 2.171 eV", "pump_energy", 2.171, "eV"],
  ["Points: 9,000", "other", null, null],
  ["Operator: nobody", "other", null, null],
];

describe("the header's statements are kept as facts", () => {
  for (const [line, key, value, unit] of FACTS) {
    it(`as a comment: ${JSON.stringify(line)}`, () => {
      const table = tableOf(`# ${line}\n${ROWS}`);
      expect(table.facts).toHaveLength(1);
      expect(table.facts[0]).toMatchObject({ key, value, unit, line: 1 });
      expect(table.columns[0]!.name).toBe("Energy");
    });
    it(`as a free line: ${JSON.stringify(line)}`, () => {
      expect(tableOf(`${line}\n${ROWS}`).facts[0]).toMatchObject({ key, value, unit, line: 1 });
    });
  }

  it("several on one line", () => {
    const facts = tableOf(`# T = 4,2 K, P = 5 µW; d = 34 µm\n${ROWS}`).facts;
    expect(facts.map((fact) => [fact.key, fact.value, fact.unit])).toEqual([
      ["temperature", 4.2, "K"],
      ["power", 5, "µW"],
      ["thickness", 34, "µm"],
    ]);
  });

  for (const mark of ["#", "%", "//", "!", ";", '"', "*", "##", "# "])
    it(`lines that begin with ${mark} are comments`, () => {
      const table = tableOf(`${mark} Temperature: 4.2 K\n${mark} a cold day\n${ROWS}`);
      expect(table.facts[0]).toMatchObject({ key: "temperature", value: 4.2, line: 1 });
      expect(table.comments).toEqual(["a cold day"]);
      expect(table.rows).toBe(3);
      expect(table.dialect.headerLine).toBe(3);
    });

  it("addresses, paths and times of day are comments, not facts", () => {
    const table = tableOf(`# http://example.org/x\n# C:\\data\\x.txt\n# 12:30:01 begin\n${ROWS}`);
    expect(table.facts).toEqual([]);
    expect(table.comments).toHaveLength(3);
  });

  it("a footer's statement is a fact and its line is listed as skipped", () => {
    const table = tableOf(`${ROWS}\nLaser power: 5 uW\nMean,0.4\n`);
    expect(table.facts[0]).toMatchObject({ key: "power", value: 5, unit: "uW", line: 6 });
    expect(table.rows).toBe(3);
    expect(table.skipped.map((entry) => [entry.line, entry.reason])).toEqual([
      [6, "non-numeric"],
      [7, "non-numeric"],
    ]);
  });
});
