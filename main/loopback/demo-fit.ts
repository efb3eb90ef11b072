import { existsSync } from "node:fs";
import { join, relative } from "node:path";
import { readNamedFiles, type Place } from "../page/index.ts";

/** The words after `rungline`, said in the package's folder, that show the main job on the demo run; null where there is none. */
export async function demoFit({ root, demo }: Place): Promise<readonly string[] | null> {
  const [first] = existsSync(demo) ? await readNamedFiles([demo]) : [];
  if (first === undefined) return null;
  const file = relative(root, join(demo, first.name));
  return ["fit", file, "--material", "cuprous-oxide-yellow-p", "--format", "text"];
}
