import type { Curves } from "../../app/analysis/index.ts";
import type { AnalysedFile, Inspection } from "../../app/tasks/index.ts";
import { symmetric } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { makeLine, makeResult } from "../main/make-result.ts";

const GAP = 2.172083;
const RYDBERG = 0.09213;
const DEFECT = 0.231;

/** A result by hand whose lines follow its own law: n = 5 to 9, the highest without room in the level fit. */
export function sampleResult(changes: Partial<RunglineResult> = {}): RunglineResult {
  const lines = [5, 6, 7, 8, 9].map((n) => makeLine(n, GAP - RYDBERG / (n - DEFECT) ** 2, 0.016 / n ** 3));
  const result = makeResult({ lines, ...changes });
  return result.fit === null ? result : { ...result, fit: { ...result.fit, window_eV: [2.167, 2.1722] } };
}

/** Forty points of a fitted spectrum: enough to see what a figure does with them. */
export function sampleCurves(): Curves {
  const count = 40;
  const array = (value: (i: number) => number): Float64Array =>
    Float64Array.from({ length: count }, (_, i) => value(i));
  const energy = array((i) => 2.167 + i * 0.00013);
  return {
    unit: "1/cm",
    energy_eV: energy,
    signal: array((i) => 60 + i / 4 + (i % 3)),
    sigma: array(() => 0.5),
    used: new Uint8Array(count).fill(1),
    model: array((i) => 60.5 + i / 4),
    background: array((i) => 55 + i / 8),
    tail: array((i) => (i > 35 ? 2 : 0)),
    residual: array((i) => (i % 5) - 2),
    lines: [5, 6].map((n) => {
      const centre = GAP - RYDBERG / (n - DEFECT) ** 2;
      return {
        n,
        energy_eV: Float64Array.from([centre - 1e-4, centre, centre + 1e-4]),
        value: Float64Array.from([2, 8, 2]),
      };
    }),
  };
}

export function sampleAnalysed(): AnalysedFile {
  return { result: sampleResult(), curves: sampleCurves() };
}

export function sampleInspection(file = "crystal-7.csv"): Inspection {
  const curves = sampleCurves();
  return {
    file,
    rows: 40,
    headers: ["Photon energy / eV", "alpha (1/cm)"],
    preview: [[2.167, 60]],
    skipped: [],
    spectrum: {
      file,
      sha256: "ab".repeat(32),
      energy_eV: curves.energy_eV,
      signal: curves.signal,
      unit: "1/cm",
      thickness_cm: null,
      sigma: curves.sigma,
      noise: { source: "estimated", medianSigma: 0.5 },
      transmittance: null,
      used: Uint8Array.from(curves.used, (one, i) => (i === 3 ? 0 : one)),
      quantityRead: "alpha",
      axisUnitRead: "eV",
      medium: "vacuum",
      columns: [{ role: "axis", column: 1, header: "Photon energy / eV", reason: "named energy in eV" }],
      dialect: {},
      facts: [],
      skippedRows: 0,
      notes: [],
    },
  };
}

export const exact = (value: number): ReturnType<typeof symmetric> => symmetric(value, 0);
