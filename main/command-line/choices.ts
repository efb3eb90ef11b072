import { readFile } from "node:fs/promises";
import { resolve } from "node:path";
import {
  choicesFromSetting,
  composeChoices,
  parseProtocolSource,
  resolveProtocol,
  wordProtocolIssue,
  wordResultIssue,
  type Protocol,
  type ProtocolInput,
  type ProtocolSource,
  type RunglineResult,
} from "../../app/protocol/index.ts";
import { reasonInWords } from "../services/index.ts";
import { UsageError } from "./exit-status.ts";

export interface ChoiceOptions {
  readonly protocol?: string;
  readonly material?: string;
  readonly set: readonly string[];
}

export interface Choices {
  /** As written, for the task. */
  readonly choices: unknown;
  /** Spelled out, for the file beside the result. */
  readonly protocol: Protocol;
  /** The results whose run is to be repeated, and the file they came from; null where it is a protocol alone. */
  readonly repeats: { readonly shown: string; readonly results: readonly RunglineResult[] } | null;
}

/** Later settings win, `--set` over `--material` over `--protocol`; whatever is wrong with them is wrong usage. */
export async function readChoices(options: ChoiceOptions, workingFolder: string): Promise<Choices> {
  const file =
    options.protocol === undefined
      ? null
      : await readProtocolFile(resolve(workingFolder, options.protocol), options.protocol);
  const settings = options.set.map((setting): ProtocolInput => {
    const choices = choicesFromSetting(setting);
    if (choices === null)
      throw new UsageError(`--set ${setting}: expected key=value, for example --set axis.medium=vacuum`);
    return choices;
  });
  const choices = composeChoices(file?.choices, options.material ?? null, settings);
  const protocol = resolveProtocol(choices);
  const repeats =
    file === null || file.results.length === 0 ? null : { shown: options.protocol!, results: file.results };
  if (protocol.ok) return { choices, protocol: protocol.value, repeats };
  throw new UsageError(
    protocol.issues
      .map(wordProtocolIssue)
      .map(({ message, remedy }) => `${message}; ${remedy}`)
      .join("\nrungline: "),
  );
}

async function readProtocolFile(path: string, shown: string): Promise<ProtocolSource> {
  let text: string;
  try {
    text = await readFile(path, "utf8");
  } catch (cause) {
    throw new UsageError(`--protocol ${shown}: ${reasonInWords(cause)}`);
  }
  const source = parseProtocolSource(text);
  if (source.ok) return source.value;
  const { message, remedy } = wordResultIssue(source.issues[0]!);
  throw new UsageError(`--protocol ${shown}: ${message}; ${remedy}`);
}
