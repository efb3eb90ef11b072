import { failure, nearestWord, success, type Issue, type Result, type Wording } from "../base/index.ts";
import { z } from "zod";
import { DEFAULT_PROTOCOL } from "./defaults.ts";
import { findPreset, PRESETS } from "./presets.ts";
import { PROTOCOL_SCHEMA, protocolSchema, type Protocol, type ProtocolInput } from "./protocol-schema.ts";
import { wordExpected } from "./word-expected.ts";

export type ProtocolIssue =
  | (Issue & {
      readonly code: "protocol/unknown-key";
      readonly facts: { key: string; nearest: string | null; known: string };
    })
  | (Issue & {
      readonly code: "protocol/bad-value";
      readonly facts: { key: string; found: string; expected: string };
    })
  | (Issue & {
      readonly code: "protocol/unknown-preset";
      readonly facts: { found: string; nearest: string | null };
    })
  | (Issue & { readonly code: "protocol/not-a-protocol"; readonly facts: { keys: string } })
  | (Issue & { readonly code: "protocol/schema"; readonly facts: { found: string; expected: string } });

type Plain = { [key: string]: unknown };

function isPlain(value: unknown): value is Plain {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

/** Later wins; objects are merged, arrays and bare values are replaced. */
export function mergeChoices(earlier: unknown, later: unknown): unknown {
  if (later === undefined) return earlier;
  if (!isPlain(earlier) || !isPlain(later)) return later;
  const merged: Plain = { ...earlier };
  for (const [key, value] of Object.entries(later)) {
    const before = Object.hasOwn(merged, key) ? merged[key] : undefined;
    // defineProperty keeps a key named __proto__ an ordinary (unknown) key.
    Object.defineProperty(merged, key, {
      value: mergeChoices(before, value),
      enumerable: true,
      configurable: true,
      writable: true,
    });
  }
  return merged;
}

/** Keys that the schema does not know, each with its dotted path and the nearest known key. */
function unknownKeys(found: unknown, known: unknown, path: string): ProtocolIssue[] {
  if (!isPlain(found) || !isPlain(known)) return [];
  const issues: ProtocolIssue[] = [];
  for (const [key, value] of Object.entries(found)) {
    const dotted = path === "" ? key : `${path}.${key}`;
    if (!Object.hasOwn(known, key)) {
      const nearest = nearestWord(key, Object.keys(known));
      issues.push({
        code: "protocol/unknown-key",
        facts: {
          key: dotted,
          nearest: nearest === null ? null : path === "" ? nearest : `${path}.${nearest}`,
          known: Object.keys(known).join(", "),
        },
      });
    } else issues.push(...unknownKeys(value, known[key], dotted));
  }
  return issues;
}

/**
 * What a user wrote (any part of a protocol) to the full protocol: defaults, then the preset, then the user's own.
 * Unknown keys are refused with the nearest known key named.
 */
export function resolveProtocol(input: unknown): Result<Protocol, ProtocolIssue> {
  if (!isPlain(input)) {
    return failure({ code: "protocol/schema", facts: { found: describe(input), expected: "a JSON object" } });
  }
  if (input["schema"] !== undefined && input["schema"] !== PROTOCOL_SCHEMA) {
    return failure({
      code: "protocol/schema",
      facts: { found: describe(input["schema"]), expected: PROTOCOL_SCHEMA },
    });
  }
  const keys = Object.keys(input);
  // One misspelt key is a slip; several of which none is known are another kind of file.
  if (keys.length > 1 && !keys.some((key) => Object.hasOwn(DEFAULT_PROTOCOL, key))) {
    return failure({
      code: "protocol/not-a-protocol",
      facts: { keys: `${keys.slice(0, 3).join(", ")}${keys.length > 3 ? ", ..." : ""}` },
    });
  }
  const unknown = unknownKeys(input, DEFAULT_PROTOCOL, "");
  if (unknown.length > 0) return failure(...unknown);
  const id = isPlain(input["material"]) ? input["material"]["preset"] : null;
  let presetChoices: ProtocolInput = {};
  if (typeof id === "string") {
    const preset = findPreset(id);
    if (preset === undefined) {
      const known = PRESETS.map((one) => one.id);
      return failure({
        code: "protocol/unknown-preset",
        facts: { found: id, nearest: nearestWord(id, known) ?? known.join(", ") },
      });
    }
    presetChoices = preset.protocol;
  }
  const merged = mergeChoices(mergeChoices(DEFAULT_PROTOCOL, presetChoices), input);
  const parsed = protocolSchema.safeParse(merged);
  if (parsed.success) return success(parsed.data);
  return failure(
    ...parsed.error.issues.map((issue): ProtocolIssue => {
      const found = issue.path.reduce<unknown>(
        (value, key) =>
          isPlain(value) || Array.isArray(value) ? (value as Plain)[key as string] : undefined,
        merged,
      );
      return {
        code: "protocol/bad-value",
        facts: { key: issue.path.join("."), found: describe(found), expected: wordExpected(issue) },
      };
    }),
  );
}

function describe(value: unknown): string {
  return value === undefined ? "nothing" : JSON.stringify(value);
}

export function wordProtocolIssue(issue: ProtocolIssue): Wording {
  switch (issue.code) {
    case "protocol/unknown-key":
      return {
        message: `protocol: unknown key "${issue.facts.key}"`,
        remedy:
          issue.facts.nearest === null
            ? `known here: ${issue.facts.known}`
            : `did you mean "${issue.facts.nearest}"?`,
      };
    case "protocol/bad-value":
      return {
        message: `protocol: ${issue.facts.key} is ${issue.facts.found}`,
        remedy: issue.facts.expected,
      };
    case "protocol/unknown-preset":
      return {
        message: `protocol: no material preset "${issue.facts.found}"`,
        remedy: `known: ${issue.facts.nearest ?? ""}`,
      };
    case "protocol/not-a-protocol":
      return {
        message: `protocol: not a protocol (its keys are ${issue.facts.keys})`,
        remedy: `give a protocol (${PROTOCOL_SCHEMA}), or a result or report whose run is to be repeated`,
      };
    case "protocol/schema":
      return {
        message: `protocol: schema is ${issue.facts.found}`,
        remedy: `expected ${issue.facts.expected}`,
      };
  }
}

/** The protocol schema as JSON Schema, for editors and other programs. */
export function protocolJsonSchema(): object {
  return z.toJSONSchema(protocolSchema);
}
