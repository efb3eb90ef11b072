/**
 * `npm run package [-- --stand-in] [electron-builder's own words]`: builds everything, then packs with electron-builder.
 *
 * Electron's program is taken from RUNGLINE_ELECTRON_DIST, else from node_modules/electron/dist where it is installed;
 * where it is neither, electron-builder fetches it as it always does. `--stand-in` packs against an empty stand-in
 * instead, which shows that the packing works and what would be in it; the outcome does not run.
 */
import { spawnSync } from "node:child_process";
import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const root = dirname(dirname(fileURLToPath(import.meta.url)));
const words = process.argv.slice(2);
const standIn = words.includes("--stand-in");
const rest = words.filter((word) => word !== "--stand-in");

/** What electron-builder looks for in a folder of Electron, with a program that only carries the marks of its fuses. */
function makeStandIn() {
  const folder = mkdtempSync(join(tmpdir(), "rungline-electron-"));
  const { version } = JSON.parse(readFileSync(join(root, "node_modules/electron/package.json"), "utf8"));
  // @electron/fuses finds this sentence in the program, then the wire's version, its length, and one byte a fuse.
  const fuses = Buffer.concat([
    Buffer.from("dL7pKGdnNz796PbbjQWNKmHXBZaB9tsX"),
    Buffer.from([1, 8]),
    Buffer.from("10011101"),
  ]);
  const refusal =
    "#!/bin/sh\necho 'packed against a stand-in: there is no Electron in this folder' >&2\nexit 1\n# ";
  writeFileSync(join(folder, "electron"), Buffer.concat([Buffer.from(refusal), fuses, Buffer.from("\n")]), {
    mode: 0o755,
  });
  writeFileSync(join(folder, "version"), version);
  mkdirSync(join(folder, "resources"));
  mkdirSync(join(folder, "locales"));
  return folder;
}

function electronFolder() {
  if (standIn) return makeStandIn();
  const named = process.env["RUNGLINE_ELECTRON_DIST"];
  if (named) return named;
  const installed = join(root, "node_modules/electron/dist");
  return existsSync(join(installed, "version")) ? installed : null;
}

function run(script, given) {
  const { status } = spawnSync(process.execPath, [join(root, script), ...given], {
    cwd: root,
    stdio: "inherit",
  });
  return status ?? 1;
}

let status = run("main/build.mjs", []);
if (status === 0) {
  const folder = electronFolder();
  try {
    status = run("node_modules/electron-builder/cli.js", [
      ...(folder === null ? [] : [`-c.electronDist=${folder}`]),
      ...(standIn && rest.length === 0 ? ["--linux", "dir"] : rest),
    ]);
  } finally {
    if (standIn && folder !== null) rmSync(folder, { recursive: true, force: true });
  }
}
process.exitCode = status;
