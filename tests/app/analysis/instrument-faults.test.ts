import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { doubtsOf, pullOf, resultOf } from "../../support/analyse-bytes.ts";
import { cleanSignal, type SyntheticSeries } from "../../support/make-spectrum.ts";
import { PRESET_CASES } from "../../support/presets.ts";

/** What instruments write beside a spectrum: transmissions of a yellow series, with one fault each. */
const yellow = PRESET_CASES[0]!;
const series: SyntheticSeries = { ...yellow.series, offsets_eV: {} };
const choices = {
  material: { preset: yellow.preset },
  signal: { thickness_um: 34, quantity: "transmittance" },
  uncertainty: { systematic: false, profile: false },
};
const POINTS = 8000;
const energy = Float64Array.from({ length: POINTS }, (_, i) => 2.14 + (0.0335 * i) / (POINTS - 1));
const clean = cleanSignal(energy, series).map((alpha) => Math.exp(-34e-4 * alpha));
const KEYS = ["gap_eV", "rydberg_eV", "defect0"] as const;

function noisy(sigma: number, seed: number, from = clean): Float64Array {
  const random = makeRandom(seed);
  return from.map((T) => T + sigma * random.normal());
}

function file(T: Float64Array, digits = 6): Uint8Array {
  const rows = Array.from(energy, (E, i) => `${E.toFixed(7)},${T[i]!.toFixed(digits)}`);
  return new TextEncoder().encode(["Photon energy (eV),Transmission", ...rows, ""].join("\n"));
}

function worstPull(result: RunglineResult): number {
  return Math.max(...KEYS.map((key) => Math.abs(pullOf(result.series![key], series[key]))));
}

describe("noise that neighbours share", () => {
  test("the mean of three neighbours has its series, with errors that allow for it, and says so", () => {
    const raw = noisy(0.003, 1);
    const mean = raw.map(
      (_, i) => (raw[Math.max(0, i - 1)]! + raw[i]! + raw[Math.min(POINTS - 1, i + 1)]!) / 3,
    );
    const result = resultOf(file(mean), choices);
    expect(doubtsOf(result)).toContain("noise-correlated");
    expect(worstPull(result)).toBeLessThan(4);
  });

  test("every third point measured and the rest interpolated: the same", () => {
    const raw = noisy(0.002, 2);
    const between = raw.map((_, i) => {
      const left = i - (i % 3);
      const right = Math.min(left + 3, POINTS - 1);
      const part = right === left ? 0 : (i - left) / (right - left);
      return raw[left]! + part * (raw[right]! - raw[left]!);
    });
    const result = resultOf(file(between), choices);
    expect(doubtsOf(result)).toContain("noise-correlated");
    expect(worstPull(result)).toBeLessThan(4);
  });
});

describe("readings that no light made", () => {
  const spikes: readonly (readonly [number, number])[] = [
    [3000, 1.5],
    [5000, -0.3],
    [7000, 5],
  ];

  test("spikes and a dead stretch are named with their lines and left out; the series is right", () => {
    const T = noisy(0.001, 3);
    for (const [i, value] of spikes) T[i] = value;
    T.fill(0, 4000, 4020);
    const result = resultOf(file(T), choices);
    const text = (code: string): string => result.notes.find((note) => note.code === code)!.text;
    // Derived: point i stands in line i + 2, below one line of header
    for (const [i, value] of spikes)
      expect(text("isolated-readings")).toContain(
        `line ${i + 2} (${energy[i]!.toFixed(6)} eV, T = ${value})`,
      );
    expect(text("dead-readings")).toContain("lines 4002 to 4021");
    expect(doubtsOf(result)).not.toContain("misfit");
    expect(worstPull(result)).toBeLessThan(4);
    // Derived: all points but the 3 spikes and the 20 dead ones, some of them outside the fitted window
    expect(result.reading.used_points).toBeLessThanOrEqual(POINTS - 23);
  });

  test("noise.faulty_points=keep fits them, and gives the masks", () => {
    const T = noisy(0.001, 3);
    T[5000] = 1.5;
    const result = resultOf(file(T), { ...choices, noise: { faulty_points: "keep" } });
    const note = result.notes.find(({ code }) => code === "isolated-readings")!;
    const mask = JSON.parse(/mask_eV=(\[\[.*?\]\])/.exec(note.remedy)![1]!) as [number, number][];
    expect(mask).toHaveLength(1);
    expect(energy.filter((E) => E >= mask[0]![0] && E <= mask[0]![1])).toEqual(energy.slice(5000, 5001));
    expect(doubtsOf(result)).toContain("misfit");
  });

  test("an absorbance that stops at 2 is masked around its limit, and the series is right", () => {
    const strong = cleanSignal(energy, series).map((alpha) => 160e-4 * Math.LOG10E * alpha);
    const random = makeRandom(4);
    const rows = Array.from(
      energy,
      (E, i) => `${E.toFixed(7)},${Math.min(2, strong[i]! + 0.004 * random.normal()).toFixed(4)}`,
    );
    const bytes = new TextEncoder().encode(["Photon energy (eV),Absorbance", ...rows, ""].join("\n"));
    const result = resultOf(bytes, { ...choices, signal: { thickness_um: 160 } });
    const cut = Array.from(strong).filter((value) => value > 2).length;
    // Derived: the spectrum was made to go beyond the limit
    expect(cut).toBeGreaterThan(100);
    expect(result.notes.find(({ code }) => code === "clipped-readings")!.text).toContain("reading 2,");
    expect(doubtsOf(result)).not.toContain("misfit");
    expect(worstPull(result)).toBeLessThan(4);
  });
});

describe("light beside the sample", () => {
  test("not said, it is offered with its part, and the misfit is said to follow from it", () => {
    const deep = cleanSignal(energy, series).map((alpha) => (Math.exp(-100e-4 * alpha) + 0.03) / 1.03);
    const result = resultOf(file(noisy(0.0007, 5, deep)), { ...choices, signal: { thickness_um: 100 } });
    const note = result.notes.find(({ code }) => code === "stray-light-seen")!;
    // Derived: made with 3 %
    expect(Math.abs(Number(/with ([\d.]+) %/.exec(note.text)![1]) - 3)).toBeLessThan(0.3);
    expect(result.notes.find(({ code }) => code === "misfit")!.text).toContain("stray-light-seen");
  });
});
