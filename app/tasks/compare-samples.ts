import { success, type Result } from "../base/index.ts";
import { compareResults, type BatchIssue } from "../batch/index.ts";
import {
  resolveComparisonChoices,
  type Comparison,
  type ComparisonChoicesInput,
  type ProtocolIssue,
  type RunglineResult,
} from "../protocol/index.ts";
import type { RunFacts } from "./analyse-file.ts";

/** Results side by side: samples, batches, trends, temperature. Plain data in and out, fit for a message. */
export function compareSamples(
  results: readonly RunglineResult[],
  choices: ComparisonChoicesInput,
  run: RunFacts,
): Result<Comparison, BatchIssue | ProtocolIssue> {
  const resolved = resolveComparisonChoices(choices);
  if (!resolved.ok) return resolved;
  const compared = compareResults(results, resolved.value);
  return compared.ok ? success({ ...compared.value, run }) : compared;
}
