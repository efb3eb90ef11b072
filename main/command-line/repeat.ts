import { differences } from "../../app/protocol/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { programVersion } from "../services/index.ts";
import type { Choices } from "./choices.ts";

const SHOWN = 5;

/** Before a run is repeated: what is no longer as it was, but for the inputs; empty where nothing is repeated. */
export function changesInWords({ repeats, protocol }: Choices): string {
  const [first] = repeats?.results ?? [];
  if (repeats === null || first === undefined) return "";
  const lines: string[] = [];
  const versions = [...new Set(repeats.results.map((result) => result.run.version))];
  for (const version of versions)
    if (version !== programVersion())
      lines.push(
        `version changed: ${repeats.shown} was made by Rungline ${version}, this is ${programVersion()}`,
      );
  const changed = differences(first.protocol, protocol);
  for (const { key, was, is } of changed.slice(0, SHOWN))
    lines.push(`protocol changed: ${key} was ${inWords(was)}, is ${inWords(is)}`);
  if (changed.length > SHOWN) lines.push(`protocol changed: ${changed.length - SHOWN} more keys`);
  return lines.map((line) => `rungline: ${line}\n`).join("");
}

/** After a fit: whether it came out as the recorded one, or that its input is another. */
export function repeatInWords({ repeats, protocol }: Choices, result: RunglineResult): string {
  if (repeats === null || repeats.results.length === 0) return "";
  const { file, sha256 } = result.source;
  const recorded =
    repeats.results.find((one) => one.source.sha256 === sha256 && one.source.file === file) ??
    repeats.results.find((one) => one.source.sha256 === sha256);
  if (recorded === undefined) {
    const named = repeats.results.find((one) => one.source.file === file);
    return named === undefined
      ? `  input changed: ${repeats.shown} was not made from this file (SHA-256 ${sha256})\n`
      : `  input changed: SHA-256 of ${file} was ${named.source.sha256}, is ${sha256}\n`;
  }
  const comparable = (one: RunglineResult): object => ({
    ...one,
    run: null,
    protocol: null,
    source: { ...one.source, file: null },
  });
  const found = differences(comparable(recorded), comparable(result));
  if (found.length === 0) return `  repeats ${repeats.shown} to the last bit\n`;
  const { key, was, is } = found[0]!;
  const cause =
    recorded.run.version !== result.run.version || differences(recorded.protocol, protocol).length > 0
      ? ""
      : recorded.run.node !== result.run.node
        ? ` (same input, protocol and version; it ran on ${recorded.run.node}, this is ${result.run.node})`
        : " (same input, protocol and version)";
  return `  differs from ${repeats.shown} in ${found.length} values${cause}; the first, ${key}, was ${inWords(was)}, is ${inWords(is)}\n`;
}

function inWords(value: unknown): string {
  return value === undefined ? "not there" : JSON.stringify(value);
}
