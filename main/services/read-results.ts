import { readdir, readFile } from "node:fs/promises";
import { join, resolve } from "node:path";
import { parseResults, wordResultIssue, type RunglineResult } from "../../app/protocol/index.ts";
import { pathKind } from "./files.ts";
import { isPattern, matchPattern } from "./match-pattern.ts";
import { reasonInWords } from "./output-error.ts";

export interface FoundResults {
  readonly results: readonly RunglineResult[];
  /** The file that each result came from. */
  readonly paths: readonly string[];
  /** What was named, but holds no result: in words. */
  readonly refused: readonly string[];
}

/**
 * Words of the command line to results. A file may hold one result, several, or be a report that carries them; a folder
 * stands for the results in its own .json files in the order of their names, whatever else lies there, so that the
 * outputs of several runs merge by being named together.
 */
export async function readResults(words: readonly string[], workingFolder: string): Promise<FoundResults> {
  const results: RunglineResult[] = [];
  const paths: string[] = [];
  const refused: string[] = [];
  const take = async (path: string, named: boolean): Promise<number> => {
    let text: string;
    try {
      text = await readFile(resolve(workingFolder, path), "utf8");
    } catch (cause) {
      refused.push(`${path}: ${reasonInWords(cause)}`);
      return 0;
    }
    // A folder of results holds protocol, summary and failures too: told apart by their beginning, before any parsing.
    const schema = /^\s*\[?\s*\{\s*"schema"\s*:\s*"([^"]*)"/.exec(text.slice(0, 400))?.[1] ?? "";
    if (!named && !schema.startsWith("rungline-result/")) return 0;
    const parsed = parseResults(text);
    if (parsed.ok) {
      results.push(...parsed.value);
      paths.push(...parsed.value.map(() => path));
      return parsed.value.length;
    }
    const { message, remedy } = wordResultIssue(parsed.issues[0]!);
    refused.push(`${path}: ${message}\n  ${remedy}`);
    return 0;
  };
  for (const word of words) {
    const kind = await pathKind(resolve(workingFolder, word));
    if (kind === "folder") {
      const names = (await readdir(resolve(workingFolder, word)))
        .filter((name) => !name.startsWith(".") && name.toLowerCase().endsWith(".json"))
        .sort();
      let found = 0;
      const before = refused.length;
      for (const name of names) found += await take(join(word, name), false);
      if (found === 0 && refused.length === before) refused.push(`${word}: no results in this folder`);
    } else if (kind === "none" && isPattern(word)) {
      const paths = await matchPattern(word, workingFolder);
      for (const path of paths) await take(path, false);
      if (paths.length === 0) refused.push(`${word}: no file fits this pattern`);
    } else await take(word, true);
  }
  return { results, paths, refused };
}
