import { describe, expect, it } from "vitest";
import { symmetric } from "../../app/base/index.ts";
import type { Diagnostics, Resampling, RunglineResult } from "../../app/protocol/index.ts";
import { errorFigure, type ErrorView } from "../../renderer/ladder/error-figure.ts";
import {
  correlationTable,
  drawnTable,
  intervalTable,
  strongestTable,
} from "../../renderer/ladder/error-tables.ts";
import { residualSection } from "../../renderer/ladder/residual-section.ts";
import { PALETTES } from "../../renderer/plot/colours.ts";
import type { FigureDescription, Trace } from "../../renderer/plot/figure-description.ts";
import { sampleResult } from "./sample.ts";

const GAP = 2.172;
const RYDBERG = 0.092;
const SIGMA = 1e-6;

const circle = (radius: number): [number, number][] =>
  [0, 1, 2, 3].map((quarter) => [
    GAP + radius * Math.cos((quarter * Math.PI) / 2),
    RYDBERG + radius * Math.sin((quarter * Math.PI) / 2),
  ]);

const DIAGNOSTICS: Diagnostics = {
  autocorrelation: [0.3, -0.1, null],
  correlation_time: 1.6,
  error_factor: 1.3,
  quantiles: [-1, 0, 1].map((normal) => ({ probability: 0.5 + normal / 4, normal, residual: 1.1 * normal })),
  skewness: -0.2,
  excess_kurtosis: 0.4,
  correlation: {
    names: ["energy[5]", "energy[6]", "width[5]"],
    matrix: [
      [1, 0.5, -0.95],
      [0.5, 1, 0.001],
      [-0.95, 0.001, 1],
    ],
  },
  strongest: [{ a: "energy[5]", b: "width[5]", correlation: -0.95 }],
  influence: [
    { n: 5, leverage: 0.9, residual: 1.2, gap_eV: -1.5, rydberg_eV: 2, defect0: null },
    { n: 6, leverage: 0.4, residual: -0.2, gap_eV: 0.1, rydberg_eV: null, defect0: null },
  ],
  condition: 1e4,
  bounds: [],
  regions: [0.6827, 0.9545].map((level, i) => ({
    x: "gap_eV",
    y: "rydberg_eV",
    level,
    points: circle((i + 1) * SIGMA),
  })),
  profiles: [
    {
      name: "gap_eV",
      points: [-2, -1, 0, 1, 2].map((step): [number, number] => [GAP + step * SIGMA, step * step]),
    },
  ],
};

const NOTHING = { median: null, low: null, high: null };
const RESAMPLED: Resampling = {
  kind: "residual",
  count: 5,
  failed: 1,
  seed: 9,
  block_points: 4,
  gap_eV: { median: GAP, low: GAP - 2 * SIGMA, high: GAP + 2 * SIGMA },
  rydberg_eV: { median: RYDBERG, low: RYDBERG - SIGMA, high: RYDBERG + SIGMA },
  defect0: NOTHING,
  width_exponent: NOTHING,
  draws: {
    gap_eV: [-2, -1, 0, 1].map((step) => GAP + step * SIGMA),
    rydberg_eV: [-1, -1, 1, 1].map((step) => RYDBERG + step * SIGMA),
  },
  lines: [],
};

function sample(changes: Partial<RunglineResult> = {}): RunglineResult {
  const result = sampleResult();
  return {
    ...result,
    series: {
      ...result.series!,
      gap_eV: symmetric(GAP, SIGMA),
      rydberg_eV: symmetric(RYDBERG, SIGMA),
      defect0: { value: 0, sigma: 0, low: 0, high: 0 },
      correlation: {
        names: ["gap_eV", "rydberg_eV", "defect0"],
        matrix: [
          [1, 0.9, 0],
          [0.9, 1, 0],
          [0, 0, 1],
        ],
      },
    },
    diagnostics: DIAGNOSTICS,
    ...changes,
  };
}

const figure = (view: ErrorView, result = sample()): FigureDescription =>
  errorFigure(result, PALETTES.light, view);
const part = ({ data }: FigureDescription, name: string): Trace[] =>
  data.filter((trace) => trace.meta.part === name);

describe("figures of what the errors rest on", () => {
  it("close the curve of every region around the fitted values, and show all of it", () => {
    const drawn = figure("regions");
    const [outer, inner] = part(drawn, "region");
    // Derived: four points and the first again; two and one standard errors of 1 µeV
    expect([outer!.x.length, Math.max(...(outer!.x as number[]))]).toEqual([5, expect.closeTo(2, 6)]);
    expect(Math.max(...(inner!.x as number[]))).toBeCloseTo(1, 6);
    const { range } = drawn.layout["xaxis"] as { range: number[] };
    expect(range[0]).toBeLessThan(-2);
    expect(range[1]).toBeGreaterThan(2);
    expect(part(drawn, "draws")).toEqual([]);
    // Derived: four draws did not fail
    expect(part(figure("regions", sample({ resampled: RESAMPLED })), "draws")[0]!.x.length).toBe(4);
  });

  it("lay the profile beside the parabola of the standard error", () => {
    const drawn = figure("profiles");
    const [profile] = part(drawn, "profile");
    const [parabola] = part(drawn, "parabola");
    // Derived: one panel in µeV from the fitted gap; both rise to 4 at two standard errors
    expect(Array.from(profile!.x as number[], (x) => Math.round(x))).toEqual([-2, -1, 0, 1, 2]);
    expect((parabola!.y as number[])[0]).toBeCloseTo(4, 6);
  });

  it("leave out a parameter that no line moves, and a change that is not determined", () => {
    const drawn = figure("influence");
    // Derived: gap, Rydberg energy and leverage; the defect is held
    expect(part(drawn, "levels").map(({ x }) => x.length)).toEqual([2, 1, 2]);
    expect(JSON.stringify(drawn.layout)).not.toContain("δ₀");
  });

  it("tell the sign of a correlation by filled and hollow squares, and leave out dust", () => {
    const drawn = figure("correlations");
    // Derived: 0.5 is positive, -0.95 negative, 0.001 dust
    expect(part(drawn, "positive")[0]!["text"]).toEqual(["energy[5], energy[6]: 0.500"]);
    expect(part(drawn, "negative")[0]!["text"]).toEqual(["energy[5], width[5]: -0.950"]);
  });

  it("count every draw once, and lay both intervals above them", () => {
    const drawn = figure("draws", sample({ resampled: RESAMPLED }));
    const heights = part(drawn, "draws").map(({ y }) => (y as number[]).reduce((sum, one) => sum + one, 0));
    // Derived: four draws each of gap and Rydberg energy
    expect(heights).toEqual([4, 4]);
    const ends = (name: string): number[] =>
      Array.from(part(drawn, name)[0]!.x as number[], (one) => Math.round(one));
    // Derived: one standard error of the fit, two from the draws, in µeV
    expect([ends("interval"), ends("drawn-interval")]).toEqual([
      [-1, 1],
      [-2, 2],
    ]);
  });

  it("set residuals against normal quantiles, and autocorrelation against chance", () => {
    const drawn = figure("residuals");
    expect(part(drawn, "quantiles")[0]!.y).toEqual([-1.1, 0, 1.1]);
    const chance = Math.max(...(part(drawn, "chance")[0]!.y as number[]));
    // Derived: two standard errors of an autocorrelation of m independent numbers are 2/sqrt(m)
    expect(chance).toBeCloseTo(2 / Math.sqrt(sample().reading.used_points), 12);
  });

  it("are empty where there is nothing to show, and say why", () => {
    for (const view of ["regions", "profiles", "influence", "correlations", "draws"] as const) {
      const { data, summary } = figure(view, sample({ diagnostics: null }));
      expect(data).toEqual([]);
      expect(summary).toMatch(/^No /);
    }
  });

  it("use no marked-up text, which the content policy would refuse", () => {
    for (const view of ["regions", "profiles", "influence", "correlations", "residuals", "draws"] as const)
      expect(JSON.stringify(figure(view, sample({ resampled: RESAMPLED })).layout)).not.toMatch(
        /<(sub|sup|i|b|span)\b/,
      );
  });
});

describe("tables of what the errors rest on", () => {
  it("leave held parameters out of correlations and intervals", () => {
    expect(correlationTable(sample())!.rows).toEqual([
      ["E_g", "1", "0.900"],
      ["Ry", "0.900", "1"],
    ]);
    expect(intervalTable(sample()).rows[0]).toEqual(["E_g / µeV", "1", "−1", "+1"]);
    expect(strongestTable(sample()).rows).toEqual([["E 5", "Γ 5", "−0.950"]]);
  });

  it("set the intervals of the draws beside those of the fit, with what was drawn", () => {
    expect(drawnTable(sample())).toBeNull();
    const table = drawnTable(sample({ resampled: RESAMPLED }))!;
    // Derived: the drawn interval of the gap is twice that of the fit
    expect(table.rows[0]).toEqual(["E_g / µeV", "−1 +1", "−2 +2", "2.00"]);
    expect(table.remark).toContain("in blocks of 4 points, seed 9; 1 failed and are left out");
  });

  it("give the numbers of the residuals", () => {
    const texts = residualSection(sample())!.entries.map(({ plain }) => plain);
    expect(texts.slice(1)).toEqual(["1.6", "1.3", "−0.2", "0.4"]);
  });
});
