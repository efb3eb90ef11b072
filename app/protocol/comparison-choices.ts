import { failure, nearestWord, success, type Result } from "../base/index.ts";
import {
  COMPARISON_CHOICES_SCHEMA,
  COMPARISON_SCHEMA,
  comparisonChoicesSchema,
  type ComparisonChoices,
} from "./comparison-schema.ts";
import { embeddedDocuments } from "./embedded-documents.ts";
import { wordExpected } from "./word-expected.ts";
import type { ProtocolIssue } from "./resolve-protocol.ts";

/** What a user wrote to the full choices of a comparison; unknown keys are refused with the nearest known one. */
export function resolveComparisonChoices(input: unknown): Result<ComparisonChoices, ProtocolIssue> {
  const known = Object.keys(comparisonChoicesSchema.shape);
  const written = typeof input === "object" && input !== null ? Object.keys(input) : [];
  const unknown = written.filter((key) => !known.includes(key));
  if (unknown.length > 0)
    return failure(
      ...unknown.map((key): ProtocolIssue => {
        const facts = { key, nearest: nearestWord(key, known), known: known.join(", ") };
        return { code: "protocol/unknown-key", facts };
      }),
    );
  const parsed = comparisonChoicesSchema.safeParse(input);
  if (parsed.success) return success(parsed.data);
  return failure(
    ...parsed.error.issues.map((issue): ProtocolIssue => {
      const key = issue.path.join(".");
      const found = issue.path.reduce<unknown>(
        (value, part) => (value as Record<PropertyKey, unknown> | undefined)?.[part],
        input,
      );
      const facts = { key, found: JSON.stringify(found) ?? "nothing", expected: wordExpected(issue) };
      return { code: "protocol/bad-value", facts };
    }),
  );
}

/**
 * The choices in the text of a file, to be resolved: of a comparison (JSON), of a report that carries one, or written by
 * hand as one object. Null where there are none.
 */
export function findComparisonChoices(text: string): unknown {
  let documents: readonly unknown[];
  try {
    documents = embeddedDocuments(text);
  } catch {
    return null;
  }
  for (const json of documents) {
    if (typeof json !== "object" || json === null || Array.isArray(json)) continue;
    const schema = "schema" in json ? json.schema : undefined;
    if (schema === undefined && documents.length === 1) return json;
    if ((schema === COMPARISON_SCHEMA || schema === COMPARISON_CHOICES_SCHEMA) && "choices" in json)
      return json.choices;
  }
  return null;
}
