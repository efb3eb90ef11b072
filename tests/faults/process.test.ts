import type { ChildProcess } from "node:child_process";
import { copyFile, mkdir, mkdtemp, open, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { existsSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { resultSchema } from "../../app/protocol/index.ts";
import { DEMO_FILE, runProgram, withoutBuild } from "./program.ts";

let folder = "";
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "rungline-faults-"));
  await runProgram(["--version"]);
});
afterAll(() => rm(folder, { recursive: true, force: true }));

const MATERIAL = ["--material", "cuprous-oxide-yellow-p"];

describe("the program as a process", () => {
  it("prints its version alone and starts quickly", async () => {
    const began = performance.now();
    const { status, out, error } = await runProgram(["--version"]);
    expect({ status, error }).toStrictEqual({ status: 0, error: "" });
    expect(out).toMatch(/^\d+\.\d+\.\d+\n$/);
    // A loose bound: it would be passed by far if the science or the window were loaded at the start.
    expect(performance.now() - began).toBeLessThan(2000);
  });

  it("ends with 2 on wrong usage and with 3 on a file that is none, in one line without a stack", async () => {
    const usage = await runProgram(["fit"]);
    expect(usage.status).toBe(2);
    expect(usage.out).toBe("");
    const gone = await runProgram(["fit", "gone.csv"], { cwd: folder });
    expect(gone.status).toBe(3);
    expect(gone.out).toBe("");
    expect(gone.error).toContain("rungline: gone.csv: no such file or folder");
    expect(gone.error).not.toMatch(/\n\s+at /);
  });

  it("keeps results on standard output apart from everything else on standard error", async () => {
    const inspect = await runProgram(["inspect", DEMO_FILE]);
    expect(inspect.status).toBe(0);
    expect(withoutBuild(inspect.error)).toBe("");
    const fit = await runProgram(["fit", DEMO_FILE, ...MATERIAL, "--format", "json"]);
    expect(fit.status, fit.error).toBe(0);
    expect(resultSchema.safeParse(JSON.parse(fit.out)).success).toBe(true);
    expect(fit.error).toContain("converged");
  });

  it("repeats a run to the last bit from the protocol written beside the result", async () => {
    const first = await runProgram(["fit", DEMO_FILE, ...MATERIAL, "--out", "first.json"], { cwd: folder });
    expect(first.status, first.error).toBe(0);
    await runProgram(["fit", DEMO_FILE, "--protocol", "first.protocol.json", "--out", "second.json"], {
      cwd: folder,
    });
    const withoutRun = async (name: string): Promise<unknown> => {
      const result = JSON.parse(await readFile(join(folder, name), "utf8")) as Record<string, unknown>;
      return { ...result, run: null };
    };
    expect(await withoutRun("second.json")).toStrictEqual(await withoutRun("first.json"));
  });

  it.skipIf(!existsSync("/dev/full"))("ends with 5 where the disk is full", async () => {
    const full = await open("/dev/full", "w");
    try {
      const { status, error } = await runProgram(["inspect", DEMO_FILE], {
        stdio: ["ignore", full.fd, "pipe"],
      });
      expect(status).toBe(5);
      expect(error).toContain("standard output: no space left on the disk");
    } finally {
      await full.close();
    }
    const filed = await runProgram(["fit", DEMO_FILE, ...MATERIAL, "--out", "/dev/full"]);
    // The protocol would stand in /dev beside it, or the device refuses: either way nothing was written.
    expect(filed.status).toBe(5);
  });

  it("does not hang or crash where the reader of its output has gone away", async () => {
    const { status, signal } = await runProgram(["inspect", DEMO_FILE], {
      meet: (child) => child.stdout?.destroy(),
    });
    expect(signal).toBeNull();
    expect([0, 5]).toContain(status);
  });
});

describe("stopped in the middle", () => {
  const COPIES = 12;
  const fill = async (name: string): Promise<string> => {
    const run = join(folder, name);
    await mkdir(run);
    // Not only copies: the same bytes under other names are fitted each for itself.
    for (let i = 0; i < COPIES; i++)
      await copyFile(DEMO_FILE, join(run, `s${String(i).padStart(2, "0")}.csv`));
    return run;
  };
  const afterFirst = (act: (child: ChildProcess) => void) => {
    return (child: ChildProcess): void => {
      let heard = "";
      let done = false;
      child.stderr?.on("data", (text: string) => {
        heard += text;
        if (done || !/\[1\/\d+\].*converged/.test(heard)) return;
        done = true;
        act(child);
      });
    };
  };
  const wholeResults = async (out: string): Promise<number> => {
    let whole = 0;
    for (const name of await readdir(out)) {
      if (!/^s\d\d\.json$/.test(name)) continue;
      const parsed = resultSchema.safeParse(JSON.parse(await readFile(join(out, name), "utf8")));
      expect(parsed.success, name).toBe(true);
      whole++;
    }
    return whole;
  };

  it("by Ctrl+C it ends with 130, with whole results only, and goes on where it stopped", async () => {
    const run = await fill("interrupted");
    const out = join(folder, "interrupted-out");
    const ended = await runProgram(["fit", run, ...MATERIAL, "--out", out], {
      meet: afterFirst((child) => child.kill("SIGINT")),
    });
    expect({ status: ended.status, signal: ended.signal }).toStrictEqual({ status: 130, signal: null });
    expect(ended.error).toContain("cancelled");
    const whole = await wholeResults(out);
    expect(whole).toBeGreaterThanOrEqual(1);
    expect(whole).toBeLessThan(COPIES);
    const again = await runProgram([
      "fit",
      join(run, "s00.csv"),
      join(run, "s01.csv"),
      ...MATERIAL,
      "--out",
      out,
    ]);
    expect(again.status, again.error).toBe(0);
    expect(again.error).toMatch(/s00\.csv: .*\(kept/);
  });

  it("by a kill it leaves no half result", async () => {
    const run = await fill("killed");
    const out = join(folder, "killed-out");
    const ended = await runProgram(["fit", run, ...MATERIAL, "--out", out], {
      meet: afterFirst((child) => child.kill("SIGKILL")),
    });
    expect(ended.signal).toBe("SIGKILL");
    expect(await wholeResults(out)).toBeGreaterThanOrEqual(1);
  });
});

describe("folders that cannot be written", () => {
  it("a path through a file ends with 5", async () => {
    await writeFile(join(folder, "file"), "x");
    const { status, error } = await runProgram(["fit", DEMO_FILE, ...MATERIAL, "--out", "file/x.json"], {
      cwd: folder,
    });
    expect(status).toBe(5);
    expect(error).toContain("x.json");
  });
});
