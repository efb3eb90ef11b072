import { describe, expect, it } from "vitest";
import { lineCurve } from "../../../app/analysis/index.ts";
import {
  curvesFromCsv,
  curvesToCsv,
  CURVES_CSV_MARK,
  reportContents,
  seriesCurvesFromCsv,
  seriesCurvesToCsv,
  SERIES_CURVES_CSV_MARK,
} from "../../../app/report/index.ts";
import { makeResult } from "../../main/make-result.ts";
import { samplePower } from "../../renderer/power-sample.ts";

const energy_eV = Float64Array.of(2.14, 2.168, 2.1682, 2.17, 2.173);
const curves = {
  unit: "1/cm" as const,
  energy_eV,
  signal: Float64Array.of(1, 2, 3.25, 1 / 3, 5),
  sigma: energy_eV.map(() => 0.1),
  used: Uint8Array.of(1, 1, 1, 1, 0),
  model: Float64Array.of(1, 2, 3, 0.3, NaN),
  background: Float64Array.of(0.5, 0.5, 0.5, 0.5, NaN),
  tail: null,
  residual: Float64Array.of(0, 0, 2.5, 1 / 3, NaN),
  lines: [],
};

describe("fitted curves as CSV", () => {
  const result = makeResult();
  const text = curvesToCsv(curves, result);

  it("have a row a point and a column a line, in full precision, blank where nothing was fitted", () => {
    const rows = text
      .trimEnd()
      .split("\r\n")
      .map((row) => row.split(","));
    expect(text.startsWith(CURVES_CSV_MARK)).toBe(true);
    expect(rows[0]!.slice(8)).toEqual(["line n = 5", "line n = 6", "line n = 7"]);
    expect(rows[4]![1]).toBe(String(1 / 3));
    expect(rows[5]!.slice(3)).toEqual(["0", "", "", "", "", "", "", ""]);
  });

  it("are read back bit for bit, and not where they are of other data", () => {
    const back = curvesFromCsv(text, result)!;
    expect(back.energy_eV).toEqual(energy_eV);
    expect(back.signal).toEqual(curves.signal);
    expect(back.residual).toEqual(curves.residual);
    const other = { ...result, reading: { ...result.reading, range_eV: [2.14, 2.18] as [number, number] } };
    expect(curvesFromCsv(text, other)).toBeNull();
    expect(curvesFromCsv("a,b\n1,2\n", result)).toBeNull();
    expect(curvesFromCsv("", result)).toBeNull();
  });

  it("give each line by its formula", () => {
    const line = result.lines[0]!;
    const [e0, g, a, q] = [
      line.energy_eV.value!,
      line.width_eV.value! / 2,
      line.area.value!,
      line.asymmetry.value!,
    ];
    const values = lineCurve(result, line, energy_eV)!;
    energy_eV.forEach((energy, i) => {
      const x = energy - e0;
      // Derived: A/pi [g + 2 q (E - E_n)]/[(E - E_n)^2 + g^2]
      expect(values[i]! / (((a / Math.PI) * (g + 2 * q * x)) / (x * x + g * g))).toBeCloseTo(1, 9);
    });
    const none = { value: null, sigma: null, low: null, high: null };
    expect(lineCurve(result, { ...line, width_eV: none }, energy_eV)).toBeNull();
  });
});

describe("the curves of a power series", () => {
  const { result, spectra } = samplePower();

  it("go to CSV spectrum after spectrum and come back bit for bit, and not for other powers", () => {
    const text = seriesCurvesToCsv(spectra, result);
    expect(text.startsWith(SERIES_CURVES_CSV_MARK)).toBe(true);
    const back = seriesCurvesFromCsv(text, result)!;
    expect(back.map(({ power_uW }) => power_uW)).toEqual(spectra.map(({ power_uW }) => power_uW));
    back.forEach((one, i) => {
      const { energy_eV, signal, model, background, residual } = spectra[i]!.curves;
      expect(one.curves).toEqual({ energy_eV, signal, model, background, residual });
    });
    const fewer = { ...result, power: { ...result.power!, spectra: result.power!.spectra.slice(1) } };
    expect(seriesCurvesFromCsv(text, fewer)).toBeNull();
    expect(seriesCurvesFromCsv(curvesToCsv(curves, result), result)).toBeNull();
  });

  it("are drawn towards the gap, each above the one before by the same offset", () => {
    const run = { version: "0.1.0", node: "v20.0.0", started: "2026-01-02T03:04:05.000Z" };
    const drawn = (series: typeof spectra | null) =>
      reportContents({
        results: [result],
        curves: [null],
        spectra: [series],
        comparison: null,
        run,
      }).samples[0]!.figures.find(({ name }) => name === "spectra-by-power");
    expect(drawn(null)).toBeUndefined();
    // The same spectrum at every power: what is left between two curves is the offset.
    const same = spectra.map(({ power_uW, label }) => ({ power_uW, label, curves: spectra[0]!.curves }));
    const marks = drawn(same)!.panels[0]!.marks;
    const models = marks.filter((mark) => mark.kind === "line").filter((_, i) => i % 2 === 1);
    expect(models).toHaveLength(spectra.length);
    const first = models.map(({ y }) => y[0]!);
    for (let i = 2; i < first.length; i++)
      expect(first[i]! - first[i - 1]!).toBeCloseTo(first[1]! - first[0]!, 9);
    expect(first[1]!).toBeGreaterThan(first[0]!);
    const texts = marks.flatMap((mark) => (mark.kind === "label" ? [mark.text] : []));
    expect(texts).toEqual(expect.arrayContaining(["0.5 µW", "200 µW", "14"]));
  });
});
