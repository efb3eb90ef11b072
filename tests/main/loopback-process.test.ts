import { spawn, type ChildProcess } from "node:child_process";
import { fileURLToPath } from "node:url";
import { afterEach, describe, expect, it } from "vitest";

/** The real program in a process of its own; it builds itself first where dist/ is stale. */
const PROGRAM = fileURLToPath(new URL("../../main/rungline.mjs", import.meta.url));
const BUILD_AND_FIT_MS = 180_000;

let child: ChildProcess | null = null;
afterEach(() => void child?.kill("SIGKILL"));

function start(...words: string[]): {
  said(pattern: RegExp): Promise<string>;
  ended: Promise<number | null>;
} {
  const { DISPLAY, WAYLAND_DISPLAY, ...environment } = process.env;
  void DISPLAY;
  void WAYLAND_DISPLAY;
  const started = spawn(process.execPath, [PROGRAM, ...words], {
    stdio: ["ignore", "pipe", "pipe"],
    env: environment,
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

const ADDRESS = /http:\/\/127\.0\.0\.1:\d+\/\?token=[\w-]+(?=\s)/;

describe("the program itself", () => {
  for (const signal of ["SIGINT", "SIGTERM"] as const) {
    it(
      `rungline window --serve serves the built page until ${signal}, then ends with 0`,
      async () => {
        const { said, ended } = start("window", "--serve");
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
    "npm start without display and terminal prints the address and the demo's result, and ends with 0",
    async () => {
      const { said, ended } = start("start");
      await said(ADDRESS);
      await said(/Exciton series of TH-A1/);
      expect(await ended).toBe(0);
    },
    BUILD_AND_FIT_MS,
  );
});
