import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { delimiter, dirname, join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { openWindow, startDemo, type ShellIo } from "../../main/loopback/index.ts";
import type { Place } from "../../main/page/index.ts";

let root: string;
let place: Place;

beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), "rungline-test-"));
  place = { root, page: join(root, "page"), demo: join(root, "demo"), version: "1.2.3" };
  mkdirSync(place.page);
  mkdirSync(place.demo);
  mkdirSync(join(root, "main"));
  writeFileSync(join(place.page, "index.html"), "<!doctype html><title>page</title>");
  writeFileSync(join(place.demo, "crystal.csv"), "E,alpha\n");
  writeFileSync(
    join(root, "main", "rungline.mjs"),
    "console.log('ran', process.argv[2]); process.exitCode = 0;",
  );
});

afterEach(() => rmSync(root, { recursive: true, force: true }));

interface RecordedIo extends ShellIo {
  readonly written: { out: string; error: string };
  readonly abort: () => void;
  /** Settles when standard output matches. */
  said(pattern: RegExp): Promise<RegExpExecArray>;
}

function recordIo(environment: Record<string, string>, interactive: boolean): RecordedIo {
  const controller = new AbortController();
  const written = { out: "", error: "" };
  const waiting: { pattern: RegExp; resolve: (match: RegExpExecArray) => void }[] = [];
  return {
    written,
    environment,
    interactive,
    cancel: controller.signal,
    abort: () => controller.abort(),
    out(text) {
      written.out += text;
      for (const one of waiting) {
        const match = one.pattern.exec(written.out);
        if (match !== null) one.resolve(match);
      }
    },
    error(text) {
      written.error += text;
    },
    said(pattern) {
      return new Promise((resolve) => {
        const match = pattern.exec(written.out);
        if (match !== null) resolve(match);
        else waiting.push({ pattern, resolve });
      });
    },
  };
}

const ADDRESS = /http:\/\/127\.0\.0\.1:\d+\/\?token=\S+/;
const NO_DISPLAY = { PATH: process.env["PATH"] ?? "" };

/** A stand-in for a browser: a program that is handed the flags, does `work`, and ends. */
function standInBrowser(work: string): string {
  const program = join(root, "browser");
  writeFileSync(
    program,
    `#!/usr/bin/env node
const flag = (name) => process.argv.find((word) => word.startsWith(name + "=")).slice(name.length + 1);
const { writeFileSync } = require("node:fs");
writeFileSync(${JSON.stringify(join(root, "profile.txt"))}, flag("--user-data-dir"));
(async () => { ${work} })();
`,
    { mode: 0o755 },
  );
  return program;
}

function withBrowser(program: string): Record<string, string> {
  return { DISPLAY: ":99", RUNGLINE_BROWSER: program, PATH: dirname(process.execPath) + delimiter };
}

describe("rungline window --serve", () => {
  it("prints the address on standard output, serves until told to stop, and ends with 0", async () => {
    const io = recordIo({ ...NO_DISPLAY, DISPLAY: ":99" }, true);
    const ended = openWindow({ paths: [], choices: {}, serve: true }, io, place);
    const [address] = await io.said(ADDRESS);
    expect(io.written.out).toBe(`${address}\n`);
    const answer = await fetch(address, { redirect: "manual" });
    expect(answer.status).toBe(303);
    io.abort();
    expect(await ended).toBe(0);
    await expect(fetch(address)).rejects.toThrow();
  });

  it("hands the named files and choices to the page", async () => {
    writeFileSync(join(root, "mine.csv"), "1,2\n");
    const io = recordIo(NO_DISPLAY, true);
    const options = { paths: [join(root, "mine.csv")], choices: { axis: { unit: "nm" } }, serve: true };
    const ended = openWindow(options, io, place);
    const [address] = await io.said(ADDRESS);
    const entered = await fetch(address, { redirect: "manual" });
    const cookie = entered.headers.get("set-cookie")!.split(";")[0]!;
    const start = await fetch(new URL("/host/start", address), { headers: { cookie } });
    expect(await start.json()).toEqual({
      files: [{ name: "mine.csv", base64: "MSwyCg==" }],
      choices: { axis: { unit: "nm" } },
    });
    io.abort();
    expect(await ended).toBe(0);
  });

  it("an input that is not there ends with 3, a page that was not built with 1", async () => {
    const io = recordIo(NO_DISPLAY, true);
    const missing = join(root, "none.csv");
    expect(await openWindow({ paths: [missing], choices: {}, serve: true }, io, place)).toBe(3);
    expect(io.written.error).toContain(`${missing}: no such file or folder`);
    rmSync(place.page, { recursive: true });
    expect(await openWindow({ paths: [], choices: {}, serve: true }, io, place)).toBe(1);
    expect(io.written.error).toContain("npm run build");
    expect(io.written.out).toBe("");
  });
});

describe("rungline window", () => {
  it("without a display prints the address, says why, and stays", async () => {
    const io = recordIo(NO_DISPLAY, true);
    const ended = openWindow({ paths: [], choices: {}, serve: false }, io, place);
    await io.said(ADDRESS);
    io.abort();
    expect(await ended).toBe(0);
    expect(io.written.error).toContain("No display is set");
  });

  it("with a display opens a browser on the page and ends when its window closes, its profile removed", async () => {
    const program = standInBrowser(`
      const entered = await fetch(flag("--app"), { redirect: "manual" });
      const cookie = entered.headers.get("set-cookie").split(";")[0];
      const page = await fetch(new URL("/", flag("--app")), { headers: { cookie } });
      writeFileSync(${JSON.stringify(join(root, "page.txt"))}, await page.text());
    `);
    const io = recordIo(withBrowser(program), true);
    expect(await openWindow({ paths: [], choices: {}, serve: false }, io, place)).toBe(0);
    expect(readFileSync(join(root, "page.txt"), "utf8")).toContain("<title>page</title>");
    expect(existsSync(readFileSync(join(root, "profile.txt"), "utf8"))).toBe(false);
    expect(io.written.out).toBe("");
  });

  it("closes the browser when it is stopped from the terminal", async () => {
    const program = standInBrowser(`await fetch(flag("--app"), { redirect: "manual" });
      writeFileSync(${JSON.stringify(join(root, "in.txt"))}, String(process.pid));
      setInterval(() => {}, 1000);`);
    const io = recordIo(withBrowser(program), true);
    const ended = openWindow({ paths: [], choices: {}, serve: false }, io, place);
    await expect.poll(() => existsSync(join(root, "in.txt")), { timeout: 20_000 }).toBe(true);
    io.abort();
    expect(await ended).toBe(0);
    const pid = Number(readFileSync(join(root, "in.txt"), "utf8"));
    expect(() => process.kill(pid, 0)).toThrow();
  });

  it("a browser that ends before it showed the page leaves a fresh address behind", async () => {
    const io = recordIo(withBrowser(standInBrowser("process.exit(21)")), true);
    const ended = openWindow({ paths: [], choices: {}, serve: false }, io, place);
    const [address] = await io.said(ADDRESS);
    expect((await fetch(address, { redirect: "manual" })).status).toBe(303);
    io.abort();
    expect(await ended).toBe(0);
    expect(io.written.error).toContain("ended before it showed the window");
  });
});

describe("npm start", () => {
  it("without display and terminal prints where the window is and the demo's result, and ends with 0", async () => {
    const io = recordIo(NO_DISPLAY, false);
    expect(await startDemo(io, place)).toBe(0);
    expect(io.written.out).toMatch(ADDRESS);
    expect(io.written.out).toMatch(/\$ npx rungline fit demo\/crystal\.csv .*\n\nran fit\n$/);
  });

  it("without a display but at a terminal stays until it is stopped", async () => {
    const io = recordIo(NO_DISPLAY, true);
    const ended = startDemo(io, place);
    const [address] = await io.said(ADDRESS);
    await io.said(/ran fit/);
    expect((await fetch(address, { redirect: "manual" })).status).toBe(303);
    io.abort();
    expect(await ended).toBe(0);
  });

  it("with a display opens the window, prints the result meanwhile, and ends when the window closes", async () => {
    const program = standInBrowser(`await fetch(flag("--app"), { redirect: "manual" });`);
    const io = recordIo(withBrowser(program), false);
    expect(await startDemo(io, place)).toBe(0);
    expect(io.written.out).toContain("Window: a browser window of its own");
    expect(io.written.out).toContain("ran fit");
  });

  it("tells a demo that failed by its status", async () => {
    writeFileSync(join(root, "main", "rungline.mjs"), "process.exitCode = 4;");
    expect(await startDemo(recordIo(NO_DISPLAY, false), place)).toBe(4);
  });
});
