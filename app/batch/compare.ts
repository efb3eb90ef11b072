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
import { powerOf } from "./power-part.ts";
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
  const known = samples.filter((sample) =>
    Object.values(sample.parameters).some((one) => one !== undefined && one.value !== null),
  );
  const quality = qualityOf(samples, parameters, choices);
  return success({
    schema: COMPARISON_SCHEMA,
    choices,
    samples: [...samples],
    parameters,
    quality,
    temperature: temperatureOf(read.results, choices),
    power: powerOf(read.results, choices),
    notes: [
      ...read.notes,
      ...aboutNumbers(parameters, new Set(known.map(({ batch }) => batch)).size, known.length),
      ...aboutQuality(quality, choices),
      ...(choices.against !== null && batches.length > 1 ? [trendInBatches(choices.against)] : []),
    ],
  });
}

/** A part that was asked for and cannot count is said, or the figure would be of other parts than the user weighed. */
function aboutQuality(quality: Comparison["quality"], choices: ComparisonChoices): readonly Note[] {
  if (quality === null) return [];
  const counted = new Set<string>(quality.parts.map(({ name }) => name));
  const left = Object.keys(choices.quality).filter((name) => !counted.has(name));
  const notes: Note[] = [];
  if (left.length > 0)
    notes.push(
      doubt(
        "quality-part-left-out",
        "quality",
        `${left.join(", ")} ${left.length === 1 ? "is" : "are"} left out of the figure of quality: fewer than two samples have it, or all have the same.`,
        "take it out of the weights, or compare samples that have it",
      ),
    );
  const without = quality.samples.filter(({ figure }) => figure.value === null).length;
  if (without > 0 && quality.parts.length > 0)
    notes.push(
      doubt(
        "quality-not-of-all",
        "quality",
        `${without} of ${quality.samples.length} samples lack a part and have no figure of quality.`,
        "weigh only what every sample has",
      ),
    );
  return notes;
}

function trendInBatches(against: string): Note {
  return assumption(
    "trend-stays-in-batches",
    "parameters",
    `Batches are compared as they stand: what changes along "${against}" is not taken off before.`,
    "compare batches at one value of it, without --against",
  );
}

/** Counted, not measured: no error belongs to them. */
const WHOLE_NUMBERS: ReadonlySet<string> = new Set(["highest_n", "highest_resolved_n"]);

function timesInWords(factor: number): string {
  return factor >= 20 ? "more than 20" : String(Number(factor.toPrecision(2)));
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
  const beyond = parameters.filter(
    ({ homogeneity: { p, birge }, within, batches: compared }) =>
      p !== null && p < 0.01 && within.dof === 0 && compared.length > 1 && birge !== null,
  );
  const whole = beyond.filter(({ name }) => WHOLE_NUMBERS.has(name)).map(({ name }) => name);
  const scattered = beyond
    .filter(({ name }) => !WHOLE_NUMBERS.has(name))
    .map(({ name, homogeneity: { birge } }) => `${name} (${timesInWords(birge!)})`);
  if (beyond.length > 0) {
    const parts = [
      ...(scattered.length === 0
        ? []
        : [`Values differ by more than their errors say: ${scattered.join(", ")} times the errors.`]),
      ...(whole.length === 0
        ? []
        : [`${whole.join(" and ")} ${whole.length === 1 ? "differs" : "differ"}, counts without an error.`]),
      "Without repeated crystals it is open whether batches, crystals or the errors differ.",
    ];
    notes.push(
      doubt("scatter-beyond-errors", "parameters", parts.join(" "), "measure several crystals of a batch"),
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
