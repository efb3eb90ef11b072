import { describe, expect, it } from "vitest";
import { NOT_DETERMINED } from "../../app/base/index.ts";
import { ladderFigure } from "../../renderer/ladder/ladder-figure.ts";
import { linesFigure } from "../../renderer/lines/lines-figure.ts";
import { PALETTES } from "../../renderer/plot/colours.ts";
import type { FigureDescription } from "../../renderer/plot/figure-description.ts";
import { readFigure } from "../../renderer/read/read-figure.ts";
import { sampleCurves, sampleInspection, sampleResult } from "./sample.ts";

/** Numbers to nine digits, so that the last bits of a logarithm on another machine change nothing. */
function frozen(figure: FigureDescription): unknown {
  const plain = (value: unknown): unknown => {
    if (typeof value === "number")
      return Number.isFinite(value) ? Number(value.toPrecision(9)) : String(value);
    if (ArrayBuffer.isView(value)) return Array.from(value as Float64Array, plain).join(" ");
    if (Array.isArray(value))
      return value.every((one) => typeof one !== "object") ? value.map(plain).join(" ") : value.map(plain);
    if (typeof value === "object" && value !== null)
      return Object.fromEntries(Object.entries(value).map(([key, one]) => [key, plain(one)]));
    return value;
  };
  return plain(figure);
}

describe("what the figures draw", () => {
  it("stays as it was for a spectrum as read", () => {
    // Frozen: earlier output, looked at on the screen
    expect(frozen(readFigure(sampleInspection().spectrum, PALETTES.light))).toMatchSnapshot();
  });

  it("stays as it was for fitted lines", () => {
    // Frozen: earlier output, looked at on the screen
    expect(
      frozen(linesFigure(sampleCurves(), sampleResult(), PALETTES.light, "window", null)),
    ).toMatchSnapshot();
  });

  it("stays as it was for the ladder", () => {
    // Frozen: earlier output, looked at on the screen
    expect(frozen(ladderFigure(sampleResult(), PALETTES.dark, "all", "gap"))).toMatchSnapshot();
  });
});

describe("a figure of lines", () => {
  const figure = linesFigure(sampleCurves(), sampleResult(), PALETTES.light, "window", null);

  it("draws each component once, standing on the background, and knows its n", () => {
    const components = figure.data.filter((trace) => trace.meta.part === "line");
    // Derived: the sample has components n = 5 and 6
    expect(components.map((trace) => trace.meta.n)).toEqual([5, 6]);
    const curves = sampleCurves();
    const nearest = curves.energy_eV.reduce((best, energy, i) => {
      const wanted = components[0]!.x[1]!;
      return Math.abs(energy - wanted) < Math.abs(curves.energy_eV[best]! - wanted) ? i : best;
    }, 0);
    // Derived: 8 high at its centre, over the background at the nearest point
    expect(components[0]!.y[1]).toBeCloseTo(8 + curves.background[nearest]!, 12);
  });

  it("marks the two edges of the fitted window", () => {
    const shapes = figure.layout["shapes"] as { x0: number }[];
    // Derived: the sample was fitted from 2.167 to 2.1722 eV
    expect(shapes.slice(0, 2).map(({ x0 }) => x0)).toEqual([2.167, 2.1722]);
  });

  it("uses no marked-up text, which the content policy would refuse", () => {
    for (const drawn of [figure, ladderFigure(sampleResult(), PALETTES.light, "all", "gap")]) {
      expect(JSON.stringify(drawn.layout)).not.toMatch(/<(sub|sup|i|b|span)\b/);
      expect(JSON.stringify(drawn.layout)).not.toMatch(/"exponentformat":"(power|SI)"/);
    }
  });
});

describe("a figure of the ladder", () => {
  it("leaves out what is not determined instead of drawing a zero", () => {
    const result = sampleResult();
    const lines = result.lines.map((line, i) => (i === 0 ? { ...line, width_eV: NOT_DETERMINED } : line));
    const figure = ladderFigure({ ...result, lines }, PALETTES.light, "widths", "gap");
    const points = figure.data.find((trace) => trace.meta.part === "levels")!;
    // Derived: five lines, one without a width
    expect(points.x.length).toBe(4);
    expect(Array.from(points.y)).not.toContain(0);
  });

  it("puts the levels on the straight line of the law", () => {
    const result = sampleResult();
    const figure = ladderFigure(result, PALETTES.light, "levels", "gap");
    const points = figure.data.find((trace) => trace.meta.part === "levels")!;
    const { gap_eV: gap, rydberg_eV: rydberg } = result.series!;
    for (let i = 0; i < points.x.length; i++)
      // Derived: the sample's energies follow E = gap - rydberg x with its own defect
      expect(points.y[i]).toBeCloseTo(gap.value! - rydberg.value! * points.x[i]!, 12);
  });

  it("draws without a series", () => {
    const figure = ladderFigure(
      sampleResult({ series: null, width_law: null, strength_law: null }),
      PALETTES.light,
      "all",
      "defect",
    );
    expect(figure.summary).toBe("No series was seen");
  });
});
