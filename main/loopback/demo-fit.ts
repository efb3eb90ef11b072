import { join } from "node:path";
import { existsSync } from "node:fs";
import { readNamedFiles } from "../page/index.ts";

/** The words after `rungline` that show the main job on the demo run; null where there is no demo. */
export async function demoFit(folder: string): Promise<readonly string[] | null> {
  const [first] = existsSync(folder) ? await readNamedFiles([folder]) : [];
  if (first === undefined) return null;
  return ["fit", join(folder, first.name), "--material", "cuprous-oxide-yellow-p", "--format", "text"];
}
