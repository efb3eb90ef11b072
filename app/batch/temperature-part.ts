import { doubt, type Note } from "../base/index.ts";
import type { ComparisonChoices, TemperatureResult } from "../protocol/index.ts";
import { temperatureSeriesOf } from "../temperature/index.ts";
import { twoSidedQuantile } from "./quantiles.ts";
import type { NamedResult } from "./read-samples.ts";
import { FEWEST_TEMPERATURES, temperatureSteps } from "./temperature-steps.ts";

/**
 * The laws of temperature: of every sample that was measured at enough temperatures, each for itself; where none was, of
 * all samples together, which is said. Null where there are few temperatures and the comparison is not along them.
 */
export function temperatureOf(
  results: readonly NamedResult[],
  choices: ComparisonChoices,
): TemperatureResult | null {
  const asked = choices.against?.trim().toLowerCase() === "temperature";
  const groups = new Map<string, NamedResult[]>();
  for (const one of results) {
    const key = `${one.batch}\n${one.sample}`;
    groups.set(key, [...(groups.get(key) ?? []), one]);
  }
  const taking = [...groups.values()].map(withoutDoubleWork);
  const fit = (
    members: readonly NamedResult[],
    whose: { readonly sample: string; readonly batch: string } | null,
  ): TemperatureResult =>
    temperatureSeriesOf(
      members.flatMap(({ result, temperature_K }) =>
        temperature_K === null ? [] : [{ result, temperature_K }],
      ),
      whose,
      choices.errors === "total",
      twoSidedQuantile(1 - choices.level, Infinity),
    );
  const runs = taking.filter((members) => steps(members) >= FEWEST_TEMPERATURES);
  if (runs.length > 0 || (asked && taking.length === 1)) {
    const found = (runs.length > 0 ? runs : taking).map((members) => {
      const { sample, batch } = members[0]!;
      const one = fit(members, { sample, batch });
      return runs.length > 1 ? { ...one, notes: one.notes.map((note) => named(note, sample)) } : one;
    });
    return {
      series: found.flatMap(({ series }) => series),
      notes: found.flatMap(({ notes }) => notes),
    };
  }
  const all = taking.flat();
  if (!asked && steps(all) < FEWEST_TEMPERATURES) return null;
  const found = fit(all, null);
  const mixed = doubt(
    "temperature-of-several-samples",
    "temperature",
    `The series runs over ${taking.length} samples: what differs between them is read as temperature.`,
    "measure one sample at several temperatures",
  );
  return { ...found, notes: [mixed, ...found.notes] };
}

function steps(members: readonly NamedResult[]): number {
  return temperatureSteps(members.map(({ temperature_K }) => temperature_K)).length;
}

/** A power series holds spectra that may be there by themselves too. */
function withoutDoubleWork(members: readonly NamedResult[]): readonly NamedResult[] {
  const alone = members.filter(({ result }) => (result.power ?? null) === null);
  return alone.length > 0 ? alone : members;
}

function named(note: Note, sample: string): Note {
  return { ...note, text: `${sample}: ${note.text}` };
}
