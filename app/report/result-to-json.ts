import { protocolSchema, resultSchema, type Protocol, type RunglineResult } from "../protocol/index.ts";

/**
 * A result as its file: checked against the schema, keys in the schema's order, every double in its shortest form
 * that reads back to the same bits. Throws where the result breaks its own schema, since no such file may be written.
 */
export function resultToJson(result: RunglineResult): string {
  return `${JSON.stringify(resultSchema.parse(result), null, 2)}\n`;
}

/** Several results as one JSON document. */
export function resultsToJson(results: readonly RunglineResult[]): string {
  return `${JSON.stringify(
    results.map((result) => resultSchema.parse(result)),
    null,
    2,
  )}\n`;
}

/** A protocol as its file: all choices spelled out, so that a colleague can repeat the run. */
export function protocolToJson(protocol: Protocol): string {
  return `${JSON.stringify(protocolSchema.parse(protocol), null, 2)}\n`;
}
