import { readdir } from "node:fs/promises";
import { isAbsolute, join, parse, resolve, sep } from "node:path";
import { pathKind } from "./files.ts";

export function isPattern(word: string): boolean {
  return /[*?]/.test(word);
}

/**
 * The files that fit a pattern, in the order of their names: `*` is any part of a name, `?` one character, in folders
 * too; a leading dot is only fitted by a dot. Paths are relative where the pattern is.
 */
export async function matchPattern(pattern: string, workingFolder: string): Promise<readonly string[]> {
  const root = isAbsolute(pattern) ? parse(pattern).root : "";
  const parts = pattern
    .slice(root.length)
    .split(sep === "\\" ? /[\\/]/ : "/")
    .filter((part) => part !== "");
  let paths = [root];
  for (const part of parts) {
    if (!isPattern(part)) {
      paths = paths.map((path) => join(path, part));
      continue;
    }
    const fits = new RegExp(
      `^${part
        .replace(/[.+^${}()|[\]\\]/g, "\\$&")
        .replaceAll("*", ".*")
        .replaceAll("?", ".")}$`,
      "su",
    );
    const found: string[] = [];
    for (const path of paths) {
      const names = await readdir(resolve(workingFolder, path)).catch(() => []);
      for (const name of names.sort())
        if (fits.test(name) && (!name.startsWith(".") || part.startsWith("."))) found.push(join(path, name));
    }
    paths = found;
  }
  const files: string[] = [];
  for (const path of paths) if ((await pathKind(resolve(workingFolder, path))) === "file") files.push(path);
  return files;
}
