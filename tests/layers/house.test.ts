import { readdirSync, readFileSync, statSync } from "node:fs";
import { execFileSync } from "node:child_process";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { filesBelow, ROOT } from "./source-files.ts";

const text = (file: string): string => readFileSync(join(ROOT, file), "utf8");

/** What a build, an installation or a test leaves behind; none of it is in the repository. */
const LEFT_BEHIND = [".git", "node_modules", "dist", "coverage"];

describe("the top level", () => {
  it("holds what is fixed and nothing else", () => {
    const allowed = [
      ...["package.json", "electron-builder.yml", "README.md", "DEVELOPERS.md"],
      ...["app", "main", "renderer", "fixtures", "tests"],
      ...["package-lock.json", ".gitignore", ".ci", "LICENSE", "tsconfig.json"],
    ];
    const found = readdirSync(ROOT).filter((name) => !LEFT_BEHIND.includes(name));
    expect(found.filter((name) => !allowed.includes(name))).toStrictEqual([]);
    expect(allowed.filter((name) => !found.includes(name))).toStrictEqual([]);
  });

  it("ignores what is left behind", () => {
    const ignored = text(".gitignore").split("\n");
    expect(ignored).toEqual(expect.arrayContaining(["node_modules/", "dist/"]));
  });

  it.skipIf(process.platform === "win32")("has programs that can be run", () => {
    for (const file of ["main/rungline.mjs", ".ci/run"])
      expect(statSync(join(ROOT, file)).mode & 0o111, file).not.toBe(0);
  });
});

describe("packages", () => {
  const facts = JSON.parse(text("package.json")) as Record<string, Record<string, string> | undefined>;

  it("are pinned to exact versions", () => {
    for (const kind of ["dependencies", "devDependencies", "optionalDependencies", "peerDependencies"]) {
      for (const [name, version] of Object.entries(facts[kind] ?? {}))
        expect(version, name).toMatch(/^\d+\.\d+\.\d+(-[\w.]+)?$/);
    }
  });

  it("have a lock file without addresses, in step with package.json", () => {
    const lock = text("package-lock.json");
    expect(lock).not.toContain('"resolved"');
    expect(lock).not.toMatch(
      /https?:\/\/(?!opencollective|github|www\.patreon|tidelift|paulmillr|feross|ko-fi)[^"]*registry/,
    );
    const { packages } = JSON.parse(lock) as { packages: Record<string, { devDependencies?: object }> };
    expect(packages[""]!.devDependencies).toEqual(facts["devDependencies"]);
  });

  it("have no script that runs on installing", () => {
    for (const name of ["prepare", "preinstall", "install", "postinstall"])
      expect(facts["scripts"]?.[name]).toBeUndefined();
  });
});

describe("fixtures", () => {
  const files = filesBelow("fixtures")
    .map((file) => file.slice("fixtures/".length))
    .filter((file) => !/(^|\/)(README|SOURCES)\.md$/.test(file));
  const lists = filesBelow("fixtures").filter((file) => /\/(README|SOURCES)\.md$/.test(file));

  /** First cells of all tables, as paths from fixtures/; `*` stands for any part of a name. */
  const listed = lists.flatMap((list) => {
    const folder = list.slice("fixtures/".length).split("/").slice(0, -1).join("/");
    return text(list)
      .split("\n")
      .filter((line) => line.startsWith("|"))
      .flatMap((line) => line.split("|")[1]!.replaceAll("`", "").split(","))
      .map((cell) => cell.trim())
      .filter((cell) => /^[\w*./-]+\.[\w*]+$/.test(cell))
      .map((cell) => (folder === "" || cell.startsWith(`${folder}/`) ? cell : `${folder}/${cell}`));
  });
  const matches = (pattern: string, file: string): boolean =>
    new RegExp(`^${pattern.replace(/[.+?^${}()|[\]\\]/g, "\\$&").replaceAll("*", "[^/]*")}$`).test(file);

  it("are each listed with their source", () => {
    expect(files.length).toBeGreaterThan(10);
    expect(files.filter((file) => !listed.some((pattern) => matches(pattern, file)))).toStrictEqual([]);
  });

  it("are all there that are listed", () => {
    expect(listed.filter((pattern) => !files.some((file) => matches(pattern, file)))).toStrictEqual([]);
  });

  it("have a README that names every list", () => {
    const readme = text("fixtures/README.md");
    for (const list of lists.filter((one) => one.endsWith("SOURCES.md")))
      expect(readme).toContain(list.slice("fixtures/".length));
  });
});

describe("what is in the repository", () => {
  it("names no machine and no build output", () => {
    let tracked: string[];
    try {
      tracked = execFileSync("git", ["ls-files"], {
        cwd: ROOT,
        encoding: "utf8",
        stdio: ["ignore", "pipe", "ignore"],
      }).split("\n");
    } catch {
      return; // an unpacked archive has no index to ask
    }
    expect(
      tracked.filter((file) => /^(dist|node_modules|coverage)\/|\.tsbuildinfo$/.test(file)),
    ).toStrictEqual([]);
  });
});
