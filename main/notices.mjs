/**
 * What the built program carries of others, with the licence of each: from the lists of files that the bundlers themselves
 * put into their bundles, so that nothing is kept by hand.
 */
import { existsSync, readdirSync, readFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const LICENCES = join(dirname(fileURLToPath(import.meta.url)), "licences");
const LICENCE_FILE = /^(un)?(licen[cs]e|copying|notice|ofl)([-._].*)?$/i;
const MODULES = "node_modules/";

/** Folders (absolute) of the packages that these files come from; files outside node_modules are the program's own. */
export function packageFolders(files, root) {
  const folders = new Set();
  for (const given of files) {
    const file = given
      .replace(/^\0+/, "")
      .replace(/[?#].*$/, "")
      .replaceAll("\\", "/");
    const at = file.lastIndexOf(MODULES);
    if (at < 0) continue;
    const words = file.slice(at + MODULES.length).split("/");
    const name = words.slice(0, words[0].startsWith("@") ? 2 : 1).join("/");
    const folder = file.slice(0, at + MODULES.length) + name;
    const full = folder.startsWith("/") || /^[a-z]:\//i.test(folder) ? folder : join(root, folder);
    if (existsSync(join(full, "package.json"))) folders.add(full);
  }
  return [...folders].sort();
}

/** Name, version, licence and the texts of one package; throws where no text is to be had, which ends the build. */
export function noticeOf(folder) {
  const { name, version, license, licenses, author, repository, homepage } = JSON.parse(
    readFileSync(join(folder, "package.json"), "utf8"),
  );
  const licence = typeof license === "string" ? license : (license?.type ?? licenses?.[0]?.type);
  if (!licence) throw new Error(`${name} ${version} names no licence: see ${folder}`);
  const texts = readdirSync(folder, { withFileTypes: true })
    .filter((entry) => entry.isFile() && LICENCE_FILE.test(entry.name))
    .map((entry) => entry.name)
    .sort()
    .map((file) => readFileSync(join(folder, file), "utf8").trim());
  if (texts.length === 0) texts.push(standardText(name, licence, author));
  const source = (typeof repository === "string" ? repository : repository?.url) ?? homepage ?? "";
  return { name, version, licence, source, text: texts.join("\n\n") };
}

/** The text that the licence's name stands for, where a package has only the name. */
function standardText(name, licence, author) {
  const file = join(LICENCES, `${licence}.txt`);
  if (!existsSync(file))
    throw new Error(`${name} comes without the text of its licence, ${licence}: see main/notices.mjs`);
  const holder =
    typeof author === "string"
      ? author.replace(/\s*[<(].*$/, "")
      : (author?.name ?? `the authors of ${name}`);
  return readFileSync(file, "utf8").replace("[holder]", holder).trim();
}

/** One text of all packages, by name. */
export function noticesText(folders) {
  const seen = new Map();
  for (const folder of folders) {
    const notice = noticeOf(folder);
    seen.set(`${notice.name} ${notice.version}`, notice);
  }
  const all = [...seen.entries()].sort(([a], [b]) => (a < b ? -1 : 1)).map(([, notice]) => notice);
  const rule = "=".repeat(78);
  return [
    "Rungline contains the following packages, each under its own licence.",
    "",
    ...all.map(({ name, version, licence }) => `  ${name} ${version}: ${licence}`),
    "",
    ...all.flatMap(({ name, version, licence, source, text }) => [
      rule,
      `${name} ${version}`,
      `Licence: ${licence}`,
      ...(source === "" ? [] : [`Source: ${source}`]),
      "",
      text.replaceAll("\r\n", "\n"),
      "",
    ]),
  ].join("\n");
}

/** A plugin for the window's bundler that adds to `files` everything its bundles, style sheets and assets were made from. */
export function collectFiles(files) {
  return {
    name: "collect-files",
    generateBundle(_, bundle) {
      for (const part of Object.values(bundle)) {
        const from = part.type === "chunk" ? part.moduleIds : (part.originalFileNames ?? []);
        for (const file of from) files.add(file);
      }
      // Style sheets leave no code behind.
      for (const id of this.getModuleIds()) if (/\.css($|\?)/.test(id)) files.add(id);
    },
  };
}
