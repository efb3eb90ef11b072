import { describe, expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { condenseRows, NODES, type Panel } from "../../../app/solve/index.ts";

const M = 700;
const PANELS: Panel[] = [
  { first: 0, end: 250, condensed: true },
  { first: 250, end: 270, condensed: false },
  { first: 270, end: M, condensed: true },
];

function uneven(): { x: Float64Array; y: Float64Array; weight: Float64Array } {
  const random = makeRandom(11);
  let at = 2;
  const x = new Float64Array(M);
  for (let i = 0; i < M; i++) x[i] = at += 1e-3 * (0.2 + random.uniform());
  return {
    x,
    y: Float64Array.from({ length: M }, () => random.normal()),
    weight: Float64Array.from({ length: M }, () => 0.5 + 2 * random.uniform()),
  };
}

/** Legendre polynomial of degree n on the panel that ends with point `end`. */
function legendre(n: number, value: number, low: number, high: number): number {
  const t = (2 * value - low - high) / (high - low);
  let before = 1;
  let now = t;
  if (n === 0) return 1;
  for (let k = 2; k <= n; k++) [before, now] = [now, ((2 * k - 1) * t * now - (k - 1) * before) / k];
  return now;
}

describe("condensed rows", () => {
  const { x, y, weight } = uneven();
  const rows = condenseRows(x, [y], weight, PANELS);

  test("are as many as nodes and kept points, within their panels and ascending", () => {
    // Derived: two panels of NODES nodes and twenty points
    expect(rows.x.length).toBe(2 * NODES + 20);
    for (let i = 1; i < rows.x.length; i++) expect(rows.x[i]!).toBeGreaterThan(rows.x[i - 1]!);
    expect(rows.x[NODES - 1]!).toBeLessThan(x[249]!);
    expect(rows.x[NODES]!).toBe(x[250]!);
  });

  test("sum every polynomial up to degree 2 NODES - 1 as the points do", () => {
    for (const [panel, first] of [
      [PANELS[0]!, 0],
      [PANELS[2]!, NODES + 20],
    ] as const) {
      const low = x[panel.first]!;
      const high = x[panel.end - 1]!;
      let total = 0;
      for (let i = panel.first; i < panel.end; i++) total += weight[i]! ** 2;
      for (let degree = 0; degree < 2 * NODES; degree++) {
        let points = 0;
        for (let i = panel.first; i < panel.end; i++)
          points += weight[i]! ** 2 * legendre(degree, x[i]!, low, high);
        let nodes = 0;
        for (let i = first; i < first + NODES; i++)
          nodes += rows.weight[i]! ** 2 * legendre(degree, rows.x[i]!, low, high);
        // Derived: a Gauss rule of NODES nodes is exact to degree 2 NODES - 1
        expect(Math.abs(nodes - points), `degree ${degree}`).toBeLessThan(2e-13 * total);
      }
    }
  });

  test("hold the data as far as polynomials below degree NODES see them, and count the rest as lost", () => {
    const fit = (degree: number, column: Float64Array, at: Float64Array, w: Float64Array): number => {
      let sum = 0;
      for (let i = 0; i < at.length; i++)
        if (at[i]! >= x[270]!) sum += w[i]! ** 2 * column[i]! * legendre(degree, at[i]!, x[270]!, x[M - 1]!);
      return sum;
    };
    for (let degree = 0; degree < NODES; degree++) {
      const points = fit(degree, y, x, weight);
      const nodes = fit(degree, rows.columns[0]!, rows.x, rows.weight);
      expect(Math.abs(points - nodes)).toBeLessThan(1e-11 * M);
    }
    const square = (column: Float64Array, w: Float64Array): number =>
      column.reduce((sum, value, i) => sum + (value * w[i]!) ** 2, 0);
    // Derived: Pythagoras, the projection and what is left of it
    const total = square(y, weight);
    expect(Math.abs(square(rows.columns[0]!, rows.weight) + rows.lost[0]! - total)).toBeLessThan(
      1e-12 * total,
    );
  });

  test("a smooth column keeps its values and stands in no high polynomial", () => {
    const smooth = x.map((value) => 3 + 2 * (value - 2) ** 3);
    const { columns, x: nodes, highest, lost } = condenseRows(x, [smooth], weight, PANELS);
    nodes.forEach((node, i) => {
      // Derived: a cubic is its own least-squares polynomial
      expect(Math.abs(columns[0]![i]! - (3 + 2 * (node - 2) ** 3))).toBeLessThan(1e-12);
    });
    const total = smooth.reduce((sum, value, i) => sum + (value * weight[i]!) ** 2, 0);
    expect(highest[0]!).toBeLessThan(1e-24 * total);
    expect(Math.abs(lost[0]!)).toBeLessThan(1e-12 * total);
  });
});
