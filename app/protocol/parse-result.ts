import { failure, success, type Issue, type Result, type Wording } from "../base/index.ts";
import { embeddedDocuments } from "./embedded-documents.ts";
import { resolveProtocol } from "./resolve-protocol.ts";
import { RESULT_SCHEMA, resultSchema, type RunglineResult } from "./result-schema.ts";

export type ResultIssue =
  | (Issue & { readonly code: "result/not-json"; readonly facts: { found: string } })
  | (Issue & { readonly code: "result/schema"; readonly facts: { found: string; expected: string } })
  | (Issue & { readonly code: "result/bad-value"; readonly facts: { key: string; expected: string } })
  | (Issue & { readonly code: "result/no-result"; readonly facts: Record<never, never> })
  | (Issue & { readonly code: "result/several-protocols"; readonly facts: { results: number } });

/** One result from JSON. Keys that its protocol did not have yet get their defaults. */
export function parseResult(json: unknown): Result<RunglineResult, ResultIssue> {
  if (typeof json !== "object" || json === null || Array.isArray(json))
    return failure({ code: "result/schema", facts: { found: "no object", expected: RESULT_SCHEMA } });
  const schema = "schema" in json ? json.schema : undefined;
  if (schema !== RESULT_SCHEMA)
    return failure({
      code: "result/schema",
      facts: { found: schema === undefined ? "nothing" : JSON.stringify(schema), expected: RESULT_SCHEMA },
    });
  const protocol = resolveProtocol("protocol" in json ? json.protocol : undefined);
  const parsed = resultSchema.safeParse(protocol.ok ? { ...json, protocol: protocol.value } : json);
  if (parsed.success) return success(parsed.data);
  return failure(
    ...parsed.error.issues.slice(0, 3).map((issue): ResultIssue => ({
      code: "result/bad-value",
      facts: { key: issue.path.join("."), expected: issue.message },
    })),
  );
}

/**
 * The results in the text of a file: one as JSON, several as a JSON list, or those that a report carries in its
 * `<script type="application/json">` parts.
 */
export function parseResults(text: string): Result<readonly RunglineResult[], ResultIssue> {
  const found = documentsIn(text);
  if (!found.ok) return found;
  const results: RunglineResult[] = [];
  for (const json of found.value.flat()) {
    const parsed = parseResult(json);
    if (!parsed.ok) return parsed;
    results.push(parsed.value);
  }
  return results.length > 0 ? success(results) : failure({ code: "result/no-result", facts: {} });
}

export interface ProtocolSource {
  /** Choices as written, to be resolved. */
  readonly choices: unknown;
  /** The results whose run is to be repeated; empty where the text is a protocol alone. */
  readonly results: readonly RunglineResult[];
}

/** Choices from the text of a protocol, of a result, or of a report with one protocol for all its results. */
export function parseProtocolSource(text: string): Result<ProtocolSource, ResultIssue> {
  const found = documentsIn(text);
  if (!found.ok) return found;
  const [first] = found.value;
  const isResult = (json: unknown): boolean =>
    typeof json === "object" && json !== null && "schema" in json && json.schema === RESULT_SCHEMA;
  if (found.value.length === 1 && !Array.isArray(first) && !isResult(first))
    return success({ choices: first, results: [] });
  const results = parseResults(text);
  if (!results.ok) return results;
  const written = results.value.map((result) => JSON.stringify(result.protocol));
  if (written.some((one) => one !== written[0]))
    return failure({ code: "result/several-protocols", facts: { results: results.value.length } });
  return success({ choices: results.value[0]!.protocol, results: results.value });
}

/** A report may embed other data than results; those are passed over. */
function documentsIn(text: string): Result<readonly unknown[], ResultIssue> {
  try {
    const documents = embeddedDocuments(text);
    if (
      !text
        .replace(/^\uFEFF/, "")
        .trimStart()
        .startsWith("<")
    )
      return success(documents);
    const results = documents
      .flat()
      .filter(
        (json) =>
          typeof json === "object" &&
          json !== null &&
          "schema" in json &&
          typeof json.schema === "string" &&
          json.schema.startsWith("rungline-result/"),
      );
    return results.length > 0 ? success(results) : failure({ code: "result/no-result", facts: {} });
  } catch (thrown) {
    const found = thrown instanceof Error ? thrown.message : "";
    return failure({ code: "result/not-json", facts: { found } });
  }
}

export function wordResultIssue(issue: ResultIssue): Wording {
  switch (issue.code) {
    case "result/not-json":
      return { message: `not JSON (${issue.facts.found})`, remedy: "give a file that Rungline wrote" };
    case "result/schema":
      return {
        message: `is no result: schema is ${issue.facts.found}`,
        remedy: `expected ${issue.facts.expected}, as \`rungline fit --out NAME.json\` writes it`,
      };
    case "result/bad-value":
      return {
        message: `a result, but ${issue.facts.key} is not as it should be: ${issue.facts.expected}`,
        remedy: "fit the spectrum again with this version",
      };
    case "result/no-result":
      return {
        message: "holds no result",
        remedy: "give a result as JSON, or a report that carries its results",
      };
    case "result/several-protocols":
      return {
        message: `its ${issue.facts.results} results have different protocols`,
        remedy: "give the one result whose run is to be repeated",
      };
  }
}
