import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";

/**
 * Electron's program where it is already installed, else null. The package is never required: that alone would make
 * it fetch its binary.
 */
export function findElectron(root: string, exists: (path: string) => boolean = existsSync): string | null {
  const folder = join(root, "node_modules", "electron");
  const named = join(folder, "path.txt");
  if (!exists(named)) return null;
  const program = join(folder, "dist", readFileSync(named, "utf8").trim());
  return exists(program) ? program : null;
}
