import { readFileSync } from "node:fs";
import { describe, expect, test } from "vitest";
import { dawson, faddeeva, linePair, voigt, voigtFwhm } from "../../app/lines/index.ts";

interface Row {
  readonly kind: string;
  readonly x: string;
  readonly y: string;
  readonly re: string;
  readonly im: string;
  readonly rest: string;
}

function read(path: string): Row[] {
  const lines = readFileSync(new URL(`../../fixtures/${path}`, import.meta.url), "utf8")
    .trim()
    .split("\n");
  return lines
    .filter((line) => !line.startsWith("#"))
    .slice(1)
    .map((line) => {
      const [kind, x, y, re, im, ...rest] = line.split(",");
      return { kind: kind!, x: x!, y: y!, re: re!, im: im ?? "", rest: rest.join(",") };
    });
}

/** Significant digits as printed; a whole 0 or 1 without decimals is exact. */
function digitsOf(text: string): number {
  const mantissa = text.toLowerCase().split("e")[0]!.replace(/[-.]/g, "").replace(/^0+/, "");
  return mantissa.length;
}

/** Half of the last printed digit. */
function halfDigit(text: string): number {
  const [mantissa, exponent] = text.toLowerCase().split("e");
  const decimals = mantissa!.split(".")[1]?.length ?? 0;
  return 0.5 * Math.pow(10, Number(exponent ?? 0) - decimals);
}

function w(x: number, y: number): { re: number; im: number } {
  const out = new Float64Array(2);
  faddeeva(x, y, out);
  return { re: out[0]!, im: out[1]! };
}

const rows = read("reference/faddeeva.csv");
const full = (row: Row): boolean => Math.max(digitsOf(row.re), digitsOf(row.im)) >= 15;
const tested = new Set<string>();
const rowsOf = (kind: RegExp): Row[] => {
  const found = rows.filter((row) => kind.test(row.kind));
  for (const row of found) tested.add(row.kind);
  return found;
};
const settings = (kind: string): { sigma: number; gamma: number } => {
  const match = /sigma=([^;]+);gamma_hwhm=([^)]+)\)/.exec(kind)!;
  return { sigma: Number(match[1]), gamma: Number(match[2]) };
};

describe("complex error function against the reference table", () => {
  const all = rowsOf(/^w$/);
  test.each(all.filter(full))("w($x, $y) agrees to 1e-13, each component to 1e-12", (row) => {
    const value = w(Number(row.x), Number(row.y));
    const [re, im] = [Number(row.re), Number(row.im)];
    // Source: fixtures/reference/faddeeva.csv, digits as printed there
    expect(Math.hypot(value.re - re, value.im - im) / Math.hypot(re, im)).toBeLessThan(1e-13);
    // A part that underflows in the table (1e-1086) has only an absolute error.
    expect(Math.abs(value.re - re)).toBeLessThanOrEqual(1e-12 * Math.abs(re) + 1e-307);
    expect(Math.abs(value.im - im)).toBeLessThanOrEqual(1e-12 * Math.abs(im) + 1e-307);
  });
  test.each(all.filter((row) => !full(row)))(
    "w($x, $y) agrees to half the last digit of a rounded row",
    (row) => {
      const value = w(Number(row.x), Number(row.y));
      // Source: Abramowitz and Stegun (1964), Table 7.9, six decimals (quoted from memory in the fixture)
      expect(Math.abs(value.re - Number(row.re))).toBeLessThanOrEqual(halfDigit("0.000000"));
      expect(Math.abs(value.im - Number(row.im))).toBeLessThanOrEqual(halfDigit("0.000000"));
    },
  );
});

/** Zero of a function between two points of opposite sign, by bisection. */
function root(f: (x: number) => number, low: number, high: number): number {
  let [a, b] = [low, high];
  const sign = Math.sign(f(a));
  for (let i = 0; i < 200; i++) {
    const middle = (a + b) / 2;
    if (Math.sign(f(middle)) === sign) a = middle;
    else b = middle;
  }
  return (a + b) / 2;
}

describe("Dawson's integral against the reference table", () => {
  // F' = 1 - 2 x F and F'' = -2 F - 2 x F'.
  const slope = (x: number): number => 1 - 2 * x * dawson(x);
  const bend = (x: number): number => -2 * dawson(x) - 2 * x * slope(x);
  const maximum = root(slope, 0.5, 1.4);
  const inflection = root(bend, 1.2, 2);
  const found: Record<string, number> = {
    dawson_x_max: maximum,
    dawson_F_max: dawson(maximum),
    dawson_x_inflection: inflection,
    dawson_F_inflection: dawson(inflection),
  };
  test.each(rowsOf(/^dawson/))("$kind agrees with the table and with its computed value", (row) => {
    const value = found[row.kind]!;
    const computed = /computed value ([0-9.]+)/.exec(row.rest)![1]!;
    // Source: fixtures/reference/faddeeva.csv, status column (mpmath), 16 digits
    expect(Math.abs(value / Number(computed) - 1)).toBeLessThan(1e-14);
    // Source: Abramowitz and Stegun (1964), 7.1.17 and Table 7.5, ten digits; 1.5019752682(69) is cut, not rounded,
    // as the fixture's note warns, so a row must equal our value either rounded or cut at its last digit.
    const rounded = value.toFixed(10);
    const cut = value.toFixed(13).slice(0, 12);
    expect([rounded, cut]).toContain(row.re);
  });
});

describe("Voigt profile against the reference table", () => {
  test.each(rowsOf(/^voigt\(/))("$kind at $x agrees to 1e-13 in both parts", (row) => {
    const { sigma, gamma } = settings(row.kind);
    const [x, re, im] = [Number(row.x), Number(row.re), Number(row.im)];
    const absorptive = new Float64Array(1);
    const dispersive = new Float64Array(1);
    linePair(Float64Array.of(x), 0, 1, 0, 2 * gamma, sigma, absorptive, dispersive);
    // Source: fixtures/reference/faddeeva.csv (mpmath), 17 digits
    expect(Math.abs(voigt(x, sigma, gamma) - re)).toBeLessThanOrEqual(1e-13 * re);
    expect(Math.abs(absorptive[0]! - re)).toBeLessThanOrEqual(1e-13 * re);
    expect(Math.abs(dispersive[0]! - im)).toBeLessThanOrEqual(1e-13 * Math.abs(im));
  });
  test.each(rowsOf(/^voigt_fwhm/))("$kind agrees to half its last digit", (row) => {
    const { sigma, gamma } = settings(row.kind);
    // Source: fixtures/reference/faddeeva.csv (mpmath), 15 digits
    expect(Math.abs(voigtFwhm(sigma, gamma) - Number(row.re))).toBeLessThanOrEqual(halfDigit(row.re) * 1.01);
  });
});

test("no kind of row in the reference table is left untested", () => {
  expect(new Set(rows.map((row) => row.kind))).toEqual(tested);
  // Derived: lines of the file less four comments and the header
  expect(rows.length).toBe(150);
});

describe("complex error function at scattered points", () => {
  const points = read("generated/faddeeva-points.csv");
  test.each(["box", "axis", "origin", "ring", "real", "far", "lower"])(
    "region %s holds its accuracy",
    (region) => {
      const here = points.filter((row) => row.kind === region);
      expect(here.length).toBeGreaterThan(30);
      let whole = 0;
      let component = 0;
      for (const row of here) {
        const value = w(Number(row.x), Number(row.y));
        const [re, im] = [Number(row.re), Number(row.im)];
        whole = Math.max(whole, Math.hypot(value.re - re, value.im - im) / Math.hypot(re, im));
        component = Math.max(component, Math.abs(value.re - re) / Math.abs(re) || 0);
        component = Math.max(component, Math.abs(value.im - im) / Math.abs(im) || 0);
      }
      // Source: fixtures/generated/faddeeva-points.csv (mpmath), 18 digits; the bars are the claims in faddeeva.ts
      expect(whole).toBeLessThan(1e-14);
      expect(component).toBeLessThan(1e-12);
    },
  );
});

describe("complex error function at the edges of its domain", () => {
  test("w keeps its symmetry w(-conj z) = conj w(z) to the last bit", () => {
    for (const [x, y] of [
      [0.3, 0.2],
      [5, 1e-9],
      [40, 3],
      [1e40, 1],
    ] as const) {
      const right = w(x, y);
      const left = w(-x, y);
      // Derived: DLMF 7.4.3
      expect(left.re).toBe(right.re);
      expect(left.im).toBe(-right.im);
    }
  });
  test("w falls as i/(sqrt(pi) z) out to the largest numbers", () => {
    const value = w(3e200, 4e200);
    // Derived: i/(sqrt(pi) z) with |z| = 5e200
    expect(value.re * 5e200).toBeCloseTo(0.8 / Math.sqrt(Math.PI), 14);
    expect(value.im * 5e200).toBeCloseTo(0.6 / Math.sqrt(Math.PI), 14);
  });
  test("NaN in gives NaN out", () => {
    expect(w(Number.NaN, 1).re).toBeNaN();
    expect(w(1, Number.NaN).re).toBeNaN();
  });
  test("the joints between the rules cannot be seen", () => {
    for (const r2 of [60, 230, 900, 2e4, 1e9]) {
      for (const angle of [0.05, 0.7, 1.5]) {
        const below = Math.sqrt(r2) * (1 - 1e-15);
        const above = Math.sqrt(r2) * (1 + 1e-15);
        const a = w(below * Math.cos(angle), below * Math.sin(angle));
        const b = w(above * Math.cos(angle), above * Math.sin(angle));
        // Derived: w is continuous; 2e-15 of argument moves it by less than 1e-14
        expect(Math.abs(a.re / b.re - 1)).toBeLessThan(1e-14);
        expect(Math.abs(a.im / b.im - 1)).toBeLessThan(1e-14);
      }
    }
  });
});
