import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { findFringes, isSteadyWave } from "../../../app/analysis/fringes.ts";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { cleanSignal, widthOf, type SyntheticSeries } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

/**
 * Light through a plane-parallel crystal of 34 um, written as a file of transmission: alpha of make-spectrum.ts, then Airy's
 * sum over all passes in complex amplitudes (200 of them), whose coherence falls by v from pass to pass.
 */
const yellow = PRESET_CASES[0]!;
const clean: SyntheticSeries = { ...yellow.series, offsets_eV: {} };
const THICKNESS_CM = 34e-4;
const INDEX = 2.95;
const R = ((INDEX - 1) / (INDEX + 1)) ** 2;
const material = { preset: yellow.preset };
const fast = { uncertainty: { systematic: false, profile: false } };
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;

interface Plate {
  readonly period_eV: number;
  readonly coherence: number;
  readonly phase?: number;
  readonly stray?: number;
  readonly sigmaT?: number;
  readonly strength?: number;
  readonly grid?: readonly (readonly [number, number, number])[];
}

/** Passes k = 0, 1, ... have amplitude (1-R) r^(2k) x^(k+1/2) e^(i k phi); different passes interfere by v^|k-l|. */
function throughPlate(x: number, phi: number, v: number): number {
  let sum = 0;
  for (let k = 0; k < 12; k++)
    for (let l = 0; l < 12; l++)
      sum += (1 - R) ** 2 * (R * x) ** (k + l) * x * v ** Math.abs(k - l) * Math.cos((k - l) * phi);
  return sum;
}

function bytesOf(plate: Plate, seed: number): Uint8Array {
  const random = makeRandom(seed);
  const energies: number[] = [];
  for (const [from, to, count] of plate.grid ?? yellow.sampling.grid)
    for (let j = 0; j < count; j++) energies.push(from + ((j + 0.5) * (to - from)) / count);
  const energy = Float64Array.from(energies);
  const scale = plate.strength ?? 1;
  const alpha = cleanSignal(energy, clean);
  const sigmaT = plate.sigmaT ?? 0.002;
  const s = plate.stray ?? 0;
  const rows = Array.from(energy, (e, i) => {
    const phi = (2 * Math.PI * (e - 2.15)) / plate.period_eV + (plate.phase ?? 0.4);
    const x = Math.exp(-THICKNESS_CM * scale * alpha[i]!);
    const T = plate.coherence < 0 ? (1 - R) ** 2 * x : throughPlate(x, phi, plate.coherence);
    const read = (T + s) / (1 + s) + sigmaT * random.normal();
    return `${e.toFixed(8)},${read.toFixed(6)},${sigmaT}`;
  });
  return new TextEncoder().encode(["Photon energy (eV),Transmission,sigma", ...rows, ""].join("\n"));
}

const signal = {
  thickness_um: 34,
  quantity: "transmittance",
  surface: { model: "single", index: INDEX },
};

function expectSeries(result: RunglineResult): void {
  expect(result.status).toBe("converged");
  // Derived: 4 standard errors, the project's bar.
  for (const key of KEYS) expect(Math.abs(pullOf(result.series![key], clean[key])), key).toBeLessThan(4);
}

const rowOf = (result: RunglineResult, name: string): RunglineResult["background"][number]["quantity"] =>
  result.background.find((one) => one.name === name)!.quantity;

describe("fringes of a plate", () => {
  // Derived: hc/(2 n_g d) with n_g d = 103 um.
  const period_eV = 0.00602;
  const bytes = bytesOf({ period_eV, coherence: 0.6 }, 1);

  test("not asked for: a note says that they are there, and their period", () => {
    const result = resultOf(bytes, { material, ...fast, signal });
    const right = KEYS.every((key) => Math.abs(pullOf(result.series![key], clean[key])) < 4);
    const said = doubtsOf(result);
    expect(said).toContain("fringes-seen");
    expect(said).toContain("low-n-coherent");
    expect(right || said.includes("misfit")).toBe(true);
    const note = result.notes.find(({ code }) => code === "fringes-seen")!;
    const told = Number(/period ([\d.]+) meV/.exec(note.text)![1]);
    expect(Math.abs(told / 1e3 / period_eV - 1)).toBeLessThan(0.1);
  });

  test.each([null, 0.0061])(
    "asked for with period %s: fitted to the light, with the period as it is",
    (given) => {
      const result = resultOf(bytes, {
        material,
        ...fast,
        signal,
        background: [
          { term: "polynomial", order: 2 },
          { term: "square-root", onset_eV: 2.0464 },
          // This light is made with an index that the lines do not change.
          { term: "fringes", period_eV: given, phase: "constant" },
        ],
      });
      expect(result.fit!.domain).toBe("transmittance");
      expectSeries(result);
      expect(Math.abs(pullOf(rowOf(result, "fringe_period"), period_eV))).toBeLessThan(4);

      expect(doubtsOf(result)).not.toContain("misfit");
      expect(result.notes.find(({ code }) => code === "fringes-fitted")!.text).toMatch(/n_g d = 10[23]/);
    },
  );
});

describe("weak fringes on weak lines", () => {
  test("are added to the absorption, their period from the same fit", () => {
    const period_eV = 0.0045;
    const bytes = bytesOf({ period_eV, coherence: 0.05, strength: 0.06, sigmaT: 0.0002 }, 2);
    const result = resultOf(bytes, {
      material,
      ...fast,
      signal,
      background: [{ term: "polynomial", order: 2 }, { term: "fringes" }],
    });
    expect(result.fit!.domain).toBe("alpha");
    expectSeries(result);
    const found = rowOf(result, "fringe_period");
    expect(Math.abs(pullOf(found, period_eV))).toBeLessThan(4);
    // Derived: a wave of amplitude a = 2 v R x = 0.02 in noise s = 0.0003 on m = 3500 points over W = 35 meV has
    // sigma_P = P^2/W sqrt(24/m) s/(2 pi a) = 0.1 ueV, if nothing else is fitted; lines cost a few times that.
    expect(found.sigma!).toBeGreaterThan(0.1e-6);
    expect(found.sigma!).toBeLessThan(1e-6);
    expect(doubtsOf(result)).not.toContain("fringes-additive");
  });
});

describe("stray light", () => {
  const strength = 4;
  const s = 0.02;
  const plate: Plate = { period_eV: 1, coherence: -1, stray: s, strength };
  const bytes = bytesOf(plate, 3);
  const areaPull = (result: RunglineResult, n: number): number =>
    pullOf(
      result.lines.find((line) => line.n === n)!.area,
      (strength * clean.strength * (n * n - 1)) / n ** 5,
    );

  test.each(["free", s] as const)(
    "%s: saturated lines keep their area, and the series is right",
    (stray_light) => {
      const result = resultOf(bytes, { material, ...fast, signal: { ...signal, stray_light } });
      expect(result.fit!.domain).toBe("transmittance");
      expectSeries(result);
      for (const n of [2, 3, 4]) {
        expect(Math.abs(areaPull(result, n)), `n = ${n}`).toBeLessThan(4);
        const width = result.lines.find((line) => line.n === n)!.width_eV;
        expect(Math.abs(pullOf(width, widthOf(clean, n))), `n = ${n}`).toBeLessThan(4);
      }
      expect(doubtsOf(result)).not.toContain("misfit");
      if (stray_light === "free") expect(Math.abs(pullOf(rowOf(result, "stray"), s))).toBeLessThan(4);
    },
  );

  test("not said: the misfit is", () => {
    const result = resultOf(bytes, { material, ...fast, signal });
    const right = KEYS.every((key) => Math.abs(pullOf(result.series![key], clean[key])) < 4);
    expect(right && Math.abs(areaPull(result, 2)) < 4 ? [] : doubtsOf(result)).toEqual(
      right && Math.abs(areaPull(result, 2)) < 4 ? [] : expect.arrayContaining(["misfit"]),
    );
  });

  test("none: light below its noise, and below zero, biases nothing; free stray light ends near zero", () => {
    const dark = bytesOf({ ...plate, stray: 0 }, 4);
    for (const stray_light of [null, "free"] as const) {
      const result = resultOf(dark, { material, ...fast, signal: { ...signal, stray_light } });
      expectSeries(result);
      for (const n of [2, 3, 4]) expect(Math.abs(areaPull(result, n)), `n = ${n}`).toBeLessThan(4);
      if (stray_light === "free") expect(rowOf(result, "stray").value!).toBeLessThan(0.002);
    }
  });
});

describe("a wave in residuals", () => {
  const energy = Float64Array.from({ length: 6000 }, (_, i) => 2.14 + (0.033 * i) / 5999);
  const noise = (seed: number): Float64Array => {
    const random = makeRandom(seed);
    return energy.map(() => random.normal());
  };
  const passes = (residuals: Float64Array): boolean => {
    const seen = findFringes(energy, residuals);
    return seen !== null && isSteadyWave(energy, residuals, seen);
  };

  test("through the whole window counts as fringes, however weak", () => {
    for (let seed = 1; seed <= 5; seed++)
      for (const period of [0.0005, 0.002, 0.006])
        // Derived: an amplitude of 0.3 gains 270 in chi square, and no other period gains as much
        expect(
          passes(
            noise(seed).map((value, i) => value + 0.3 * Math.cos((2 * Math.PI * energy[i]!) / period + seed)),
          ),
        ).toBe(true);
  });

  test.each([
    ["a step", (u: number) => (u > 0.3 ? 1 : -0.4)],
    ["an edge that does not fit", (u: number) => 6 * Math.exp(-(((u - 0.97) / 0.01) ** 2))],
    [
      "one line that does not fit",
      (u: number) => 8 * ((u - 0.4) / 0.02) * Math.exp(-(((u - 0.4) / 0.02) ** 2)),
    ],
    [
      "a background that is too stiff",
      (u: number) => 3 * (5 * (2 * u - 1) ** 3 - 3 * (2 * u - 1)) + 2 * Math.sin(7 * u),
    ],
    ["noise", () => 0],
  ])("%s is none", (_, misfit) => {
    for (let seed = 1; seed <= 10; seed++)
      expect(passes(noise(seed).map((value, i) => value + misfit(i / 5999)))).toBe(false);
  });
});
