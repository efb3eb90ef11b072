import { cp, mkdtemp, readdir, rm, symlink } from "node:fs/promises";
import { spawn } from "node:child_process";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { ROOT } from "../layers/source-files.ts";

let copy = "";
beforeAll(async () => {
  copy = await mkdtemp(join(tmpdir(), "rungline-copy-"));
  for (const name of ["app", "main", "package.json", "package-lock.json"])
    await cp(join(ROOT, name), join(copy, name), { recursive: true });
  await symlink(join(ROOT, "node_modules"), join(copy, "node_modules"), "junction");
});
afterAll(() => rm(copy, { recursive: true, force: true }));

describe("a checkout that was never built", () => {
  it("takes several starts at the same moment: each builds or waits for nothing, and each works", async () => {
    const start = (): Promise<{ status: number | null; out: string; error: string }> =>
      new Promise((resolve, reject) => {
        const child = spawn(process.execPath, [join(copy, "main", "rungline.mjs"), "--version"]);
        let out = "";
        let error = "";
        child.stdout.on("data", (data: Buffer) => (out += data.toString()));
        child.stderr.on("data", (data: Buffer) => (error += data.toString()));
        child.once("error", reject);
        child.once("close", (status) => resolve({ status, out, error }));
      });
    const runs = await Promise.all([start(), start(), start(), start()]);
    for (const { status, out, error } of runs) {
      expect(status, error).toBe(0);
      expect(out).toMatch(/^\d+\.\d+\.\d+\n$/);
    }
    expect(
      (await readdir(join(copy, "dist"), { recursive: true })).filter((name) => name.endsWith(".part")),
    ).toEqual([]);
    const again = await start();
    expect(again.error).toBe("");
  });
});
