import {
  resolveComparisonChoices,
  type ComparedSample,
  type ComparisonChoices,
} from "../../app/protocol/index.ts";

/** Samples that carry one number with its standard error, named gap_eV. */
export function comparedSamples(
  values: readonly number[],
  sigmas: readonly number[],
  batches: readonly string[],
  against: readonly (number | null)[] = [],
): ComparedSample[] {
  return values.map((value, i) => ({
    sample: `s${i}`,
    batch: batches[i]!,
    named_by: { sample: "header", batch: "header" },
    results: [],
    date: null,
    temperature_K: null,
    against: against[i] ?? null,
    doubts: [],
    parameters: {
      gap_eV: { value, statistical: sigmas[i]!, systematic: null, sigma: sigmas[i]!, left_out: null },
    },
    lines: [],
  }));
}

export function comparisonChoices(input: object = {}): ComparisonChoices {
  const choices = resolveComparisonChoices(input);
  if (!choices.ok) throw new Error(JSON.stringify(choices.issues));
  return choices.value;
}
