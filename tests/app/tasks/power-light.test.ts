import { describe, expect, it } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { analysePower, wordIssue } from "../../../app/tasks/index.ts";
import { RUN, SILENT } from "../../support/analyse-bytes.ts";
import {
  CRYSTAL,
  saturationOf,
  seriesEnergies,
  seriesFile,
  SERIES,
} from "../../support/make-power-series.ts";
import { cleanSignal } from "../../support/make-spectrum.ts";

const THICKNESS_CM = 34e-4;
const SMALL = { ...SERIES, points: 2600, powers_uW: [0.1, 60] };
/** Of the transmittance in per cent. */
const DIGITS = 5;
const STD_OF_FWHM = 0.42466;

/** Transmittance of the series as a slit of this full width averages it, with noise of the light. */
function lightFile(slitFwhm: number, sigma: (energy: number) => number): Uint8Array {
  const random = makeRandom(7);
  const energy = seriesEnergies(SMALL.points);
  const steps = slitFwhm > 0 ? [-3, -2.25, -1.5, -0.75, 0, 0.75, 1.5, 2.25, 3] : [0];
  const signals = SMALL.powers_uW.map((power) => {
    const out = new Float64Array(energy.length);
    let total = 0;
    for (const step of steps) {
      const weight = Math.exp(-0.5 * step * step);
      total += weight;
      const alpha = cleanSignal(
        energy.map((e) => e + step * STD_OF_FWHM * slitFwhm),
        { ...CRYSTAL, share: (n) => 1 / (1 + saturationOf(SMALL, n) * power) },
      );
      alpha.forEach((value, i) => (out[i] = out[i]! + weight * Math.exp(-value * THICKNESS_CM)));
    }
    return out.map((value, i) => 100 * (value / total + sigma(energy[i]!) * random.normal()));
  });
  return seriesFile(SMALL, { energy, signals }, (power) => `T (%) ${power} uW`, DIGITS);
}

function analysed(bytes: Uint8Array, lines: object): SeriesResult {
  const outcome = analysePower(
    {
      files: [{ file: "light.csv", bytes }],
      choices: {
        material: { preset: "cuprous-oxide-yellow-p" },
        signal: { thickness_um: 34 },
        lines,
        power: { draws: 200 },
        uncertainty: { systematic: false, profile: false },
      },
    },
    RUN,
    SILENT,
  );
  if (!outcome.ok) throw new Error(JSON.stringify(outcome.issues.map(wordIssue)));
  return outcome.value.result;
}

type SeriesResult = Extract<ReturnType<typeof analysePower>, { ok: true }>["value"]["result"];

describe("a power series of light", () => {
  it("says how far a slit puts areas and saturations off, within what it does to the area", () => {
    const result = analysed(
      lightFile(60e-6, () => 0.002),
      { slit_fwhm_eV: 60e-6 },
    );
    const text = result.notes.find(({ code }) => code === "power-fit-on-absorption")?.text ?? "";
    const [, n, loss] = /area of n = (\d+) comes out about ([\d.]+) % too small at 0.1 uW/.exec(text) ?? [];
    const line = result.power!.lines.find((one) => one.n === Number(n))!;
    const law = (CRYSTAL.strength * (line.n ** 2 - 1)) / line.n ** 5;
    const measured = 100 * (1 - line.area0.value! / law);
    // Derived: the areas that made the series; the formula is that of a line on its own, whose neighbours here cost as much again
    expect(Number(loss) / measured).toBeGreaterThan(0.5);
    // Derived: as above.
    expect(Number(loss) / measured).toBeLessThan(1.2);
    expect(text).toMatch(/puts S off by at most about [\d.]+ % \(n = \d+, too small\)/);
    expect(text).toContain("the lowest power on its own was fitted on the light");
  });

  it("says how far noisy light puts the logarithm off", () => {
    const { notes } = analysed(
      lightFile(0, (e) => (e > 2.16 ? 0.06 : 0.002)),
      {},
    );
    const text = notes.find(({ code }) => code === "power-fit-on-absorption")?.text ?? "";
    expect(text).toMatch(/noise is up to 1[3-9] % of the transmitted light \(at 2\.1[67]\d+ eV, [\d.]+ uW\)/);
    expect(text).toMatch(/off by about 0\.01\d* in optical depth there/);
  });

  it("has nothing to say of light that is neither averaged nor noisy", () => {
    const { notes } = analysed(
      lightFile(0, () => 0.002),
      {},
    );
    expect(notes.map(({ code }) => code)).not.toContain("power-fit-on-absorption");
  });
});
