import { expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { DEFAULT_PROTOCOL } from "../../../app/protocol/index.ts";
import { readSpectrum, type Spectrum } from "../../../app/spectrum/index.ts";
import { readTable } from "../../../app/table/index.ts";

const GAIN = 2.4;
const READ = 6;

/** Sample, reference and dark with shot and read noise of their own; T falls from 0.8 to 0.05. */
function countsFile(seed: number, accumulations: number, points = 400): { bytes: Uint8Array; T: number[] } {
  const random = makeRandom(seed);
  const draw = (mean: number): number =>
    mean + Math.sqrt((mean / GAIN + READ * READ) / accumulations) * random.normal();
  const T: number[] = [];
  const rows = Array.from({ length: points }, (_, i) => {
    const t = 0.8 - (0.75 * i) / (points - 1);
    T.push(t);
    const light = 20000 - 2 * i;
    const zero = 300;
    return [2 + i * 1e-4, draw(zero + t * light), draw(zero + light), draw(zero)]
      .map((value) => value.toFixed(4))
      .join(",");
  });
  const text = ["Photon energy (eV),Sample (counts),Reference (counts),Dark (counts)", ...rows, ""].join(
    "\n",
  );
  return { bytes: new TextEncoder().encode(text), T };
}

function read(bytes: Uint8Array, noise: object): Spectrum {
  const table = readTable("counts.csv", bytes);
  if (!table.ok) throw new Error(JSON.stringify(table.issues));
  const choices = { ...DEFAULT_PROTOCOL, noise: { ...DEFAULT_PROTOCOL.noise, ...noise } };
  const spectrum = readSpectrum(table.value, "", choices);
  if (!spectrum.ok) throw new Error(JSON.stringify(spectrum.issues));
  return spectrum.value;
}

test.each([1, 16])(
  "readings of counts, %i exposures averaged: pulls of T have width one at every depth",
  (N) => {
    const { bytes, T } = countsFile(5, N, 4000);
    const spectrum = read(bytes, { gain_e_per_count: GAIN, read_counts: READ, accumulations: N });
    const { value, sigma } = spectrum.transmittance!;
    expect(spectrum.quantityRead).toBe("counts");
    for (const [from, to] of [
      [0, 1000],
      [1000, 2000],
      [2000, 3000],
      [3000, 4000],
    ] as const) {
      let sum = 0;
      for (let i = from; i < to; i++) sum += ((value[i]! - T[i]!) / sigma[i]!) ** 2;
      // Derived: chi square of 1000 readings, mean 1, standard deviation sqrt(2/1000) = 0.045; four of these.
      expect(Math.abs(sum / (to - from) - 1)).toBeLessThan(0.18);
    }
  },
);

test("a given sigma goes before the detector's", () => {
  const { bytes } = countsFile(6, 1);
  const spectrum = read(bytes, { sigma: 50, gain_e_per_count: GAIN, read_counts: READ });
  const { value, sigma } = spectrum.transmittance!;
  // Derived: sigma_T = sigma sqrt(1 + T^2)/(F - D), the reference near 20000 at the start.
  expect(sigma[0]! / ((50 * Math.sqrt(1 + value[0]! ** 2)) / 20000)).toBeCloseTo(1, 1);
});
