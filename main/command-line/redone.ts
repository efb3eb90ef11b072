import { readFile } from "node:fs/promises";
import { differences, type Protocol } from "../../app/protocol/index.ts";
import { protocolToJson } from "../../app/report/index.ts";
import { pathKind } from "../services/index.ts";

const SHOWN = 5;

/** Before a folder of results is filled again by another protocol: what is replaced, and why; empty where nothing is. */
export async function redoneInWords(
  place: { readonly protocol: string; readonly results: readonly string[] },
  protocol: Protocol,
): Promise<string> {
  let before: unknown;
  try {
    before = JSON.parse(await readFile(place.protocol, "utf8"));
  } catch {
    return "";
  }
  const changed = differences(before, JSON.parse(protocolToJson(protocol)));
  if (changed.length === 0) return "";
  const kinds = await Promise.all(place.results.map((file) => pathKind(file)));
  const there = kinds.filter((kind) => kind === "file").length;
  if (there === 0) return "";
  const keys = changed.slice(0, SHOWN).map(({ key, was, is }) => `${key} was ${say(was)}, is ${say(is)}`);
  const more = changed.length > SHOWN ? `; and ${changed.length - SHOWN} more keys` : "";
  return `rungline: fitted before with another protocol: ${there} result${there === 1 ? " is" : "s are"} replaced (${keys.join("; ")}${more})\n`;
}

function say(value: unknown): string {
  return value === undefined ? "not there" : JSON.stringify(value);
}
