import { failure, nearestWord, success, type Result } from "../base/index.ts";
import { comparisonChoicesSchema, type ComparisonChoices } from "./comparison-schema.ts";
import type { ProtocolIssue } from "./resolve-protocol.ts";

/** What a user wrote to the full choices of a comparison; unknown keys are refused with the nearest known one. */
export function resolveComparisonChoices(input: unknown): Result<ComparisonChoices, ProtocolIssue> {
  const known = Object.keys(comparisonChoicesSchema.shape);
  const written = typeof input === "object" && input !== null ? Object.keys(input) : [];
  const unknown = written.filter((key) => !known.includes(key));
  if (unknown.length > 0)
    return failure(
      ...unknown.map((key): ProtocolIssue => {
        const facts = { key, nearest: nearestWord(key, known) };
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
      const facts = { key, found: JSON.stringify(found) ?? "nothing", expected: issue.message };
      return { code: "protocol/bad-value", facts };
    }),
  );
}
