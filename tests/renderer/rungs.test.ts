import { describe, expect, it } from "vitest";
import { doubt } from "../../app/base/index.ts";
import { resolveProtocol } from "../../app/protocol/index.ts";
import { colourOfN } from "../../renderer/plot/colours.ts";
import { expectedLayout, rungLayout } from "../../renderer/rungs/rung-layout.ts";
import { sampleResult } from "./sample.ts";

describe("the ladder as drawn", () => {
  it("has the gap on top and every rung below the one with higher n", () => {
    const layout = rungLayout(sampleResult(), 600)!;
    const places = layout.rungs.map((rung) => rung.y);
    expect(places).toEqual([...places].sort((a, b) => b - a));
    expect(Math.min(...places)).toBeGreaterThan(layout.gapY);
  });

  it("stretches the axis towards the gap by the logarithm of the distance to it", () => {
    const { rungs, gap_eV: gap } = rungLayout(sampleResult(), 600)!;
    const depth = (i: number): number => Math.log(gap - rungs[i]!.energy_eV);
    // Derived: places linear in log(gap - E), so ratios of differences agree
    expect((rungs[0]!.y - rungs[1]!.y) / (rungs[1]!.y - rungs[2]!.y)).toBeCloseTo(
      (depth(0) - depth(1)) / (depth(1) - depth(2)),
      9,
    );
  });

  it("tells determined, doubtful and predicted levels apart", () => {
    const result = sampleResult();
    const lines = result.lines.map((line) => (line.n === 9 ? { ...line, significance: 3 } : line));
    const notes = [doubt("line-at-bound", "lines[1].width_eV", "", "")];
    const { rungs } = rungLayout({ ...result, lines, notes }, 600)!;
    expect(rungs.find((rung) => rung.n === 5)!.kind).toBe("determined");
    expect(rungs.find((rung) => rung.n === 6)!.kind).toBe("doubtful");
    expect(rungs.find((rung) => rung.n === 9)!.kind).toBe("doubtful");
    expect(rungs.find((rung) => rung.n === 10)!.kind).toBe("predicted");
  });

  it("keeps a rung for a line that is missing between two others", () => {
    const result = sampleResult();
    const { rungs } = rungLayout({ ...result, lines: result.lines.filter((line) => line.n !== 7) }, 600)!;
    expect(rungs.find((rung) => rung.n === 7)!.kind).toBe("predicted");
  });

  it("draws wider lines as thicker rungs, never thicker than their room", () => {
    const { rungs } = rungLayout(sampleResult(), 600)!;
    expect(rungs[0]!.thickness).toBeGreaterThan(rungs[2]!.thickness);
    for (let i = 1; i < rungs.length; i++)
      expect(rungs[i]!.thickness).toBeLessThan(Math.max(2, rungs[i - 1]!.y - rungs[i]!.y));
  });

  it("shows what the material leads to expect before anything is fitted, and nothing without a material", () => {
    const chosen = resolveProtocol({ material: { preset: "cuprous-oxide-yellow-p" } });
    const none = resolveProtocol({});
    if (!chosen.ok || !none.ok) throw new Error("protocols must resolve");
    expect(expectedLayout(chosen.value, 600)!.rungs.every((rung) => rung.kind === "predicted")).toBe(true);
    expect(expectedLayout(none.value, 600)).toBeNull();
  });
});

describe("the colour of n", () => {
  const luminance = (colour: string): number => {
    const [r, g, b] = [1, 3, 5].map((at) => {
      const channel = parseInt(colour.slice(at, at + 2), 16) / 255;
      return channel <= 0.04045 ? channel / 12.92 : ((channel + 0.055) / 1.055) ** 2.4;
    });
    return 0.2126 * r! + 0.7152 * g! + 0.0722 * b!;
  };
  const contrast = (a: number, b: number): number => (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);

  it("grows lighter with n and stands out from the ground of its mode", () => {
    for (const mode of ["light", "dark"] as const) {
      const ground = mode === "light" ? 1 : luminance("#15191d");
      for (let n = 1; n < 30; n++) {
        expect(luminance(colourOfN(n + 1, mode))).toBeGreaterThanOrEqual(luminance(colourOfN(n, mode)));
        // Source: W3C, WCAG 2.2 (2023), 1.4.11: graphical objects 3 to 1
        expect(contrast(luminance(colourOfN(n, mode)), ground)).toBeGreaterThan(3);
      }
    }
  });
});
