import { readdir, rm, stat } from "node:fs/promises";
import { basename, join } from "node:path";

/**
 * A run that was killed while it wrote leaves the half beside the file it was to become, under the file's name and a
 * number. Removed are those that belong to one of `files` and are older than `before` (ms since 1970), so that the
 * half of another run that is writing now stays.
 */
export async function removeLeftovers(
  folder: string,
  files: readonly string[],
  before: number,
): Promise<void> {
  const own = new Set(files.map((file) => basename(file)));
  for (const name of await readdir(folder).catch(() => [])) {
    const at = /\.\d+$/.exec(name)?.index;
    if (at === undefined || !own.has(name.slice(0, at))) continue;
    const path = join(folder, name);
    const changed = await stat(path).catch(() => null);
    if (changed?.isFile() === true && changed.mtimeMs < before) await rm(path, { force: true });
  }
}
