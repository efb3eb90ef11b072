import type { ComparisonChoicesInput } from "../../app/protocol/index.ts";

export type TypedValues = NonNullable<ComparisonChoicesInput["values"]>;

export interface TypedFact {
  /** The file that the fact is of. */
  readonly of: string;
  readonly name: string;
  /** "" gives the header back its say. */
  readonly text: string;
}

const plain = (name: string): string => name.trim().toLowerCase();

/** Facts typed over the headers, with these changed; names count without regard to capitals. */
export function typeFacts(values: TypedValues, changes: readonly TypedFact[]): TypedValues {
  const typed = new Map(values.map(({ of, facts }) => [of, { ...facts }]));
  for (const { of, name, text } of changes) {
    const facts = Object.fromEntries(
      Object.entries(typed.get(of) ?? {}).filter(([other]) => plain(other) !== plain(name)),
    );
    if (text !== "") facts[name] = text;
    typed.set(of, facts);
  }
  return [...typed].flatMap(([of, facts]) => (Object.keys(facts).length === 0 ? [] : [{ of, facts }]));
}

export function typedFact(values: TypedValues, of: string, name: string): string {
  const facts = values.find((one) => one.of === of)?.facts ?? {};
  return Object.entries(facts).find(([other]) => plain(other) === plain(name))?.[1] ?? "";
}

/** Names of the typed columns beside those that every comparison has. */
export function typedColumns(values: TypedValues): readonly string[] {
  const names = new Map<string, string>();
  for (const { facts } of values)
    for (const name of Object.keys(facts))
      if (!["sample", "batch", "temperature", "date"].includes(plain(name))) names.set(plain(name), name);
  return [...names.values()];
}
