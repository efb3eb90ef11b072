#!/usr/bin/env node
/**
 * The command `rungline`. Builds what the words ask for where dist/ does not hold it as the sources stand (a fit needs
 * only the command line, the window its page too), then runs it in this process.
 */
import { existsSync } from "node:fs";
import { join } from "node:path";
import { buildParts, isFresh, ROOT } from "./build.mjs";

const needsWindow = ["window", "start"].includes(process.argv[2] ?? "");
const parts = needsWindow ? ["command-line", "window", "electron"] : ["command-line"];
const stale = parts.filter((part) => !isFresh(part));
if (stale.length > 0 && !existsSync(join(ROOT, "node_modules", "esbuild"))) {
  process.stderr.write(`rungline: the packages are missing: run \`npm ci\` in ${ROOT} first\n`);
  process.exit(1);
}
try {
  await buildParts(stale);
} catch (thrown) {
  process.stderr.write(
    `rungline: could not be built: ${thrown instanceof Error ? thrown.message : thrown}\n`,
  );
  process.exit(1);
}
await import("../dist/main/command-line.mjs");
