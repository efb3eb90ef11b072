import { spawnSync } from "node:child_process";
import { mkdirSync, mkdtempSync, realpathSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { build, type BuildOptions } from "esbuild";
import { afterEach, beforeEach, expect, it } from "vitest";

const ROOT = fileURLToPath(new URL("../..", import.meta.url));
let root: string;

beforeEach(() => {
  root = realpathSync(mkdtempSync(join(tmpdir(), "rungline-test-")));
});
afterEach(() => rmSync(root, { recursive: true, force: true }));

/** What the program asks of Electron when it starts, written down instead of done. */
const STAND_IN = `
const words = [];
const note = (name) => (...given) => {
  words.push(name + " " + given.map((one) => (typeof one === "string" ? one : typeof one)).join(" "));
};
export const app = {
  isPackaged: false, enableSandbox: note("enableSandbox"), on: note("on"),
  whenReady: async () => note("whenReady")(), quit: note("quit"), exit: (code) => process.exit(code),
};
export class BrowserWindow {
  constructor(options) { note("preload")(options.webPreferences.preload); }
  once() {}
  async loadURL(address) { note("load")(address); console.log(JSON.stringify(words)); }
}
export const Menu = { buildFromTemplate: (template) => template, setApplicationMenu: note("menu") };
export const dialog = { showErrorBox: (title, text) => console.log(title + ": " + text) };
export const ipcMain = { handle: (channel) => note("handle")(channel) };
export const protocol = { registerSchemesAsPrivileged: note("schemes"), handle: note("scheme") };
const handler = () => {};
export const session = { defaultSession: {
  setPermissionRequestHandler: handler, setPermissionCheckHandler: handler, setDevicePermissionHandler: handler,
  webRequest: { onBeforeRequest: handler },
} };
`;

it("the program as bundled starts by itself and finds its page and preload script beside it", async () => {
  const { electronBuildOptions } = (await import(
    pathToFileURL(join(ROOT, "main/electron/build-options.mjs")).href
  )) as { electronBuildOptions(from: string): (BuildOptions & { outfile: string })[] };
  mkdirSync(join(root, "dist", "renderer"), { recursive: true });
  mkdirSync(join(root, "node_modules", "electron"), { recursive: true });
  writeFileSync(join(root, "package.json"), '{ "version": "1.2.3", "type": "module" }');
  writeFileSync(join(root, "dist", "renderer", "index.html"), "<!doctype html>");
  writeFileSync(
    join(root, "node_modules", "electron", "package.json"),
    '{ "name": "electron", "type": "module", "exports": "./index.js" }',
  );
  writeFileSync(join(root, "node_modules", "electron", "index.js"), STAND_IN);
  const [main, preload] = electronBuildOptions(ROOT);
  expect(main!.outfile).toBe(join(ROOT, "dist/main/electron.js"));
  expect(preload!.outfile).toBe(join(ROOT, "dist/main/preload.cjs"));
  await build({ ...main!, outfile: join(root, "dist", "main", "electron.js"), logLevel: "silent" });

  const { stdout, stderr } = spawnSync(process.execPath, [join(root, "dist", "main", "electron.js")], {
    encoding: "utf8",
  });
  expect(stderr).toBe("");
  expect(JSON.parse(stdout)).toEqual([
    "enableSandbox ",
    "schemes object",
    "on web-contents-created function",
    "on window-all-closed function",
    "whenReady ",
    "scheme app function",
    ...["about", "startFiles", "demoFiles", "demoSeries", "openFiles", "saveFile"].map(
      (name) => `handle rungline:${name}`,
    ),
    `preload ${join(root, "dist", "main", "preload.cjs")}`,
    "menu object",
    "load app://rungline/index.html",
  ]);
});
