import { symmetric } from "../../../app/base/index.ts";
import type { TemperatureLaw } from "../../../app/protocol/index.ts";
import { seriesFigures } from "../../../app/report/figures/series-figures.ts";
import { temperatureFigures } from "../../../app/report/figures/temperature-figures.ts";
import { describe, expect, it } from "vitest";
import { figureFile, figureToSvg, reportContents, type Figure } from "../../../app/report/index.ts";
import {
  linearAxis,
  linearTicks,
  logarithmicAxis,
  quantumNumberAxis,
} from "../../../app/report/figures/axis.ts";
import { compareSamples } from "../../../app/tasks/index.ts";
import { makeResult } from "../../main/make-result.ts";
import { reportCurves, reportSamples } from "../../support/report-samples.ts";

const RUN = { version: "0.1.0", node: "v20.0.0", started: "2026-01-02T03:04:05.000Z" };

function plot(x: number[], y: (number | null)[]): Figure {
  return {
    name: "plot",
    caption: "A *plot*",
    width_mm: 86,
    height_mm: 60,
    legend: [],
    panels: [
      {
        x: linearAxis("*x* / eV", [0, 10], { pad: 0 }),
        y: linearAxis("*y*", [0, 10], { pad: 0 }),
        marks: [{ kind: "line", x, y, colour: "#000000" }],
        share: 1,
      },
    ],
  };
}

/** End points of the path of a line, in points, from its relative steps. */
function walk(path: string): number[][] {
  const [, startX, startY, rest] = /^M(-?[\d.]+) (-?[\d.]+)l(.*)$/.exec(path)!;
  const steps = (rest!.match(/-?(?:\d+\.?\d*|\.\d+)/g) ?? []).map(Number);
  const out = [[Number(startX), Number(startY)]];
  for (let i = 0; i < steps.length; i += 2) {
    const [x, y] = out.at(-1)!;
    out.push([x! + steps[i]!, y! + steps[i + 1]!]);
  }
  return out;
}

describe("axes", () => {
  it("have ticks at 1, 2 or 5 times a power of ten, written with a true minus", () => {
    // Derived: 0 to 10 in about five steps is a step of 2; -0.3 to 0.3 one of 0.1
    expect(linearTicks(0, 10).map(({ label }) => label)).toEqual(["0", "2", "4", "6", "8", "10"]);
    expect(linearTicks(-0.3, 0.3).map(({ label }) => label)).toEqual([
      "−0.3",
      "−0.2",
      "−0.1",
      "0.0",
      "0.1",
      "0.2",
      "0.3",
    ]);
    expect(linearTicks(2.1400025, 2.1730491).map(({ label }) => label)).toEqual(
      ["2.140", "2.145", "2.150", "2.155", "2.160", "2.165", "2.170"].slice(1),
    );
  });

  it("of one value, of none and of nothing finite still have a range", () => {
    for (const values of [[], [3], [null, NaN], [0]]) {
      const axis = linearAxis("", values);
      expect(axis.high).toBeGreaterThan(axis.low);
      const logarithmic = logarithmicAxis("", values);
      expect(logarithmic.high).toBeGreaterThan(logarithmic.low);
      expect(logarithmic.low).toBeGreaterThan(0);
    }
  });

  it("of n number what has room and tick the rest", () => {
    const { ticks } = quantumNumberAxis(
      Array.from({ length: 24 }, (_, i) => i + 2),
      "logarithmic",
    );
    expect(ticks).toHaveLength(24);
    expect(ticks[0]!.label).toBe("2");
    expect(ticks.filter(({ label }) => label !== "").length).toBeLessThan(16);
  });
});

describe("a figure as SVG", () => {
  it("has the size of print, a text for readers of the screen, and no more than XML needs", () => {
    const text = figureFile(plot([0, 10], [0, 10]));
    expect(text).toContain('width="86mm" height="60mm"');
    expect(text).toContain('aria-label="A plot"');
    expect(text).not.toMatch(/<script|<style|href/);
  });

  it("draws a line where it belongs, without points that lie on the way, and broken where data are missing", () => {
    const x = Array.from({ length: 101 }, (_, i) => i / 10);
    const straight = /d="(M[^"]*l[^"]*)"/.exec(figureToSvg(plot(x, x)))![1]!;
    const points = walk(straight);
    expect(points.length).toBeLessThan(5);
    // Derived: right and top ends of the panel: 86 mm less the margin of 6 points; the margin above is 5 points
    expect(points.at(-1)![0]).toBeCloseTo((86 * 72) / 25.4 - 6, 0);
    expect(points.at(-1)![1]).toBeCloseTo(5, 0);
    const curve = x.map((value) => 5 + 5 * Math.sin(value));
    const wave = walk(/d="(M[^"]*l[^"]*)"/.exec(figureToSvg(plot(x, curve)))![1]!);
    // Derived: drawn tenths of a point do not add up to more than their own rounding at the end
    const height = points[0]![1]! - 5;
    expect(wave.at(-1)![1]).toBeCloseTo(points[0]![1]! - (height * curve.at(-1)!) / 10, 0);
    const broken = figureToSvg(plot([0, 1, 2, 3], [1, 1, null, 1]));
    expect(broken).toMatch(/d="M[^"M]*"/);
  });

  it("holds nothing that is no number, whatever is missing in the results", () => {
    const results = reportSamples(3);
    const holes = { value: null, sigma: null, low: null, high: null };
    results[1]!.lines[0]!.width_eV = holes;
    results[1]!.lines[1]!.area = holes;
    results[1]!.series!.gap_eV = holes;
    const compared = compareSamples(results, {}, RUN);
    const contents = reportContents({
      results,
      curves: results.map((result) => reportCurves(result, 500)),
      comparison: compared.ok ? compared.value : null,
      run: RUN,
    });
    const figures = [
      ...contents.samples.flatMap((sample) => sample.figures),
      ...contents.comparison!.figures,
    ];
    expect(figures.length).toBeGreaterThan(15);
    for (const figure of figures) expect(figureToSvg(figure)).not.toMatch(/NaN|Infinity|undefined|null/);
  });

  it("names axes as quantity / unit", () => {
    const results = reportSamples(1);
    const [sample] = reportContents({ results, curves: [null], comparison: null, run: RUN }).samples;
    const titles = sample!.figures.flatMap(({ panels }) => panels.flatMap(({ x, y }) => [x.title, y.title]));
    expect(titles).toContain("*Γ*_{n} / µeV");
    expect(titles).toContain("1/(*n* − *δ*)^{2}");
    expect(titles).toContain("(*E*_{n} − law) / µeV");
  });
});

describe("a figure of laws of temperature", () => {
  const parameter = (name: string, unit: string, value: number) => ({
    name,
    unit,
    quantity: symmetric(value, value / 100),
  });
  const law = (
    name: TemperatureLaw["law"],
    parameters: TemperatureLaw["parameters"],
    curve: TemperatureLaw["curve"],
  ): TemperatureLaw => ({
    law: name,
    parameters,
    curve,
    residuals: [0, 1, -1, 0],
    chi2: 1,
    dof: 1,
    p: 0.3,
    aic: 7,
    aic_difference: 0,
    weight: 1,
    stationary: true,
    scaled_by: 1,
  });

  it("draws the laws through what they give", () => {
    const points = [4, 50, 150, 300].map((temperature_K) => ({
      temperature_K,
      value: 1.5,
      sigma: 1e-4,
      file: `${temperature_K}.csv`,
    }));
    const common = { sample: "K1", batch: "K", grid_K: [0, 150, 310] };
    const [gap, width] = temperatureFigures({
      notes: [],
      series: [
        {
          ...common,
          quantity: "gap_eV",
          n: null,
          points,
          preferred: "varshni",
          decided: true,
          laws: [
            law(
              "varshni",
              [
                parameter("gap0", "eV", 1.519),
                parameter("alpha", "eV/K", 5.405e-4),
                parameter("beta", "K", 204),
              ],
              [1.519, null, 1.42],
            ),
          ],
        },
        {
          ...common,
          quantity: "width_eV[5]",
          n: 5,
          points: points.map((point) => ({ ...point, value: 1e-4, sigma: 1e-6 })),
          preferred: null,
          decided: false,
          laws: [
            law(
              "acoustic",
              [parameter("width0", "eV", 1e-4), parameter("acoustic", "eV/K", 1e-7)],
              [1e-4, 1.15e-4, 1.31e-4],
            ),
          ],
        },
      ],
    });
    const lineOf = (figure: Figure): { x: number; y: number } => {
      const mark = figure.panels[0]!.marks[0]!;
      if (mark.kind !== "line") throw new Error("the law comes first");
      const i = mark.x.length - 1;
      return { x: mark.x[i]!, y: mark.y[i]! };
    };
    const last = lineOf(gap!);
    // Derived: the last point of the curve that was given, in eV
    expect(last).toEqual({ x: 310, y: 1.42 });
    const wide = lineOf(width!);
    // Derived: 1.31e-4 eV in ueV
    expect(wide.y).toBeCloseTo(131, 9);
    expect(width!.panels[0]!.y.title).toBe("*Γ*_{5} / µeV");
    for (const figure of [gap!, width!]) expect(figureToSvg(figure)).not.toMatch(/NaN|undefined/);
  });
});

describe("hollow marks", () => {
  it("of widths and areas are the lines outside the range of the law that is drawn", () => {
    const result = makeResult();
    const figures = seriesFigures({
      ...result,
      width_law: { ...result.width_law!, fit_n: [6, 14] },
      strength_law: { ...result.strength_law!, fit_n: [5, 6] },
    });
    const hollow = (name: string): readonly boolean[] | undefined =>
      figures
        .find((figure) => figure.name === name)!
        .panels[0]!.marks.flatMap((mark) => (mark.kind === "points" ? [mark.hollow] : []))[0];
    // Derived: the lines are n = 5, 6, 7
    expect(hollow("widths")).toEqual([true, false, false]);
    expect(hollow("strengths")).toEqual([false, false, true]);
  });
});
