import { existsSync, readFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

/** Where things stand on disk. */
export interface Place {
  /** The folder that holds package.json. */
  readonly root: string;
  /** The built page. */
  readonly page: string;
  /** The demo run. */
  readonly demo: string;
  readonly version: string;
}

/**
 * The nearest folder above this file that holds package.json: true of the source, of the bundle in dist/main and of
 * the packed archive alike, so nothing depends on the folder in which a program was started.
 */
export function findPlace(from: string = fileURLToPath(import.meta.url)): Place {
  let root = dirname(from);
  while (!existsSync(join(root, "package.json"))) {
    const above = dirname(root);
    if (above === root) throw new Error("package.json not found above the program");
    root = above;
  }
  const facts = JSON.parse(readFileSync(join(root, "package.json"), "utf8")) as { version: string };
  return {
    root,
    page: join(root, "dist", "renderer"),
    demo: join(root, "fixtures", "demo"),
    version: facts.version,
  };
}
