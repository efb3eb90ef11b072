import { spawnSync } from "node:child_process";
import { existsSync, mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { FuseV1Options, getCurrentFuseWire } from "@electron/fuses";
import { afterAll, beforeAll, describe, expect, it } from "vitest";

const ROOT = fileURLToPath(new URL("../..", import.meta.url));
let folder: string;

/** Packed for real by electron-builder, against an empty stand-in for Electron's program. */
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "rungline-test-"));
  const words = ["--stand-in", "--linux", "dir", `-c.directories.output=${folder}`];
  const { status, stdout, stderr } = spawnSync(
    process.execPath,
    [join(ROOT, "main", "package.mjs"), ...words],
    {
      encoding: "utf8",
    },
  );
  if (status !== 0) throw new Error(`packing ended with ${status}: ${stdout}${stderr}`);
}, 180_000);

afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** How @electron/fuses writes a fuse: the characters 0 and 1. */
const OFF = 48;
const ON = 49;

interface ArchiveNode {
  readonly files?: Readonly<Record<string, ArchiveNode>>;
}

/** The archive's own list: a JSON text whose length stands at byte 12 and which begins at byte 16. */
function archivedFiles(path: string): string[] {
  const bytes = readFileSync(path);
  const top = JSON.parse(bytes.toString("utf8", 16, 16 + bytes.readUInt32LE(12))) as ArchiveNode;
  const walk = (node: ArchiveNode, above: string): string[] =>
    Object.entries(node.files ?? {}).flatMap(([name, below]) =>
      below.files === undefined ? [above + name] : walk(below, `${above}${name}/`),
    );
  return walk(top, "");
}

describe("the packed application", () => {
  it("carries name, version, licence and its text of every package that was bundled", () => {
    const dist = join(ROOT, "dist");
    const notices = readFileSync(join(dist, "THIRD-PARTY-NOTICES.txt"), "utf8");
    const sections = notices.split(`${"=".repeat(78)}\n`).slice(1);
    const folders = ["command-line", "electron", "window"].flatMap(
      (part) => JSON.parse(readFileSync(join(dist, `.${part}.packages.json`), "utf8")) as string[],
    );
    const bundled = folders.map((folder) => {
      const { name, version } = JSON.parse(readFileSync(join(folder, "package.json"), "utf8")) as {
        name: string;
        version: string;
      };
      return `${name} ${version}`;
    });
    for (const needed of ["plotly.js", "react", "zod", "@resvg/resvg-wasm", "@fontsource/ibm-plex-sans"])
      expect(bundled.map((one) => one.slice(0, one.lastIndexOf(" ")))).toContain(needed);
    for (const one of bundled) {
      const section = sections.find((text) => text.startsWith(`${one}\n`)) ?? "";
      expect(section).toMatch(/^Licence: \S+$/m);
      // A name alone is no text: the shortest licence here, in full, has more than this.
      expect(section.length, one).toBeGreaterThan(600);
      expect(section, one).toMatch(/permission|permitted|licensed|redistribution|rights/i);
    }
    expect(sections).toHaveLength(new Set(bundled).size);
    expect(sections.find((text) => text.startsWith("@resvg/"))).toContain(
      "Mozilla Public License Version 2.0",
    );
    expect(sections.find((text) => text.startsWith("@fontsource/ibm-plex-sans"))).toContain(
      "SIL OPEN FONT LICENSE",
    );
  });

  it("holds what is built and the demo spectra, no sources and no packages", () => {
    const files = archivedFiles(join(folder, "linux-unpacked", "resources", "app.asar"));
    for (const needed of [
      "package.json",
      "LICENSE",
      "dist/THIRD-PARTY-NOTICES.txt",
      "dist/main/electron.js",
      "dist/main/preload.cjs",
      "dist/renderer/index.html",
      "fixtures/demo/TH-A1_transmission.csv",
      "fixtures/demo/power/TH-A4_power-series.csv",
    ]) {
      expect(files).toContain(needed);
    }
    const others = files.filter(
      (file) =>
        !/^(package\.json|LICENSE|dist\/THIRD-PARTY-NOTICES\.txt|dist\/main\/(electron\.js|preload\.cjs)|dist\/renderer\/.+|fixtures\/demo\/(power\/)?[^/]+\.(csv|tsv|txt))$/.test(
          file,
        ),
    );
    expect(others).toEqual([]);
    expect(existsSync(join(folder, "linux-unpacked", "resources", "app"))).toBe(false);
  });

  it("has the fuses set that keep its program from running anything else", async () => {
    const wire = await getCurrentFuseWire(join(folder, "linux-unpacked", "rungline"));
    for (const off of [
      FuseV1Options.RunAsNode,
      FuseV1Options.EnableNodeOptionsEnvironmentVariable,
      FuseV1Options.EnableNodeCliInspectArguments,
      FuseV1Options.GrantFileProtocolExtraPrivileges,
    ]) {
      expect(wire[off], FuseV1Options[off]).toBe(OFF);
    }
    for (const on of [
      FuseV1Options.EnableCookieEncryption,
      FuseV1Options.EnableEmbeddedAsarIntegrityValidation,
      FuseV1Options.OnlyLoadAppFromAsar,
    ]) {
      expect(wire[on], FuseV1Options[on]).toBe(ON);
    }
  });
});
