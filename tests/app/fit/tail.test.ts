import { expect, test } from "vitest";
import { TailEvaluator } from "../../../app/fit/tail.ts";
import type { LawLink, TailSpec } from "../../../app/fit/index.ts";
import { addLine, energyOf, strengthOf, widthOf } from "../../support/make-spectrum.ts";
import { COVERAGE_KINDS } from "../../support/coverage.ts";

const LINK: LawLink = { gain: new Float64Array(0), at: new Float64Array(0), parameters: 0 };

test.each([
  ["sheet", "sheet", "allowed-2d", 7, 9],
  ["plain", "cubic", "allowed-3d", 8, 11],
] as const)(
  "lines taken together as a band are what 400 lines one by one give (%s)",
  (name, law, envelope, fromN, toN) => {
    const { series } = COVERAGE_KINDS.find((kind) => kind.name === name)!;
    const low = energyOf(series, fromN);
    const span = series.gap_eV - low;
    const energy = Float64Array.from({ length: 400 }, (_, i) => low - span + (3 * span * i) / 399);
    const spec: TailSpec = {
      fromN,
      toN,
      band: true,
      below: [],
      levels: {
        gap: series.gap_eV,
        rydberg: series.rydberg_eV,
        defect0: series.defect0,
        defect2: 0,
      },
      levelLink: LINK,
      widths: {
        floor: series.floor_eV,
        coefficient: series.coefficient_eV,
        exponent: series.exponent,
        base: "n",
        floorKind: "lorentzian",
      },
      widthLink: LINK,
      strengthShare: new Float64Array(0),
      strength: { law, base: "n" },
      envelope,
      continuumOdd: true,
      factorFree: true,
      factor: 1,
    };
    const tail = new TailEvaluator({ energy, signal: energy, sigma: energy }, spec, 0);
    tail.evaluate(spec.levels, spec.widths);
    const lines = new Float64Array(energy.length);
    for (let n = fromN; n <= 400; n++)
      addLine(energy, energyOf(series, n), widthOf(series, n), strengthOf(law, n), series.asymmetry, lines);
    const height = 1 / (2 * series.rydberg_eV);
    const { tiedEven, tiedOdd } = tail.columns;
    for (let i = 0; i < energy.length; i++) {
      const found = tiedEven[i]! + 2 * series.asymmetry * tiedOdd[i]!;
      // Derived: midpoint rule in n, relative (n - delta)^-2 of the band at its lower edge (app/lines/averaged-tail.ts)
      expect(Math.abs(found - lines[i]!) / height).toBeLessThan((toN + 0.5 - series.defect0) ** -2);
    }
  },
);
