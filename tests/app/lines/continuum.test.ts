import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  averagedTail,
  continuum,
  continuumPair,
  linePair,
  type ContinuumEnvelope,
} from "../../../app/lines/index.ts";
import { digamma } from "../../../app/lines/digamma.ts";
import { derivative } from "./differences.ts";

const ENVELOPES = ["allowed-3d", "forbidden-3d", "allowed-2d"] as const;
const NAMES = [
  "absorptive",
  "dispersive",
  "absorptiveByGap",
  "absorptiveByRydberg",
  "absorptiveByBroadening",
  "dispersiveByGap",
  "dispersiveByRydberg",
  "dispersiveByBroadening",
] as const;
type Columns = Record<(typeof NAMES)[number], Float64Array>;

function columns(m: number): Columns {
  return Object.fromEntries(NAMES.map((name) => [name, new Float64Array(m)])) as unknown as Columns;
}

function at(
  energy: number,
  gap: number,
  rydberg: number,
  envelope: ContinuumEnvelope,
  width: number,
): Columns {
  const out = columns(1);
  continuumPair(Float64Array.of(energy), 0, 1, gap, rydberg, envelope, width, out);
  return out;
}

const value = (...args: Parameters<typeof at>): number => at(...args).absorptive[0]!;

/** Unbroadened curve in units of its height at the gap; t = (E - gap)/Ry > 0. */
function elliott(t: number, envelope: ContinuumEnvelope): number {
  const e = Math.exp((-2 * Math.PI) / Math.sqrt(t));
  if (envelope === "allowed-2d") return 1 / (1 + e);
  return (envelope === "forbidden-3d" ? 1 + t : 1) / (1 - e);
}

describe("continuum above the gap", () => {
  test.each(ENVELOPES)(
    "%s without broadening is Elliott's curve above the gap and nothing below",
    (envelope) => {
      for (const t of [1e-4, 0.01, 0.3, 2, 30]) {
        // Derived: Elliott, Phys. Rev. 108, 1384 (1957), divided by its value at the gap, times 1/(2 Ry)
        expect(value(1 + 0.05 * t, 1, 0.05, envelope, 0) / (10 * elliott(t, envelope))).toBeCloseTo(1, 11);
      }
      expect(Math.abs(value(0.99, 1, 0.05, envelope, 0))).toBeLessThan(1e-15);
      // Derived: half height at the edge itself
      expect(value(1, 1, 0.05, envelope, 0)).toBeCloseTo(5, 14);
    },
  );

  test.each([
    // Source: integral of the unbroadened curve times a Lorentzian (half width g) by mpmath 1.3.0 quadrature at 25 digits,
    // with x = (E - gap)/Ry: envelope, g/Ry, x, value in units of 1/(2 Ry)
    ["allowed-3d", 0.01, -1, 0.003413662291437734],
    ["allowed-3d", 0.01, -0.2, 0.01615811140931571],
    ["allowed-3d", 0.01, -0.02, 0.1478478284417227],
    ["allowed-3d", 0.01, 0, 0.5002652569755929],
    ["allowed-3d", 0.01, 0.01, 0.750265791280212],
    ["allowed-3d", 0.01, 0.3, 0.9896907034353631],
    ["allowed-3d", 0.01, 2, 1.01061657690206],
    ["allowed-3d", 0.1, -1, 0.03403200984139409],
    ["allowed-3d", 0.1, -0.02, 0.4398080123518492],
    ["allowed-3d", 0.1, 0.3, 0.9004473796139014],
    ["allowed-3d", 0.1, 2, 0.999038022537624],
    ["allowed-2d", 0.01, -1, 0.003079227430270412],
    ["allowed-2d", 0.01, -0.02, 0.1474519037810027],
    ["allowed-2d", 0.01, 0.01, 0.7498669042325348],
    ["allowed-2d", 0.1, -0.2, 0.1463391299812544],
    ["allowed-2d", 0.1, 0, 0.4986749104679298],
    ["allowed-2d", 0.1, 2, 0.9709538269762749],
  ] as const)(
    "%s with g = %f Ry at x = %f equals the brute-force convolution",
    (envelope, g, x, reference) => {
      expect(Math.abs(value(2 + x * 0.1, 2, 0.1, envelope, 2 * g * 0.1) / 5 - reference)).toBeLessThan(1e-12);
    },
  );

  test("the forbidden form equals a convolution cut off above the gap up to an offset of order G/Ry", () => {
    const g = 1e-3;
    const cut = 1;
    // Substitution t = x + g tan(u) makes the Lorentzian flat.
    const convolve = (x: number): number => {
      const n = 20000;
      const [low, high] = [Math.atan(-x / g), Math.atan((cut - x) / g)];
      const step = (high - low) / n;
      let sum = 0;
      for (let k = 0; k < n; k++) {
        sum += elliott(Math.max(1e-12, x + g * Math.tan(low + (k + 0.5) * step)), "forbidden-3d") * step;
      }
      return sum / Math.PI;
    };
    const offsets = [-0.03, -0.003, 0, 0.002, 0.02].map(
      (x) => value(2 + x * 0.1, 2, 0.1, "forbidden-3d", 2 * g * 0.1) / 5 - convolve(x),
    );
    // Derived: head comment of continuum.ts, below 3 g/Ry, and flat across the edge
    for (const offset of offsets) expect(Math.abs(offset)).toBeLessThan(3 * g);
    expect(Math.max(...offsets) - Math.min(...offsets)).toBeLessThan(0.1 * g);
  });

  test.each([
    ["allowed-3d", (n: number) => 1 / n ** 3, 0],
    ["forbidden-3d", (n: number) => (n * n - 1) / n ** 5, 0],
    ["allowed-2d", (n: number) => 1 / (n - 0.5) ** 3, 0.5],
  ] as const)(
    "%s joins its lines: their sum runs level through the gap in both parts",
    (envelope, strength, shift) => {
      const [gap, rydberg, width] = [2, 0.1, 4e-4];
      const energies = Float64Array.from({ length: 9 }, (_, i) => gap + (i - 4) * 2e-4);
      const total = new Float64Array(9);
      const partner = new Float64Array(9);
      const a = new Float64Array(9);
      const d = new Float64Array(9);
      const last = 400;
      for (let n = 1; n <= last; n++) {
        linePair(energies, 0, 9, gap - rydberg / (n - shift) ** 2, width, 0, a, d);
        for (let i = 0; i < 9; i++) {
          total[i]! += strength(n) * a[i]!;
          partner[i]! += strength(n) * d[i]!;
        }
      }
      const tail = columns(9);
      averagedTail(energies, 0, 9, gap, rydberg, last + 0.5 - shift, width, tail);
      const above = columns(9);
      continuumPair(energies, 0, 9, gap, rydberg, envelope, width, above);
      for (let i = 0; i < 9; i++) {
        // Derived: averaged lines below the gap have the height (1/(2 Ry))(1 + x for p) = 5 (1 + x). Left are the ripple of
        // single lines, 2 exp(-pi G/spacing) = 3e-4 at n = 11, and smooth terms of order G/Ry = 4e-3
        const sum = total[i]! + tail.absorptive[i]! + above.absorptive[i]!;
        const slope = envelope === "forbidden-3d" ? 1 + (energies[i]! - gap) / rydberg : 1;
        expect(Math.abs(sum / (5 * slope) - 1)).toBeLessThan(5e-3);
      }
      const whole = Array.from(partner, (p, i) => p + tail.dispersive[i]! + above.dispersive[i]!);
      // Derived: without the continuum's partner the line's partner would rise by (1/(2 pi Ry)) ln(|u|/g) at the gap, several
      // units; with it the sum is smooth
      expect(Math.max(...whole) - Math.min(...whole)).toBeLessThan(0.1);
    },
  );

  test.each([-0.3, -0.08, 0, 0.05, 1])(
    "lines and continuum of one width make up Tanguy's whole response at x = %f",
    (x) => {
      const y = 0.02;
      const modulus = Math.hypot(x, y);
      const angle = Math.atan2(y, -x) / 2;
      const [kr, ki] = [Math.cos(angle) / Math.sqrt(modulus), Math.sin(angle) / Math.sqrt(modulus)];
      const psi = new Float64Array(4);
      digamma(kr, ki, psi);
      const [a, b] = [2 * Math.PI * kr, 2 * Math.PI * ki];
      const cotangent = -Math.sinh(b) / (Math.cosh(b) - Math.cos(a));
      const whole = 2 * angle - 2 * Math.PI * cotangent - 2 * psi[1]! + ki / (kr * kr + ki * ki);
      let lines = 0;
      for (let n = 1; n <= 5000; n++) {
        const u = x + 1 / (n * n);
        lines += y / (n ** 3 * Math.PI * (u * u + y * y));
      }
      // Source: Tanguy, Phys. Rev. Lett. 75, 4090 (1995): Im{2 ln k - 2 pi cot(pi k) - 2 psi(k) - 1/k}, k = (-z)^(-1/2), z in
      // units of Ry from the gap (from memory); lines weigh 4 pi/n^3 and the continuum 2 pi
      const parts = 4 * Math.PI * lines + 2 * Math.PI * 2 * value(x, 0, 1, "allowed-3d", 2 * y);
      expect(Math.abs(parts / whole - 1)).toBeLessThan(1e-6);
    },
  );

  test("far below the gap only the Lorentzian's wing is left", () => {
    // Derived: linear in the width and positive
    const thin = value(1.9, 2, 0.1, "allowed-3d", 1e-6);
    const thick = value(1.9, 2, 0.1, "allowed-3d", 2e-6);
    expect(thin).toBeGreaterThan(0);
    expect(thick / thin).toBeCloseTo(2, 8);
    expect(thin).toBeLessThan(1e-4);
  });

  test.each(ENVELOPES)("%s has the derivatives that differences show", (envelope) => {
    fc.assert(
      fc.property(
        fc.double({ min: -0.3, max: 0.3, noNaN: true }),
        fc.double({ min: -4, max: -1, noNaN: true }),
        (x, widthExponent) => {
          const [gap, rydberg] = [2, 0.1];
          const width = rydberg * 10 ** widthExponent;
          const e = gap + x * rydberg;
          const all = at(e, gap, rydberg, envelope, width);
          const bend = Math.max(Math.abs(x) * rydberg, width);
          const scale = 10 / bend;
          const pick = (part: "absorptive" | "dispersive", out: Columns): number => out[part][0]!;
          for (const part of ["absorptive", "dispersive"] as const) {
            const byGap = derivative((v) => pick(part, at(e, v, rydberg, envelope, width)), gap, bend / 60);
            const byRydberg = derivative((v) => pick(part, at(e, gap, v, envelope, width)), rydberg, 1e-3);
            const byWidth = derivative(
              (v) => pick(part, at(e, gap, rydberg, envelope, v)),
              width,
              width / 60,
            );
            expect(Math.abs(all[`${part}ByGap`][0]! - byGap) / scale).toBeLessThan(1e-9);
            expect(Math.abs(all[`${part}ByRydberg`][0]! - byRydberg) / 100).toBeLessThan(1e-8);
            expect(Math.abs(all[`${part}ByBroadening`][0]! - byWidth) / (10 / width)).toBeLessThan(1e-9);
          }
        },
      ),
      { seed: 8, numRuns: 200 },
    );
  });

  test("the short form writes the same numbers, with and without places for derivatives", () => {
    const e = Float64Array.of(1.99, 2, 2.01);
    const out = columns(3);
    continuumPair(e, 0, 3, 2, 0.1, "forbidden-3d", 1e-4, out);
    const short = Array.from({ length: 4 }, () => new Float64Array(3));
    continuum(e, 0, 3, 2, 0.1, "forbidden-3d", 1e-4, short[0]!);
    // Derived: same kernel
    expect(short[0]).toEqual(out.absorptive);
    continuum(e, 0, 3, 2, 0.1, "forbidden-3d", 1e-4, short[0]!, short[1], short[2], short[3]);
    expect(short.slice(1)).toEqual([
      out.absorptiveByGap,
      out.absorptiveByRydberg,
      out.absorptiveByBroadening,
    ]);
  });
});

describe("averaged tail", () => {
  test("it equals the sum of overlapping n^-3 lines in both parts", () => {
    const [gap, rydberg, width, first] = [2, 0.1, 3e-5, 40];
    const energies = Float64Array.from({ length: 7 }, (_, i) => gap - 8e-5 + i * 3e-5);
    const sum = [new Float64Array(7), new Float64Array(7)];
    const a = new Float64Array(7);
    const d = new Float64Array(7);
    for (let n = first; n <= 20000; n++) {
      linePair(energies, 0, 7, gap - rydberg / n ** 2, width, 0, a, d);
      for (let i = 0; i < 7; i++) {
        sum[0]![i]! += a[i]! / n ** 3;
        sum[1]![i]! += d[i]! / n ** 3;
      }
    }
    const tail = columns(7);
    averagedTail(energies, 0, 7, gap, rydberg, first - 0.5, width, tail);
    for (let i = 0; i < 7; i++) {
      // Derived: midpoint rule in n, error of order first^-2 of the height 1/(2 Ry) = 5
      expect(Math.abs(sum[0]![i]! - tail.absorptive[i]!)).toBeLessThan(5 / first ** 2);
      expect(Math.abs(sum[1]![i]! - tail.dispersive[i]!)).toBeLessThan(5 / first ** 2);
    }
  });

  test("it has the derivatives that differences show", () => {
    const [gap, rydberg, width, m] = [2, 0.1, 4e-5, 20.5];
    const get = (e: number, g: number, r: number, w: number): Columns => {
      const out = columns(1);
      averagedTail(Float64Array.of(e), 0, 1, g, r, m, w, out);
      return out;
    };
    for (const e of [gap - 1e-3, gap - 1.2e-4, gap, gap + 5e-5]) {
      const all = get(e, gap, rydberg, width);
      for (const part of ["absorptive", "dispersive"] as const) {
        const byGap = derivative((v) => get(e, v, rydberg, width)[part][0]!, gap, 4e-7);
        const byRydberg = derivative((v) => get(e, gap, v, width)[part][0]!, rydberg, 2e-4);
        const byWidth = derivative((v) => get(e, gap, rydberg, v)[part][0]!, width, 4e-7);
        // Derived: central differences; scales height/width and height/rydberg
        expect(Math.abs(all[`${part}ByGap`][0]! - byGap) * width).toBeLessThan(1e-8);
        expect(Math.abs(all[`${part}ByRydberg`][0]! - byRydberg) * 1e-3).toBeLessThan(1e-8);
        expect(Math.abs(all[`${part}ByBroadening`][0]! - byWidth) * width).toBeLessThan(1e-8);
      }
    }
  });
});
