import { readdir, realpath } from "node:fs/promises";
import { basename, dirname, extname, join, resolve } from "node:path";
import { SPECTRUM_ENDINGS } from "../page/index.ts";
import { isPattern, matchPattern } from "./match-pattern.ts";
import { pathKind } from "./files.ts";

export interface InputFile {
  /** As the user wrote it, or folder/name for a file found in a folder. */
  readonly path: string;
  /** The file's own name: what a result calls its source. */
  readonly file: string;
}

export interface InputList {
  readonly files: readonly InputFile[];
  /** Whether a folder or pattern was among the words, so that output goes to a folder. */
  readonly hasFolder: boolean;
  /** Folders without any spectrum, and patterns that nothing fits. */
  readonly nothingFound: readonly { readonly word: string; readonly why: string }[];
}

/**
 * Words of the command line to files. A folder stands for its own non-hidden spectrum files in the order of their
 * names, not for subfolders; a pattern (* any part of a name, ? one character) stands for the files that fit it, for
 * shells that leave patterns to the program; a file named twice is taken once. Files that do not exist are kept:
 * reading says so.
 */
export async function listInputs(words: readonly string[], workingFolder: string): Promise<InputList> {
  const files: InputFile[] = [];
  const nothingFound: { word: string; why: string }[] = [];
  const seen = new Set<string>();
  let hasFolder = false;
  const add = async (path: string): Promise<void> => {
    const absolute = resolve(workingFolder, path);
    const identity = await realpath(absolute).catch(() => absolute);
    if (seen.has(identity)) return;
    seen.add(identity);
    files.push({ path, file: basename(path) });
  };
  for (const word of words) {
    const absolute = resolve(workingFolder, word);
    const kind = await pathKind(absolute);
    if (kind === "none" && isPattern(word)) {
      const fitting = await matchPattern(word, workingFolder);
      for (const path of fitting) await add(path);
      // As with a folder, the number of files may be any, so output goes to a folder.
      hasFolder = true;
      if (fitting.length === 0) nothingFound.push({ word, why: "no file fits this pattern" });
      continue;
    }
    if (kind !== "folder") {
      await add(word);
      continue;
    }
    hasFolder = true;
    const names = (await readdir(absolute, { withFileTypes: true }))
      .filter((entry) => !entry.name.startsWith(".") && isSpectrumName(entry.name))
      .map((entry) => entry.name)
      .sort();
    let found = 0;
    for (const name of names) {
      // A link to a file counts as the file; a folder of that name does not.
      if ((await pathKind(join(absolute, name))) !== "file") continue;
      found++;
      await add(join(word, name));
    }
    if (found === 0) nothingFound.push({ word, why: "no spectrum files in this folder" });
  }
  return { files, hasFolder, nothingFound };
}

function isSpectrumName(name: string): boolean {
  return SPECTRUM_ENDINGS.includes(extname(name).slice(1).toLowerCase());
}

/** Names that a folder of results keeps for itself. */
const TAKEN = ["protocol", "failures", "summary"];

/**
 * The NAME of NAME.json for each input: its base name; with the extension where two inputs share a base name (or it
 * is taken); with the name of its folder before it where even that is shared. Names differ also where case is not
 * told apart.
 */
export function resultNames(files: readonly InputFile[], workingFolder: string): readonly string[] {
  const short = files.map(({ file }) => basename(file, extname(file)));
  const long = files.map(({ file }) => file);
  const longest = files.map(({ path, file }) => `${basename(dirname(resolve(workingFolder, path)))}-${file}`);
  const names = short.map((name, i) => {
    if (isAlone(short, i) && !TAKEN.includes(name.toLowerCase())) return name;
    return isAlone(long, i) ? long[i]! : longest[i]!;
  });
  // Folders of the same name, far apart: a number tells the rest apart.
  const given = new Map<string, number>();
  return names.map((name) => {
    const count = (given.get(name.toLowerCase()) ?? 0) + 1;
    given.set(name.toLowerCase(), count);
    return count === 1 ? name : `${name}-${count}`;
  });
}

function isAlone(names: readonly string[], i: number): boolean {
  const name = names[i]!.toLowerCase();
  return names.every((other, j) => j === i || other.toLowerCase() !== name);
}
