import { doubt } from "../base/index.ts";
import type { ComparisonChoices, TemperatureResult } from "../protocol/index.ts";
import { temperatureSeriesOf } from "../temperature/index.ts";
import { twoSidedQuantile } from "./quantiles.ts";
import type { NamedResult } from "./read-samples.ts";

/** The laws of temperature where the comparison runs against it. */
export function temperatureOf(
  results: readonly NamedResult[],
  choices: ComparisonChoices,
): TemperatureResult | null {
  if (choices.against?.trim().toLowerCase() !== "temperature") return null;
  const readings = results.flatMap(({ result, temperature_K }) =>
    temperature_K === null ? [] : [{ result, temperature_K }],
  );
  const found = temperatureSeriesOf(
    readings,
    choices.errors === "total",
    twoSidedQuantile(1 - choices.level, Infinity),
  );
  const samples = [...new Set(results.map((one) => `${one.batch} ${one.sample}`))];
  if (samples.length === 1) return found;
  const mixed = doubt(
    "temperature-of-several-samples",
    "temperature",
    `The series runs over ${samples.length} samples: what differs between them is read as temperature.`,
    "hand over the results of one sample",
  );
  return { ...found, notes: [mixed, ...found.notes] };
}
