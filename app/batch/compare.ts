import {
  assumption,
  doubt,
  failure,
  success,
  type Issue,
  type Note,
  type Result,
  type Wording,
} from "../base/index.ts";
import {
  COMPARISON_SCHEMA,
  type Comparison,
  type ComparisonChoices,
  type RunglineResult,
} from "../protocol/index.ts";
import { compareParameter } from "./compare-parameter.ts";
import { qualityOf } from "./quality.ts";
import { readSamples } from "./read-samples.ts";
import { temperatureOf } from "./temperature-part.ts";

export type BatchIssue =
  | (Issue & { readonly code: "batch/too-few"; readonly facts: { results: number } })
  | (Issue & {
      readonly code: "batch/no-such-reference";
      readonly facts: { found: string; known: string };
    })
  | (Issue & { readonly code: "batch/no-such-fact"; readonly facts: { found: string; known: string } });

/** Results of many samples side by side. Pure: the order of the results changes only the order of what is listed. */
export function compareResults(
  results: readonly RunglineResult[],
  choices: ComparisonChoices,
): Result<Omit<Comparison, "run">, BatchIssue> {
  const read = readSamples(results, choices);
  const { samples } = read;
  if (read.results.length < 2)
    return failure({ code: "batch/too-few", facts: { results: read.results.length } });
  const batches = [...new Set(samples.map((sample) => sample.batch))];
  if (choices.reference !== null && !batches.includes(choices.reference))
    return failure({
      code: "batch/no-such-reference",
      facts: { found: choices.reference, known: batches.join(", ") },
    });
  if (choices.against !== null && read.results.every((one) => one.against === null)) {
    const known = [
      ...new Set(
        read.results.flatMap((one) =>
          one.result.reading.facts.map(({ key, label }) => (key === "other" ? label : key)),
        ),
      ),
    ];
    return failure({
      code: "batch/no-such-fact",
      facts: { found: choices.against, known: known.join(", ") },
    });
  }
  const parameters = choices.parameters.map((name) =>
    compareParameter(name, read.units[name], samples, choices, read.againstUnit),
  );
  return success({
    schema: COMPARISON_SCHEMA,
    choices,
    samples: [...samples],
    parameters,
    quality: qualityOf(samples, parameters, choices),
    temperature: temperatureOf(read.results, choices),
    notes: [
      ...read.notes,
      ...aboutNumbers(parameters, batches.length, samples.length),
      ...(choices.against !== null && batches.length > 1 ? [trendInBatches(choices.against)] : []),
    ],
  });
}

function trendInBatches(against: string): Note {
  return assumption(
    "trend-stays-in-batches",
    "parameters",
    `Batches are compared as they stand: what changes along "${against}" is not taken off before.`,
    "compare batches at one value of it, without --against",
  );
}

function aboutNumbers(
  parameters: Comparison["parameters"],
  batches: number,
  samples: number,
): readonly Note[] {
  const notes: Note[] = [];
  if (batches > 1 && batches === samples)
    notes.push(
      doubt(
        "one-sample-a-batch",
        "parameters",
        "Every batch has one sample: how much crystals of one batch differ is unknown, so differences are judged by the errors of the fits alone and may be those of single crystals.",
        "measure at least two crystals of a batch",
      ),
    );
  for (const part of parameters) {
    const { p, birge } = part.homogeneity;
    if (p !== null && p < 0.01 && part.within.dof === 0 && part.batches.length > 1 && birge !== null)
      notes.push(
        doubt(
          "scatter-beyond-errors",
          `parameters.${part.name}`,
          `${part.name}: the values scatter ${birge.toPrecision(2)} times as much as their errors say, and without repeated crystals it is open whether batches, crystals or the errors differ.`,
          "measure several crystals of a batch",
        ),
      );
  }
  return notes;
}

export function wordBatchIssue(issue: BatchIssue): Wording {
  switch (issue.code) {
    case "batch/too-few":
      return {
        message: `a comparison needs two results, ${issue.facts.results} came`,
        remedy: "name more results, or the folder that `rungline fit --out` wrote",
      };
    case "batch/no-such-reference":
      return {
        message: `no batch "${issue.facts.found}" to compare with`,
        remedy: `batches: ${issue.facts.known}`,
      };
    case "batch/no-such-fact":
      return {
        message: `no result says anything readable about "${issue.facts.found}"`,
        remedy: `facts in the headers: ${issue.facts.known === "" ? "none" : issue.facts.known}; or type a column (--values)`,
      };
  }
}
