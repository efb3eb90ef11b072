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
