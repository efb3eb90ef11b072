import { readFile } from "node:fs/promises";
import { resolve } from "node:path";
import {
  choicesFromSetting,
  composeChoices,
  resolveProtocol,
  wordProtocolIssue,
  type Protocol,
  type ProtocolInput,
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
  const choices = composeChoices(file, options.material ?? null, settings);
  const protocol = resolveProtocol(choices);
  if (protocol.ok) return { choices, protocol: protocol.value };
  throw new UsageError(
    protocol.issues
      .map(wordProtocolIssue)
      .map(({ message, remedy }) => `${message}; ${remedy}`)
      .join("\nrungline: "),
  );
}

async function readProtocolFile(path: string, shown: string): Promise<unknown> {
  let text: string;
  try {
    text = await readFile(path, "utf8");
  } catch (cause) {
    throw new UsageError(`--protocol ${shown}: ${reasonInWords(cause)}`);
  }
  try {
    return JSON.parse(text.replace(/^\uFEFF/, ""));
  } catch (cause) {
    throw new UsageError(`--protocol ${shown}: not JSON (${cause instanceof Error ? cause.message : ""})`);
  }
}
