import { copyFile, mkdir, mkdtemp, readdir, readFile, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, expect, it } from "vitest";
import { runProgram } from "./program.ts";

const SMALL = fileURLToPath(new URL("../../fixtures/demo/TH-B2_absorbance.csv", import.meta.url));
const COPIES = 4;

let folder = "";
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "rungline-resume-"));
  await mkdir(join(folder, "run"));
  for (let i = 0; i < COPIES; i++) await copyFile(SMALL, join(folder, "run", `s${i}.csv`));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

/** Name and content of every file, without the part that tells when and how long a run was. */
async function contents(out: string): Promise<string[]> {
  const names = (await readdir(join(folder, out))).sort();
  return Promise.all(
    names.map(async (name) => {
      const text = await readFile(join(folder, out, name), "utf8");
      return `${name}\n${text.replace(/"run": \{[\s\S]*?\n {2}\}/, "")}`;
    }),
  );
}

it("killed in the middle and started again, on two threads, it does the rest and ends as an undisturbed run on one", async () => {
  const words = (out: string, threads: number): string[] => [
    ...["fit", "run", "--material", "cuprous-oxide-yellow-p"],
    ...["--set", "uncertainty.systematic=false", "--threads", String(threads), "--out", out],
  ];
  let heard = "";
  const killed = await runProgram(words("killed", 2), {
    cwd: folder,
    meet: (child) =>
      child.stderr?.on("data", (text: string) => {
        heard += text;
        if (/\] run\/s\d\.csv: \d+ lines/.test(heard)) child.kill("SIGKILL");
      }),
  });
  expect(killed.signal).toBe("SIGKILL");
  const before = (await readdir(join(folder, "killed"))).filter((name) => /^s\d\.json$/.test(name));
  expect(before.length).toBeGreaterThanOrEqual(1);
  expect(before.length).toBeLessThan(COPIES);
  const again = await runProgram(words("killed", 2), { cwd: folder });
  expect(again.status, again.error).toBe(0);
  expect(again.error.match(/\(kept: same input, protocol and version\)/g)).toHaveLength(before.length);
  const whole = await runProgram(words("whole", 1), { cwd: folder });
  expect(whole.status, whole.error).toBe(0);
  expect(await contents("killed")).toStrictEqual(await contents("whole"));
});
