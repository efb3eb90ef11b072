import type { z } from "zod";

type SchemaIssue = z.core.$ZodIssue;

/** What a key that takes a list looks like: a form is understood faster than its description. */
const EXAMPLES: Readonly<Record<string, string>> = {
  window_eV: "[2.14, 2.173]",
  mask_eV: "[[2.150, 2.151]]",
  background: '[{"term": "polynomial", "order": 2}]',
  "lines.n": "[2, 3, 4]",
  "lines.constraints": '[{"n": 4, "parameter": "width", "hold": 0.0003}]',
  "series.fit_n": "[5, 12]",
  "series.extra": '[{"name": "F", "defect": 0.1, "n": [4, 5, 6]}]',
  "power.values_uW": "[1, 5, 20]",
};

const TYPES: Readonly<Record<string, string>> = {
  number: "a number",
  int: "a whole number",
  string: "a text",
  boolean: "true or false",
  array: "a list",
  tuple: "a list",
  object: "an object",
  record: "an object",
};

/** One issue of the schema in words: what the key takes, with an example where it takes a list. */
export function wordExpected(issue: SchemaIssue): string {
  const words = expected(issue);
  const key = issue.path.filter((step) => typeof step === "string").join(".");
  const example = Object.hasOwn(EXAMPLES, key) ? EXAMPLES[key] : undefined;
  return example === undefined || issue.code === "custom" ? words : `${words}, for example ${example}`;
}

function expected(issue: SchemaIssue): string {
  switch (issue.code) {
    case "invalid_type":
      return `expected ${TYPES[issue.expected] ?? issue.expected}`;
    case "invalid_value":
      return `expected ${either(issue.values.map(show))}`;
    case "too_small":
      return limit(issue.origin, issue.minimum, issue.inclusive === true ? "at least" : "above");
    case "too_big":
      return limit(issue.origin, issue.maximum, issue.inclusive === true ? "at most" : "below");
    case "invalid_union": {
      if ("options" in issue) return `expected ${either((issue.options as readonly unknown[]).map(show))}`;
      const ways = issue.errors.flatMap((errors) => errors.slice(0, 1)).map(expected);
      return `expected ${either([...new Set(ways.map((way) => way.replace(/^expected /, "")))])}`;
    }
    default:
      return issue.message;
  }
}

function limit(origin: string, bound: number | bigint, relation: string): string {
  if (origin === "array" && bound === 1 && relation === "at least")
    return "expected a list that is not empty";
  if (origin === "array") return `expected a list of ${relation} ${String(bound)} values`;
  if (origin === "string") return "expected a text that is not empty";
  return `expected a number ${relation} ${String(bound)}`;
}

function show(value: unknown): string {
  return typeof value === "string" && !/^\s*$/.test(value) && value !== "," && value !== ";"
    ? value
    : JSON.stringify(value);
}

/** `a`, `a or b`, `a, b or c`. */
function either(words: readonly string[]): string {
  if (words.length < 2) return words.join("");
  return `${words.slice(0, -1).join(", ")} or ${words.at(-1) ?? ""}`;
}
