import { symmetric } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import type { FittedCurves } from "../../app/report/index.ts";
import { makeResult } from "../main/make-result.ts";

/** Hand-made results of several samples in two batches, each with its own gap; for tests of reports. */
export function reportSamples(count: number): RunglineResult[] {
  const plain = makeResult();
  return Array.from({ length: count }, (_, i) => {
    const batch = i % 2 === 0 ? "A" : "B";
    return makeResult({
      source: { file: `${batch}${i + 1}.csv`, sha256: String(i).padStart(2, "0").repeat(32), points: 9000 },
      reading: {
        ...plain.reading,
        facts: [
          { key: "temperature", label: "T", text: "1.4 K" },
          { key: "sample", label: "Sample", text: `<${batch}${i + 1}> & "co"` },
          { key: "batch", label: "Batch", text: `batch ${batch}` },
        ],
      },
      series: { ...plain.series!, gap_eV: symmetric(2.17208 + 2e-6 * i, 1.2e-6) },
    });
  });
}

/** Curves of 9,000 points over the range that the results state: a peak, and noise that repeats. */
export function reportCurves(result: RunglineResult, points = 9000): FittedCurves {
  const [low, high] = result.reading.range_eV;
  const energy_eV = Float64Array.from({ length: points }, (_, i) =>
    i === points - 1 ? high : low + ((high - low) * i) / (points - 1),
  );
  const model = energy_eV.map((energy) => 90 + 300 / (1 + ((energy - 2.168) / 1e-4) ** 2));
  const residual = energy_eV.map((_, i) => 2 * Math.sin(12.9898 * i) * Math.cos(0.37 * i));
  return {
    energy_eV,
    model,
    residual,
    signal: model.map((value, i) => value + residual[i]!),
    background: energy_eV.map(() => 90),
  };
}
