import { describe, expect, it } from "vitest";
import { fitSpectrum, type ModelSpec } from "../../app/fit/index.ts";
import { fixtureJson } from "../support/analyse-bytes.ts";

/** Recorded by tests/reference/scipy_line_fit.py, which also makes the spectra; the versions stand in the file. */
interface Recorded {
  readonly cases: readonly {
    readonly name: string;
    readonly lines: number;
    readonly gaussStd: number;
    readonly sigma: number;
    readonly energy: readonly number[];
    readonly signal: readonly number[];
    readonly start: { readonly energy: readonly number[]; readonly width: readonly number[] };
    readonly parameters: readonly { readonly name: string; readonly value: number; readonly error: number }[];
    readonly chi2: number;
  }[];
}

const recorded = fixtureJson<Recorded>("reference/scipy-line-fit.json");

describe("line spectra fitted by scipy's least_squares and curve_fit", () => {
  it.each(recorded.cases.map((one) => [one.name, one] as const))("come out the same: %s", (_name, one) => {
    const energy = Float64Array.from(one.energy);
    const points = {
      energy,
      signal: Float64Array.from(one.signal),
      sigma: new Float64Array(energy.length).fill(one.sigma),
    };
    const ns = Array.from({ length: one.lines }, (_, j) => j + 1);
    const spec: ModelSpec = {
      ns,
      gaussStd: one.gaussStd,
      asymmetry: "shared",
      tiedLevels: null,
      tail: null,
      background: [0, 1, 2].map((power) => ({
        term: "polynomial",
        name: `b${power}`,
        unit: "1/cm",
        values: energy.map(
          (e) => ((2 * (e - energy[0]!)) / (energy[energy.length - 1]! - energy[0]!) - 1) ** power,
        ),
      })),
    };
    const fit = fitSpectrum(
      points,
      spec,
      {
        lines: ns.map((n, j) => ({ n, energy: one.start.energy[j]!, width: one.start.width[j]! })),
        asymmetry: 0,
        factor: 1,
        reach: new Map(),
      },
      { gradientTolerance: 1e-12, costTolerance: 1e-15 },
    );
    const k = one.lines;
    const own = new Map<string, { value: number; error: number }>();
    const line = (block: number, j: number, word: string, value: number): void => {
      const at = block * k + j;
      own.set(`${word}${j}`, { value, error: Math.sqrt(fit.lines.covariance[at * (4 * k + 1)]!) });
    };
    for (let j = 0; j < k; j++) {
      line(0, j, "energy", fit.lines.energy[j]!);
      line(1, j, "width", fit.lines.width[j]!);
      line(2, j, "area", fit.lines.area[j]!);
    }
    own.set("q", { value: fit.asymmetry.value, error: fit.asymmetry.sigma });
    fit.background.forEach((column, b) => own.set(`b${b}`, { value: column.value, error: column.sigma }));
    // Source: scipy 1.17.1, numpy 2.4.6 (fixtures/reference/scipy-line-fit.json)
    expect(Math.abs(fit.solution.chi2 / one.chi2 - 1)).toBeLessThan(1e-10);
    for (const { name, value, error } of one.parameters) {
      const found = own.get(name)!;
      // Source: the same file; a millionth of a standard error, and the standard error to a ten-thousandth
      expect(Math.abs(found.value - value) / error, name).toBeLessThan(1e-6);
      expect(Math.abs(found.error / error - 1), name).toBeLessThan(1e-4);
    }
  });
});
