import { describe, expect, it } from "vitest";
import {
  energyUnit,
  formatChiSquare,
  formatEnergy,
  formatNumber,
  formatProbability,
  formatQuantity,
  probabilityInWords,
  roundSigma,
} from "../../../app/report/index.ts";

describe("value(uncertainty) unit", () => {
  it("keeps one or two digits of sigma by the rule of the Particle Data Group", () => {
    // Source: Particle Data Group, Review of Particle Physics, Introduction, "Rounding": 100..354 two, 355..949 one, 950..999 up to 1000 and two
    const cases: readonly (readonly [number, number])[] = [
      [0.827, 0.8],
      [0.119, 0.12],
      [0.354, 0.35],
      [0.355, 0.4],
      [0.949, 0.9],
      [0.95, 1],
      [0.999, 1],
      [1.0, 1.0],
      [354.9, 350],
      [0.00001234, 0.000012],
    ];
    for (const [sigma, rounded] of cases) expect(roundSigma(sigma).rounded).toBe(rounded);
  });

  it("rounds the value to the place of sigma, also for the rule's own examples", () => {
    // Source: Particle Data Group, Review of Particle Physics, Introduction, "Rounding": 0.827 +- 0.119 and 0.827 +- 0.367 (from memory)
    expect(formatQuantity(0.827, 0.119, "")).toBe("0.83(12)");
    // Source: as above
    expect(formatQuantity(0.827, 0.367, "")).toBe("0.8(4)");
    // Derived: 950..999 is rounded up to 1000 and keeps two digits, so 0.957 becomes 1.0
    expect(formatQuantity(4.3219, 0.957, "eV")).toBe("4.3(1.0) eV");
  });

  it("writes a gap as a paper does, in groups of three digits", () => {
    // Derived: sigma 1.23e-5 has leading digits 123, keeps two: place 1e-6
    expect(formatQuantity(2.172083, 0.0000123, "eV")).toBe("2.172 083(12) eV");
    // Source: ISO 80000-1:2022, 7.3.1: groups of three from the decimal sign; four digits may stand together
    expect(formatQuantity(1234567.8, 3.6, "")).toBe("1.234 568(4) × 10⁶");
    expect(formatQuantity(0.3252, 0.0011, "um")).toBe("0.3252(11) um");
    expect(formatQuantity(35009.814, 0.0011, "cm^-1")).toBe("35 009.8140(11) cm^-1");
    expect(formatQuantity(2.172083, 0.0000123, "eV", { groupSpace: "\u202f" })).toBe("2.172\u202f083(12) eV");
  });

  it("prints a sigma that reaches across the decimal point with the point, and a large one in full", () => {
    // Derived: the head comment's departure: 98.7(1.2), not 98.7(12)
    expect(formatQuantity(98.7, 1.2, "meV")).toBe("98.7(1.2) meV");
    // Derived: sigma 123 keeps two digits: 120, value to the tens
    expect(formatQuantity(4567, 123, "1/cm")).toBe("4570(120) 1/cm");
    // Derived: sigma 5 keeps one digit
    expect(formatQuantity(92.4, 5, "meV")).toBe("92(5) meV");
  });

  it("sets powers of ten apart where many zeros would stand", () => {
    // Derived: 1.2345e-7 with sigma 2.1e-9 is 1.2345(210)e-7, two digits kept
    expect(formatQuantity(1.2345e-7, 2.1e-9, "eV")).toBe("1.234(21) × 10⁻⁷ eV");
  });

  it("gives unequal sides of an interval as +up/-down, and equal ones as one sigma", () => {
    // Derived: up 0.8, down 1.4: the smaller one, 0.8, sets the place
    expect(formatQuantity(1.8, 1, "µeV", { low: 0.4, high: 2.6 })).toBe("1.8(+0.8/-1.4) µeV");
    // Derived: up 15e-6, down 9e-6: place 1e-6
    expect(formatQuantity(2.172083, 12e-6, "eV", { low: 2.172074, high: 2.172098 })).toBe(
      "2.172 083(+15/-9) eV",
    );
    // Derived: sides differing by less than a tenth of their mean count as equal
    expect(formatQuantity(1.8, 1, "", { low: 0.8, high: 2.81 })).toBe("1.8(1.0)");
  });

  it("says in words what is unknown, exact or not determined, always with the unit where there is a value", () => {
    expect(formatQuantity(null, null, "eV")).toBe("not determined");
    expect(formatQuantity(Number.NaN, 1, "eV")).toBe("not determined");
    expect(formatQuantity(1.11, 0, "nm")).toBe("1.11 nm (exact)");
    expect(formatQuantity(3, 0, "", { exactWord: "held" })).toBe("3 (held)");
    expect(formatQuantity(1.11, null, "nm")).toBe("1.11 nm (uncertainty unknown)");
  });

  it("never writes minus zero, and keeps the sign of small negative values", () => {
    expect(formatQuantity(-0.004, 0.3, "")).toBe("0.00(30)");
    expect(formatQuantity(-0.4, 1.5, "µeV")).toBe("-0.4(1.5) µeV");
  });

  it("rounds ties to the even digit, as decimal digits and not as binary ones", () => {
    // Source: ISO 80000-1:2022, annex B, rule A
    expect(formatQuantity(0.125, 0.12, "")).toBe("0.12(12)");
    expect(formatQuantity(0.135, 0.12, "")).toBe("0.14(12)");
    expect(formatQuantity(1.005, 0.12, "")).toBe("1.00(12)");
  });

  it("reads back to within half a unit of the last place, for any value and sigma", () => {
    for (let i = 0; i < 400; i++) {
      const value = Math.sin(i) * 10 ** ((i % 13) - 6);
      const sigma = Math.abs(Math.cos(3 * i)) * 10 ** ((i % 7) - 5) + 1e-9;
      const { place } = roundSigma(sigma);
      const text = formatQuantity(value, sigma, "");
      const tens = /× 10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)/.exec(text)?.[1] ?? "";
      const power = Number(
        Array.from(tens, (c) => (c === "⁻" ? "-" : "⁰¹²³⁴⁵⁶⁷⁸⁹".indexOf(c))).join("") || "0",
      );
      const read = Number(text.split("(")[0]!.replaceAll(" ", "")) * 10 ** power;
      expect(Math.abs(read - value), text).toBeLessThanOrEqual(0.5000001 * 10 ** place);
    }
  });
});

describe("prefix of an energy", () => {
  it("prints a gap in eV, a Rydberg energy in meV, a width in µeV", () => {
    // Derived: powers of a thousand
    expect(formatEnergy({ value: 2.172083, sigma: 0.0000123, low: null, high: null })).toBe(
      "2.172 083(12) eV",
    );
    expect(formatEnergy({ value: 0.09213, sigma: 0.00031, low: null, high: null })).toBe("92.13(31) meV");
    expect(formatEnergy({ value: 47e-6, sigma: 0.9e-6, low: null, high: null })).toBe("47.0(9) µeV");
    expect(energyUnit(0).name).toBe("eV");
    expect(energyUnit(null).name).toBe("eV");
  });
});

describe("probabilities and chi squares", () => {
  it("that are a matter of rounding are not printed to their digits", () => {
    expect(probabilityInWords(0)).toBe("p < 1e-16");
    expect(probabilityInWords(0.4217)).toBe("p = 0.42");
    expect(probabilityInWords(null)).toBe("p not determined");
    expect(formatProbability(1e-30)).toBe("< 1e-16");
    expect(formatChiSquare(1.9e-20, 0)).toBe("0");
    expect(formatChiSquare(8.95, 7)).toBe("8.95");
  });
});

describe("bare numbers", () => {
  it("have as many digits as asked, and words where there is no number", () => {
    expect(formatNumber(1.00002794)).toBe("1");
    expect(formatNumber(41234.5, 3)).toBe("41200");
    expect(formatNumber(3e-13, 2)).toBe("3 × 10⁻¹³");
    expect(formatNumber(null)).toBe("not determined");
    expect(formatNumber(-0)).toBe("0");
  });
});
