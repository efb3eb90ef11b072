import { symmetric } from "../base/index.ts";
import type {
  ComparedParameter,
  ComparedPart,
  ComparedSample,
  Comparison,
  ComparisonChoices,
} from "../protocol/index.ts";
import { twoSidedQuantile } from "./quantiles.ts";

/**
 * What      A figure of quality a sample: F_i = sum_k w_k (x_ik - origin_k)/scale_k, weights w_k as the user gives them
 *           (negative where less is better), origin the mean of the reference batch (or over all batches), scale the
 *           standard deviation of the samples' values. Every part stands beside the sum. Its standard error takes the
 *           parts' own errors as independent.
 * Units     pure numbers: a figure of 1 is one standard deviation of the samples at weight 1.
 * Domain    null without weights; a sample that lacks a part has no figure; parts without spread are left out.
 */
export function qualityOf(
  samples: readonly ComparedSample[],
  parameters: readonly ComparedPart[],
  choices: ComparisonChoices,
): Comparison["quality"] {
  const weights = Object.entries(choices.quality) as [ComparedParameter, number][];
  if (weights.length === 0) return null;
  const parts = weights.flatMap(([name, weight]) => {
    const part = parameters.find((one) => one.name === name);
    const values = samples.flatMap((sample) => {
      const one = sample.parameters[name];
      return one?.left_out === null && one.value !== null ? [one.value] : [];
    });
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const scale = Math.sqrt(
      values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / Math.max(1, values.length - 1),
    );
    const origin =
      part?.batches.find((batch) => batch.batch === choices.reference)?.mean.value ??
      part?.mean.value ??
      mean;
    return scale > 0 && Number.isFinite(origin) ? [{ name, weight, origin, scale }] : [];
  });
  const factor = twoSidedQuantile(1 - choices.level, Infinity);
  return {
    parts,
    samples: samples.map((sample) => {
      const contributions: Partial<Record<ComparedParameter, number>> = {};
      let figure = 0;
      let variance = 0;
      let whole = parts.length > 0;
      for (const { name, weight, origin, scale } of parts) {
        const one = sample.parameters[name];
        if (one?.left_out !== null || one.value === null) {
          whole = false;
          continue;
        }
        contributions[name] = (weight * (one.value - origin)) / scale;
        figure += contributions[name];
        variance += ((weight * (one.sigma ?? 0)) / scale) ** 2;
      }
      return {
        sample: sample.sample,
        batch: sample.batch,
        figure: whole
          ? symmetric(figure, Math.sqrt(variance), factor)
          : { value: null, sigma: null, low: null, high: null },
        contributions,
      };
    }),
  };
}
