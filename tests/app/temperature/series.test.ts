import { describe, expect, it } from "vitest";
import { symmetric } from "../../../app/base/index.ts";
import { phononWidth, varshni } from "../../../app/laws/index.ts";
import type { RunglineResult } from "../../../app/protocol/index.ts";
import { temperatureSeriesOf } from "../../../app/temperature/index.ts";
import { makeLine, makeResult } from "../../main/make-result.ts";

const SAMPLE = { sample: "K1", batch: "K" };
const TEMPERATURES = [5, 30, 60, 90, 120, 150];

function at(temperature_K: number): { result: RunglineResult; temperature_K: number } {
  const out = new Float64Array(5);
  varshni(temperature_K, 2.172, 4e-4, 200, out);
  const gap = out[0]!;
  phononWidth(temperature_K, 1e-4, 0, 5e-3, 13.6e-3, out);
  const base = makeResult();
  return {
    temperature_K,
    result: makeResult({
      series: { ...base.series!, gap_eV: symmetric(gap, 2e-6) },
      lines: [
        { ...makeLine(2, gap - 0.02, out[0]!), width_eV: symmetric(out[0]!, 1e-6) },
        ...(temperature_K < 50 ? [makeLine(9, gap - 0.001, 1e-4)] : []),
      ],
    }),
  };
}

describe("a series of temperatures", () => {
  it("gives the laws of the gap and of each line that is there often enough", () => {
    const { series } = temperatureSeriesOf(TEMPERATURES.map(at), SAMPLE, false, 1);
    expect(series.map((one) => one.quantity)).toStrictEqual(["gap_eV", "width_floor_eV", "width_eV[2]"]);
    const [gap, , width] = series;
    expect(gap).toMatchObject({ preferred: "varshni", decided: true });
    // Derived: the curve's own parameters, without noise
    expect(gap!.laws[0]!.parameters.map(({ quantity }) => quantity.value)).toEqual([
      expect.closeTo(2.172, 8),
      expect.closeTo(4e-4, 8),
      expect.closeTo(200, 3),
    ]);
    expect(width!.preferred).toBe("optical");
    expect(gap).toMatchObject({ sample: "K1", batch: "K" });
    const [varshniLaw] = gap!.laws;
    const out = new Float64Array(5);
    varshni(gap!.grid_K.at(-1)!, 2.172, 4e-4, 200, out);
    // Derived: the curve's own law where the drawn one ends
    expect(varshniLaw!.curve.at(-1)).toBeCloseTo(out[0]!, 8);
  });

  it("adds the systematic part of the gap where total errors count", () => {
    const sigma = (systematic: boolean): number =>
      temperatureSeriesOf(TEMPERATURES.map(at), SAMPLE, systematic, 1).series[0]!.points[0]!.sigma;
    expect(sigma(false)).toBe(2e-6);
    // Derived: 2e-6 and 2e-5 in quadrature
    expect(sigma(true)).toBeCloseTo(Math.hypot(2e-6, 2e-5), 12);
  });

  it("says where there are too few temperatures, or too short a range", () => {
    const codes = (temperatures: readonly number[]): string[] =>
      temperatureSeriesOf(temperatures.map(at), SAMPLE, false, 1).notes.map((note) => note.code);
    expect(codes([5, 30, 60])).toContain("temperatures-few");
    expect(codes([5, 6, 7, 8, 9])).toContain("temperature-range-short");
    expect(codes(TEMPERATURES)).not.toContain("temperature-range-short");
  });
});
