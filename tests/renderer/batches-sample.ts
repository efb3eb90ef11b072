import { NOT_DETERMINED, symmetric } from "../../app/base/index.ts";
import type { Comparison, ComparisonChoicesInput, RunglineResult } from "../../app/protocol/index.ts";
import { compareSamples, type AnalysedFile } from "../../app/tasks/index.ts";
import { addFiles, EMPTY_SESSION, keepFit, type Session } from "../../renderer/store/session.ts";
import { sampleCurves, sampleResult } from "./sample.ts";

interface Crystal {
  readonly sample: string;
  readonly batch: string;
  readonly temperature: string;
  readonly date: string;
  /** Above 2.172 eV, in µeV. */
  readonly gap: number;
}

/** Three crystals of one batch and two of another whose gap lies 100 µeV higher; errors of 5 µeV. */
export const CRYSTALS: readonly Crystal[] = [
  { sample: "P1", batch: "P", temperature: "1.4 K", date: "2025-03-11", gap: 50 },
  { sample: "P2", batch: "P", temperature: "1.4 K", date: "2025-03-12", gap: 53 },
  { sample: "P3", batch: "P", temperature: "4.2 K", date: "2025-03-14", gap: 48 },
  { sample: "Q1", batch: "Q", temperature: "1.8 K", date: "2025-05-06", gap: 150 },
  { sample: "Q2", batch: "Q", temperature: "1.8 K", date: "2025-05-07", gap: 154 },
];

export function crystalResult({ sample, batch, temperature, date, gap }: Crystal): RunglineResult {
  const base = sampleResult();
  return {
    ...base,
    source: { ...base.source, file: `${sample}.csv`, sha256: sample.toLowerCase().padEnd(64, "0") },
    reading: {
      ...base.reading,
      facts: [
        { key: "sample", label: "Sample", text: sample },
        { key: "batch", label: "Batch", text: batch },
        { key: "temperature", label: "Temperature", text: temperature },
        { key: "date", label: "Date", text: date },
      ],
    },
    series: {
      ...base.series!,
      gap_eV: symmetric(2.172 + gap * 1e-6, 4e-6),
      rydberg_eV: symmetric(0.0913, 2e-5),
      defect0: symmetric(0.21, 0.002),
    },
    systematic: {
      ...base.systematic!,
      gap_eV: 3e-6,
      rydberg_eV: 1e-5,
      defect0: 0.001,
    },
    width_law: { ...base.width_law!, floor_eV: sample === "Q2" ? NOT_DETERMINED : symmetric(5e-5, 1e-6) },
  };
}

export function crystalAnalysed(crystal: Crystal): AnalysedFile {
  return { result: crystalResult(crystal), curves: sampleCurves() };
}

/** A session in which all five are fitted. */
export function crystalSession(): Session {
  const bytes = new Uint8Array(1);
  const opened = addFiles(
    EMPTY_SESSION,
    CRYSTALS.map(({ sample }) => ({ name: `${sample}.csv`, bytes })),
    {},
  );
  return CRYSTALS.reduce(
    (session, crystal) =>
      keepFit(session, `${crystal.sample}.csv`, {
        analysed: crystalAnalysed(crystal),
        choices: session.choices[`${crystal.sample}.csv`]!,
      }),
    opened,
  );
}

export function crystalComparison(choices: ComparisonChoicesInput = {}): Comparison {
  const compared = compareSamples(CRYSTALS.map(crystalResult), choices, {
    version: "1.2.3",
    node: "v20",
    started: "2026-01-02T03:04:05Z",
  });
  if (!compared.ok) throw new Error("the crystals must compare");
  return compared.value;
}
