/**
 * Builds the parts of Rungline into dist/. Each part carries a stamp of its sources (path, size, time of change);
 * a part whose stamp still fits is left alone. Files are built beside and renamed one by one, those that others
 * refer to first, so that starts at the same moment cannot hand each other half a program.
 *
 *   node main/build.mjs [PART...]     parts: command-line, electron, window; all without a word
 */
import { createHash } from "node:crypto";
import { mkdir, readdir, readFile, rename, rm, stat, writeFile } from "node:fs/promises";
import { existsSync, readdirSync, readFileSync, statSync } from "node:fs";
import { basename, dirname, join, relative } from "node:path";
import { fileURLToPath } from "node:url";
import { collectFiles, noticesText, packageFolders } from "./notices.mjs";
import { DRAWING_FILES } from "./services/drawing-files.mjs";

export const ROOT = dirname(dirname(fileURLToPath(import.meta.url)));
const DIST = join(ROOT, "dist");
const NOTICES = "THIRD-PARTY-NOTICES.txt";

/** What each part is made of, and how; a build returns the files that went into its bundles. */
const PARTS = {
  "command-line": { sources: ["app", "main"], build: buildCommandLine },
  electron: { sources: ["app", "main"], build: buildElectron },
  window: { sources: ["app", "renderer"], build: buildWindow },
};
const SHARED_SOURCES = ["package.json", "package-lock.json", "main/build.mjs", "main/notices.mjs"];

export const PART_NAMES = Object.keys(PARTS);

/** True where dist holds this part as its sources stand now. */
export function isFresh(part) {
  const file = stampFile(part);
  return existsSync(file) && readFileSync(file, "utf8") === stampOf(part);
}

/** Builds those of the parts that are not fresh; words about it go to standard error. */
export async function buildParts(parts) {
  for (const part of parts) {
    if (isFresh(part)) continue;
    const stamp = stampOf(part);
    const began = Date.now();
    process.stderr.write(`rungline: building ${part} ...\n`);
    const files = await PARTS[part].build();
    await putFile(packagesFile(part), JSON.stringify(packageFolders(files, ROOT)));
    await writeNotices();
    await putFile(stampFile(part), stamp);
    process.stderr.write(`rungline: built ${part} in ${((Date.now() - began) / 1000).toFixed(1)} s\n`);
  }
}

/** The licences of every package in the parts that stand in dist. */
async function writeNotices() {
  const lists = PART_NAMES.map(packagesFile).filter((file) => existsSync(file));
  const folders = lists.flatMap((file) => JSON.parse(readFileSync(file, "utf8")));
  await putFile(join(DIST, NOTICES), noticesText(folders));
}

function packagesFile(part) {
  return join(DIST, `.${part}.packages.json`);
}

function stampFile(part) {
  return join(DIST, `.${part}.stamp`);
}

function stampOf(part) {
  const hash = createHash("sha256");
  const add = (path) => {
    const { size, mtimeMs } = statSync(path);
    hash.update(`${relative(ROOT, path)} ${size} ${mtimeMs}\n`);
  };
  const walk = (folder) => {
    for (const entry of readdirSync(folder, { withFileTypes: true }).sort((a, b) =>
      a.name < b.name ? -1 : 1,
    )) {
      const path = join(folder, entry.name);
      if (entry.isDirectory()) walk(path);
      else add(path);
    }
  };
  for (const folder of PARTS[part].sources) walk(join(ROOT, folder));
  for (const file of SHARED_SOURCES) add(join(ROOT, file));
  return hash.digest("hex");
}

function version() {
  return JSON.parse(readFileSync(join(ROOT, "package.json"), "utf8")).version;
}

async function bundle(options) {
  const { build } = await import("esbuild");
  const { outputFiles, metafile } = await build({
    absWorkingDir: ROOT,
    bundle: true,
    minify: true,
    keepNames: true,
    platform: "node",
    target: "node20",
    legalComments: "none",
    logLevel: "warning",
    logOverride: { "empty-import-meta": "silent" },
    define: { RUNGLINE_VERSION: JSON.stringify(version()) },
    ...options,
    metafile: true,
    write: false,
  });
  // What was read but left out, as it is not used, is in no output.
  const inputs = Object.values(metafile.outputs).flatMap((output) => Object.keys(output.inputs));
  return { files: outputFiles, inputs };
}

/** Of zod's messages in forty languages only the English ones are used; the rest would be a third of the program. */
const ENGLISH_ONLY = {
  name: "english-only",
  setup({ onLoad }) {
    onLoad({ filter: /[\\/]zod[\\/]v4[\\/]locales[\\/]index\.js$/ }, () => ({
      contents: `export { default as en } from ${JSON.stringify("./en.js")};`,
    }));
  },
};

/** The pool looks for its threads' program beside itself; in the bundle that program has another name. */
const POOL_THREAD = {
  name: "pool-thread",
  setup({ onLoad }) {
    onLoad({ filter: /[\\/]piscina[\\/]dist[\\/]index\.js$/ }, async ({ path }) => {
      const text = await readFile(path, "utf8");
      const contents = text.replace("__dirname, 'worker.js'", "__dirname, 'pool-thread.mjs'");
      if (contents === text) throw new Error("piscina no longer starts worker.js: see main/build.mjs");
      return { contents };
    });
  },
};

async function buildCommandLine() {
  const folder = join(DIST, "main");
  const { files, inputs } = await bundle({
    entryPoints: {
      "command-line": "main/command-line/main.ts",
      "fit-thread": "main/services/fit-thread.ts",
      "fit-pool-thread": "main/services/pool-thread.ts",
      // Loaded on demand only, so the pool itself stands in parts/ too.
      "parts/pool-thread": "node_modules/piscina/dist/worker.js",
    },
    outdir: folder,
    format: "esm",
    plugins: [ENGLISH_ONLY, POOL_THREAD],
    // Machine code that the pool only asks for where threads are to run at a lower priority: not here.
    external: ["@napi-rs/nice"],
    splitting: true,
    outExtension: { ".js": ".mjs" },
    chunkNames: "parts/[name]-[hash]",
    // Packages written for `require` ask for it, and for their own place.
    banner: {
      js: [
        'import { createRequire as makeRequire } from "node:module";',
        'import { fileURLToPath as toPath } from "node:url";',
        "const require = makeRequire(import.meta.url), __filename = toPath(import.meta.url),",
        ' __dirname = toPath(new URL(".", import.meta.url));',
      ].join(""),
    },
  });
  // Typefaces and rasteriser are read as they are, when a figure is asked for (main/services/drawing-tools.ts).
  for (const file of Object.values(DRAWING_FILES).flat())
    await putFile(join(folder, "drawing", basename(file)), await readFile(join(ROOT, "node_modules", file)));
  const isEntry = (path) => dirname(path) === folder;
  for (const file of files) if (!isEntry(file.path)) await putFile(file.path, file.contents);
  for (const file of files) if (isEntry(file.path)) await putFile(file.path, file.contents);
  await removeOthers(join(folder, "parts"), new Set(files.map((file) => file.path)));
  const drawing = Object.values(DRAWING_FILES).flat();
  return [...inputs, ...drawing.map((file) => `node_modules/${file}`)];
}

async function buildElectron() {
  const { electronBuildOptions } = await import("./electron/build-options.mjs");
  const from = [];
  for (const options of electronBuildOptions(ROOT)) {
    const { files, inputs } = await bundle(options);
    for (const file of files) await putFile(file.path, file.contents);
    from.push(...inputs);
  }
  return from;
}

async function buildWindow() {
  const { build } = await import("vite");
  const beside = join(DIST, `.renderer-${process.pid}`);
  const folder = join(DIST, "renderer");
  const from = new Set();
  try {
    await build({
      root: join(ROOT, "renderer"),
      configFile: join(ROOT, "renderer", "vite.config.ts"),
      logLevel: "error",
      plugins: [collectFiles(from)],
      // Workers are bundles of their own.
      worker: { plugins: () => [collectFiles(from)] },
      build: { outDir: beside, emptyOutDir: true },
    });
    const built = await listFiles(beside);
    // index.html last: it names the others, whose names carry a hash of what they hold.
    const isIndex = (path) => path === "index.html";
    const ordered = [...built.filter((path) => !isIndex(path)), ...built.filter(isIndex)];
    for (const path of ordered) {
      await mkdir(dirname(join(folder, path)), { recursive: true });
      await rename(join(beside, path), join(folder, path));
    }
    await removeOthers(folder, new Set(built.map((path) => join(folder, path))));
    return [...from];
  } finally {
    await rm(beside, { recursive: true, force: true });
  }
}

async function putFile(path, contents) {
  await mkdir(dirname(path), { recursive: true });
  const beside = `${path}.${process.pid}.part`;
  await writeFile(beside, contents);
  await rename(beside, path);
}

/** Left over from earlier builds; a file made within the last minute may belong to a build under way. */
async function removeOthers(folder, keep) {
  for (const path of await listFiles(folder)) {
    const full = join(folder, path);
    if (keep.has(full)) continue;
    const age = Date.now() - (await stat(full).catch(() => ({ mtimeMs: Date.now() }))).mtimeMs;
    if (age > 60_000) await rm(full, { force: true });
  }
}

async function listFiles(folder, below = "") {
  const files = [];
  for (const entry of await readdir(join(folder, below), { withFileTypes: true }).catch(() => [])) {
    const path = below === "" ? entry.name : `${below}/${entry.name}`;
    if (entry.isDirectory()) files.push(...(await listFiles(folder, path)));
    else files.push(path);
  }
  return files;
}

if (process.argv[1] !== undefined && fileURLToPath(import.meta.url) === process.argv[1]) {
  const asked = process.argv.slice(2);
  const unknown = asked.filter((part) => !PART_NAMES.includes(part));
  if (unknown.length > 0) {
    process.stderr.write(`rungline: no part ${unknown.join(", ")}; parts: ${PART_NAMES.join(", ")}\n`);
    process.exitCode = 2;
  } else await buildParts(asked.length > 0 ? asked : PART_NAMES);
}
