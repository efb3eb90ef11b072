import { beforeAll, describe, expect, it } from "vitest";
import { powerSchema, type PowerResult } from "../../app/protocol/index.ts";
import type { AnalysedSeries } from "../../app/tasks/index.ts";
import { PALETTES } from "../../renderer/plot/colours.ts";
import type { FigureDescription, Trace } from "../../renderer/plot/figure-description.ts";
import { parsePowers } from "../../renderer/power/parse-powers.ts";
import { powerFigure, type PowerPanel } from "../../renderer/power/power-figure.ts";
import { mostTelling, powerLedger } from "../../renderer/power/power-ledger.ts";
import { colourOfPower } from "../../app/report/index.ts";
import { samplePower } from "./power-sample.ts";

let analysed: AnalysedSeries;
let power: PowerResult;
const PANELS: readonly PowerPanel[] = [
  "all",
  "bleaching",
  "scaling",
  "volumes",
  "spectra",
  "other",
  "crystal",
];

beforeAll(() => {
  analysed = samplePower();
  power = powerSchema.parse(analysed.result.power);
});

const draw = (panel: PowerPanel, result = analysed): FigureDescription =>
  powerFigure(result, PALETTES.light, panel);
const part = (figure: FigureDescription, name: string): Trace[] =>
  figure.data.filter((trace) => trace.meta.part === name);
const changed = (change: Partial<PowerResult>): AnalysedSeries => ({
  ...analysed,
  result: { ...analysed.result, power: { ...power, ...change } },
});

describe("bleaching against power", () => {
  it("draws a law for each line, and its data over the area at zero power", () => {
    const figure = draw("bleaching");
    // Derived: the sample has the lines n = 5 to 14 at ten powers
    expect(part(figure, "line").map(({ meta }) => meta.n)).toEqual([5, 6, 7, 8, 9, 10, 11, 12, 13, 14]);
    const [points] = part(figure, "levels");
    expect(points!.x.length).toBe(100);
    const first = power.curves.lines[0]!;
    // Derived: A/A_0 of the first point
    expect(points!.y[0]).toBeCloseTo(first.data[0]!.area! / power.lines[0]!.area0.value!, 12);
  });

  it("has a logarithmic axis of power, and leaves out a spectrum in the dark, which has no place on it", () => {
    const dark = {
      ...power.curves,
      lines: power.curves.lines.map((line) => ({
        ...line,
        data: [{ ...line.data[0]!, power_uW: 0 }, ...line.data.slice(1)],
      })),
    };
    const figure = draw("bleaching", changed({ curves: dark }));
    expect((figure.layout["xaxis"] as { type: string }).type).toBe("log");
    // Derived: one point less for each of ten lines
    expect(part(figure, "levels")[0]!.x.length).toBe(90);
  });

  it("draws the same n in the same colour in every panel, with different marks for neighbours", () => {
    const colour = (figure: FigureDescription): string => {
      const [points] = part(figure, "levels");
      const at = (points!["customdata"] as number[]).indexOf(12);
      return (points!["marker"] as { color: string[] }).color[at]!;
    };
    expect(colour(draw("bleaching"))).toBe(colour(draw("scaling")));
    expect(colour(draw("bleaching"))).toBe(colour(draw("crystal")));
    const [points] = part(draw("bleaching"), "levels");
    const marks = (points!["marker"] as { symbol: string[] }).symbol;
    const numbers = points!["customdata"] as number[];
    expect(marks[numbers.indexOf(7)]).not.toBe(marks[numbers.indexOf(8)]);
  });
});

describe("scaling with n", () => {
  it("puts fitted, predicted and ideal lines through one point, each with its own slope", () => {
    const figure = draw("scaling");
    for (const [name, exponent] of [
      ["fitted", power.exponent!.exponent.value!],
      ["predicted", power.exponent!.predicted.value!],
      // Source: ideal exponent 10 of saturation for widths and areas exactly n^-3
      ["ideal", 10],
    ] as const) {
      const [line] = part(figure, name);
      const slope = Math.log(line!.y[1]! / line!.y[0]!) / Math.log(line!.x[1]! / line!.x[0]!);
      // Derived: a power law is a straight line of slope k on two logarithmic axes
      expect(slope).toBeCloseTo(exponent, 9);
    }
  });

  it("shows an upper limit where bleaching is not seen, and no point", () => {
    const lines = power.lines.map((line) =>
      line.n === 6 ? { ...line, reading: "not-seen" as const, saturation_limit_per_uW: 3e-4 } : line,
    );
    const figure = draw("scaling", changed({ lines }));
    expect(Array.from(part(figure, "limits")[0]!.x)).toEqual([6]);
    expect(Array.from(part(figure, "limits")[0]!.y)).toEqual([3e-4]);
    expect(part(figure, "levels")[0]!["customdata"]).not.toContain(6);
  });

  it("draws no line of a law where too few lines bleach", () => {
    const figure = draw("scaling", changed({ exponent: null }));
    expect(part(figure, "fitted")).toEqual([]);
    expect(powerLedger(changed({ exponent: null }).result, null)[0]!.remark).toBe(
      "fewer than three lines bleach",
    );
  });
});

describe("volumes", () => {
  it("show measured and expected together, against n and against power", () => {
    const figure = draw("volumes");
    const [expected] = part(figure, "expected");
    expect(Array.from(expected!.x)).toEqual([5, 6, 7, 8, 9, 10, 11, 12, 13, 14]);
    const names = part(figure, "line").map(({ name }) => name);
    expect(names).toContain("n = 12");
    expect(names).toContain("expected n = 12");
  });

  it("leave out a volume that is not determined instead of drawing a zero", () => {
    const none = { value: null, sigma: null, low: null, high: null, factor: null };
    const lines = power.lines.map((line) => (line.n === 9 ? { ...line, blockade_volume_um3: none } : line));
    const points = part(draw("volumes", changed({ lines })), "levels")[0]!;
    expect(points["customdata"]).not.toContain(9);
    expect(Array.from(points.y)).not.toContain(0);
  });
});

describe("all panels", () => {
  it("use no marked-up text and no power of ten by style, which the content policy would refuse", () => {
    for (const panel of PANELS) {
      const layout = JSON.stringify(draw(panel).layout);
      expect(layout).not.toMatch(/<(sub|sup|i|b|span)\b/);
      expect(layout).not.toMatch(/"exponentformat":"(power|SI)"/);
    }
  });

  it("name quantity over unit on every axis", () => {
    for (const panel of PANELS)
      for (const [name, axis] of Object.entries(draw(panel).layout))
        if (/^[xy]axis/.test(name))
          expect((axis as { title: { text: string } }).title.text, `${panel} ${name}`).not.toBe("");
  });

  it("say in a sentence what they show", () => {
    // Derived: the sample's powers
    expect(draw("all").summary).toMatch(/^Power series of 10 spectra from 0\.5 to 200 µW: lines n = /);
    const none = power.lines.map((line) => ({ ...line, reading: "not-seen" as const }));
    expect(draw("all", changed({ lines: none })).summary).toMatch(/no line bleaches$/);
  });

  it("stand above each other by power in the spectra, from dark to the accent", () => {
    const models = part(draw("spectra"), "model");
    expect(models.map(({ name }) => name)).toEqual(
      [0.5, 1, 2, 5, 10, 20, 50, 100, 150, 200].map((one) => `${one} µW`),
    );
    const first = Array.from(models[0]!.y, (value) => value!);
    const last = Array.from(models[9]!.y, (value) => value!);
    expect(Math.min(...last)).toBeGreaterThan(Math.max(...first));
    const shades = [0, 4, 8].map((rank) => colourOfPower(rank, 10, "light", PALETTES.light.accent));
    expect([...shades].sort()).toEqual(shades);
  });
});

describe("the ledger of a power series", () => {
  it("gives both exponents with their prediction, then a line, then what else the power does", () => {
    const sections = powerLedger(analysed.result, 11);
    expect(sections.map(({ title }) => title)).toEqual([
      "Scaling with n",
      "Line n = 11: bleaches",
      "What else the power does",
    ]);
    expect(sections[0]!.entries.map(({ id }) => id)).toEqual([
      "power-saturation-exponent",
      "power-saturation-predicted",
      "power-volume-exponent",
      "power-volume-predicted",
    ]);
  });

  it("shows the line whose saturation is known best where none is chosen", () => {
    const best = mostTelling(power)!;
    expect(powerLedger(analysed.result, null)[1]!.title).toContain(`n = ${best.n}`);
    const ratio = (n: number): number => {
      const { value, sigma } = power.lines.find((line) => line.n === n)!.saturation_per_uW;
      return value! / sigma!;
    };
    for (const { n, reading } of power.lines)
      if (reading === "bleaches") expect(ratio(best.n)).toBeGreaterThanOrEqual(ratio(n));
  });

  it("writes an upper limit in words where bleaching is not seen", () => {
    const none = { value: null, sigma: null, low: null, high: null, factor: null };
    const lines = power.lines.map((line) =>
      line.n === 5
        ? {
            ...line,
            reading: "not-seen" as const,
            blockade_volume_um3: none,
            blockade_volume_limit_um3: 0.0421,
          }
        : line,
    );
    const section = powerLedger(changed({ lines }).result, 5)[1]!;
    expect(section.title).toBe("Line n = 5: bleaching not seen");
    // Derived: the limit above, to two digits
    expect(section.entries.find(({ id }) => id === "power-blockade_volume_um3")!.plain).toBe("below 0.042");
  });

  it("puts notes beside the number they are about", () => {
    const entries = powerLedger(analysed.result, 11).flatMap((section) => section.entries);
    const gap = entries.find(({ id }) => id === "power-gap-shift")!;
    expect(gap.notes.map(({ code }) => code)).toContain("lines-shift-with-power");
  });
});

describe("typed powers", () => {
  it("are read with commas, semicolons or spaces, with point or decimal comma", () => {
    expect(parsePowers("1, 2, 5")).toEqual([1, 2, 5]);
    expect(parsePowers("0.5,1,2")).toEqual([0.5, 1, 2]);
    expect(parsePowers("0,5; 1; 2")).toEqual([0.5, 1, 2]);
    expect(parsePowers("0.5 1 2")).toEqual([0.5, 1, 2]);
    expect(parsePowers(" ")).toBe("read");
  });

  it("are refused where one is negative, no number, or alone", () => {
    for (const wrong of ["5", "1, -2", "1, x"]) expect(parsePowers(wrong)).toBeNull();
  });
});
