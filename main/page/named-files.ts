import { existsSync } from "node:fs";
import { readdir, readFile, stat } from "node:fs/promises";
import { basename, extname, join } from "node:path";
import type { NamedBytes } from "../../app/tasks/index.ts";
import type { Place } from "./place.ts";

/** What is taken from a folder: its own non-hidden files with these endings, no subfolders. */
export const SPECTRUM_ENDINGS: readonly string[] = ["csv", "tsv", "txt", "dat", "asc", "jdx"];

/** Paths to files with their bytes; a folder stands for the spectra in it, in the order of their names. */
export async function readNamedFiles(paths: readonly string[]): Promise<readonly NamedBytes[]> {
  const files: NamedBytes[] = [];
  for (const path of paths) {
    if ((await stat(path)).isDirectory()) {
      const names = (await readdir(path))
        .filter((name) => !name.startsWith(".") && isSpectrumName(name))
        .sort();
      for (const name of names) {
        if ((await stat(join(path, name))).isFile())
          files.push({ name, bytes: await readFile(join(path, name)) });
      }
    } else files.push({ name: basename(path), bytes: await readFile(path) });
  }
  return files;
}

/** The demo power series: a folder of its own, so that the demo run does not open with it. */
export async function readDemoSeries({ demo }: Place): Promise<readonly NamedBytes[]> {
  const folder = join(demo, "power");
  return existsSync(folder) ? readNamedFiles([folder]) : [];
}

function isSpectrumName(name: string): boolean {
  return SPECTRUM_ENDINGS.includes(extname(name).slice(1).toLowerCase());
}
