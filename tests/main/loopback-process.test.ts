import { spawn, type ChildProcess } from "node:child_process";
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterEach, describe, expect, it } from "vitest";

/** The real program in a process of its own; it builds itself first where dist/ is stale. */
const PROGRAM = fileURLToPath(new URL("../../main/rungline.mjs", import.meta.url));
const BUILD_AND_FIT_MS = 180_000;

let child: ChildProcess | null = null;
afterEach(() => void child?.kill("SIGKILL"));

function start(
  words: readonly string[],
  more: Readonly<Record<string, string>> = {},
): {
  said(pattern: RegExp): Promise<string>;
  ended: Promise<number | null>;
} {
  const { DISPLAY, WAYLAND_DISPLAY, ...environment } = process.env;
  void DISPLAY;
  void WAYLAND_DISPLAY;
  const started = spawn(process.execPath, [PROGRAM, ...words], {
    stdio: ["ignore", "pipe", "pipe"],
    env: { ...environment, ...more },
  });
  child = started;
  let out = "";
  let error = "";
  started.stderr.setEncoding("utf8").on("data", (text: string) => (error += text));
  started.stdout.setEncoding("utf8").on("data", (text: string) => {
    out += text;
    started.emit("said");
  });
  const ended = new Promise<number | null>((resolve) => started.once("close", resolve));
  const said = (pattern: RegExp): Promise<string> =>
    new Promise((resolve, reject) => {
      const look = (): void => {
        const match = pattern.exec(out);
        if (match !== null) resolve(match[0]);
      };
      started.on("said", look);
      look();
      void ended.then(() => reject(new Error(`ended without saying ${pattern}: ${out}${error}`)));
    });
  return { said, ended };
}

/** Not running, or ended and only waiting for a parent to ask how: that is the system's matter. */
function isRunning(pid: number): boolean {
  try {
    process.kill(pid, 0);
  } catch {
    return false;
  }
  const status = `/proc/${pid}/status`;
  return !(existsSync(status) && /^State:\s+Z/m.test(readFileSync(status, "utf8")));
}

const ADDRESS = /http:\/\/127\.0\.0\.1:\d+\/\?token=[\w-]+(?=\s)/;

describe("the program itself", () => {
  for (const signal of ["SIGINT", "SIGTERM"] as const) {
    it(
      `rungline window --serve serves the built page until ${signal}, then ends with 0`,
      async () => {
        const { said, ended } = start(["window", "--serve"]);
        const address = await said(ADDRESS);
        const entered = await fetch(address, { redirect: "manual" });
        expect(entered.status).toBe(303);
        const headers = { cookie: entered.headers.get("set-cookie")!.split(";")[0]! };
        const page = await fetch(new URL("/", address), { headers });
        expect(page.headers.get("content-security-policy")).toContain("default-src 'none'");
        expect(await page.text()).toContain("<title>Rungline</title>");
        const demo = (await (await fetch(new URL("/host/demo", address), { headers })).json()) as {
          files: { name: string }[];
        };
        expect(demo.files.map((file) => file.name)).toContain("TH-A1_transmission.csv");
        child!.kill(signal);
        expect(await ended).toBe(0);
      },
      BUILD_AND_FIT_MS,
    );
  }

  it(
    "two signals at once, as npm hands them on, leave neither the browser nor its profile behind",
    async () => {
      const folder = mkdtempSync(join(tmpdir(), "rungline-test-"));
      try {
        const program = join(folder, "browser");
        const facts = join(folder, "facts.json");
        writeFileSync(
          program,
          `#!${process.execPath}
const flag = (name) => process.argv.find((word) => word.startsWith(name + "=")).slice(name.length + 1);
const { writeFileSync, renameSync } = require("node:fs");
const facts = ${JSON.stringify(facts)};
writeFileSync(facts + ".part", JSON.stringify({ pid: process.pid, profile: flag("--user-data-dir") }));
renameSync(facts + ".part", facts);
setInterval(() => {}, 1000);
`,
          { mode: 0o755 },
        );
        const { ended } = start(["window"], { DISPLAY: ":99", RUNGLINE_BROWSER: program });
        const early = ended.then((code) =>
          Promise.reject(new Error(`ended with ${code} before its window opened`)),
        );
        early.catch(() => undefined);
        await Promise.race([
          expect.poll(() => existsSync(facts), { timeout: BUILD_AND_FIT_MS }).toBe(true),
          early,
        ]);
        child!.kill("SIGINT");
        child!.kill("SIGTERM");
        await ended;
        const { pid, profile } = JSON.parse(readFileSync(facts, "utf8")) as { pid: number; profile: string };
        await expect.poll(() => isRunning(pid)).toBe(false);
        expect(existsSync(profile)).toBe(false);
      } finally {
        rmSync(folder, { recursive: true, force: true });
      }
    },
    BUILD_AND_FIT_MS,
  );

  it(
    "npm start without display and terminal prints the address and the demo's result, and ends with 0",
    async () => {
      const { said, ended } = start(["start"]);
      await said(ADDRESS);
      await said(/Exciton series of TH-A1/);
      expect(await ended).toBe(0);
    },
    BUILD_AND_FIT_MS,
  );
});
