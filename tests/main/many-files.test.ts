import { mkdir, readdir, readFile, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { Writable } from "node:stream";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { makeProgress } from "../../main/command-line/progress-bar.ts";
import { remainingInWords } from "../../main/command-line/remaining-time.ts";
import type { CommandLineIo } from "../../main/command-line/index.ts";
import { analysed, makeBench, resultFor, type Bench } from "./command-line-bench.ts";

let bench: Bench;
const put = (name: string, text: string): Promise<void> => writeFile(join(bench.folder, name), text);
const get = (name: string): Promise<string> => readFile(join(bench.folder, name), "utf8");

beforeEach(async () => {
  bench = await makeBench();
  await mkdir(join(bench.folder, "run"));
  await mkdir(join(bench.folder, "other"));
  for (const name of ["run/a1.csv", "run/a2.csv", "run/b1.csv", "run/.a3.csv", "other/a4.csv"])
    await put(name, `${name}\n`);
});
afterEach(() => bench.remove());

describe("patterns", () => {
  it("that the shell left alone stand for the files that fit, in the order of their names", async () => {
    expect((await bench.run("fit", "run/a?.csv", "--out", "out")).status).toBe(0);
    expect(bench.fitted).toStrictEqual(["a1.csv", "a2.csv"]);
    bench.fitted.length = 0;
    await bench.run("fit", "*/a*.csv", "run/a1.csv", "--out", "out2");
    expect(bench.fitted).toStrictEqual(["a4.csv", "a1.csv", "a2.csv"]);
  });

  it("that nothing fits end with 3, and a file whose name holds such a sign is itself", async () => {
    const { status, error } = await bench.run("fit", "run/c*.csv", "--out", "out");
    expect(status).toBe(3);
    expect(error).toContain("run/c*.csv: no file fits this pattern");
    await put("run/[odd]*.csv", "1\n");
    await bench.run("fit", "run/[odd]*.csv", "--out", "x.json");
    expect(bench.fitted).toStrictEqual(["[odd]*.csv"]);
  });
});

describe("several fits at a time", () => {
  it("finish in any order; summary and failures stand in the order of the inputs", async () => {
    await bench.remove();
    let running = 0;
    let most = 0;
    const fit: Parameters<typeof makeBench>[0] = {
      fit: async (request) => {
        most = Math.max(most, ++running);
        await new Promise((resolve) => setTimeout(resolve, request.file === "a1.csv" ? 30 : 1));
        running--;
        if (request.file.startsWith("bad"))
          return { type: "refused", wordings: [{ message: `${request.file}: no table`, remedy: "" }] };
        return analysed(resultFor(request));
      },
    };
    bench = await makeBench(fit);
    const { fit: run } = fit;
    const asked: (number | undefined)[] = [];
    bench = await makeBench({
      io: {
        makeRunner: (threads) => {
          asked.push(threads);
          return { threads: threads ?? 1, fit: run!, close: () => Promise.resolve() };
        },
      },
    });
    for (const name of ["a1.csv", "a2.csv", "bad1.csv", "a3.csv", "bad2.csv"]) await put(name, name);
    const names = ["a1.csv", "a2.csv", "bad1.csv", "a3.csv", "bad2.csv"];
    const { status, error } = await bench.run("fit", ...names, "--threads", "3", "--out", "out");
    expect(status).toBe(3);
    expect(asked).toStrictEqual([3]);
    expect(most).toBe(3);
    const rows = (await get("out/summary.csv")).split("\r\n");
    expect(rows.slice(1, 4).map((row) => row.split(",")[0])).toStrictEqual(["a1.csv", "a2.csv", "a3.csv"]);
    const { spectra } = JSON.parse(await get("out/summary.json")) as { spectra: { file: string }[] };
    expect(spectra.map((row) => row.file)).toStrictEqual(["a1.csv", "a2.csv", "a3.csv"]);
    const { failures } = JSON.parse(await get("out/failures.json")) as { failures: { file: string }[] };
    expect(failures.map((one) => one.file)).toStrictEqual(["bad1.csv", "bad2.csv"]);
    // Told when they happen and once more at the end.
    expect(error).toMatch(
      /2 inputs without a result \(.*failures\.json\):\n {2}bad1\.csv: no table\n {2}bad2/,
    );
    await bench.run("fit", "a1.csv", "--threads", "3", "--out", "one.json");
    expect(asked).toStrictEqual([3, 1]);
  });

  it("that cannot be written end the run with 5 and hand out no more files", async () => {
    await mkdir(join(bench.folder, "out"));
    await mkdir(join(bench.folder, "out", "a1.json"));
    const { status } = await bench.run("fit", "run", "--out", "out");
    expect(status).toBe(2);
    expect(bench.fitted).toStrictEqual([]);
  });

  it("a renamed input is fitted again, since its result names it", async () => {
    await bench.run("fit", "run", "--out", "out");
    bench.fitted.length = 0;
    await put("run/a1.dat", await get("run/a1.csv"));
    const { rm } = await import("node:fs/promises");
    await rm(join(bench.folder, "run", "a1.csv"));
    await bench.run("fit", "run", "--out", "out");
    expect(bench.fitted).toStrictEqual(["a1.dat"]);
  });

  it("the halves that a killed run left are taken away, other files are not", async () => {
    await bench.run("fit", "run", "--out", "out");
    const { utimes } = await import("node:fs/promises");
    for (const name of ["a1.json.123456", "summary.csv.77", "notes.json.12", "a1.json.bak"]) {
      await put(`out/${name}`, "half");
      await utimes(join(bench.folder, "out", name), 1, 1);
    }
    await bench.run("fit", "run", "--out", "out");
    const left = (await readdir(join(bench.folder, "out"))).filter((name) => !/\.(json|csv)$/.test(name));
    expect(left.sort()).toStrictEqual(["a1.json.bak", "notes.json.12"]);
  });
});

describe("progress over many files", () => {
  const io = (terminal: NodeJS.WritableStream | null): { io: CommandLineIo; said: () => string } => {
    let text = "";
    const bare = { stderr: (one: string) => (text += one), terminal } as unknown as CommandLineIo;
    return { io: bare, said: () => text };
  };

  it("without a terminal is a line a file, and at every tenth the remaining time", async () => {
    const { io: bare, said } = io(null);
    let now = 0;
    const names = Array.from({ length: 20 }, (_, i) => `f${i}`);
    const progress = await makeProgress(bare, names, () => now);
    for (let i = 0; i < 20; i++) {
      progress.begin(i);
      now += 30;
      progress.end(i, "done", true);
    }
    progress.close();
    expect(said()).toContain("[1/20] f0: done\n");
    // Derived: ten files in 300 s leave 300 s for the other ten
    expect(said()).toContain("10 of 20 files done, about 5 min left\n");
    expect(said()).not.toContain("20 of 20");
  });

  it("does not count files whose result is kept into the time of one fit", async () => {
    const { io: bare, said } = io(null);
    let now = 0;
    const names = Array.from({ length: 20 }, (_, i) => `f${i}`);
    const progress = await makeProgress(bare, names, () => now);
    for (let i = 0; i < 8; i++) progress.end(i, "kept", false);
    for (let i = 8; i < 10; i++) {
      progress.begin(i);
      now += 60;
      progress.end(i, "done", true);
    }
    // Derived: 60 s a fit, ten left
    expect(said()).toContain("10 of 20 files done, about 10 min left\n");
  });

  it("at a terminal is one moving bar with the remaining time", async () => {
    let drawn = "";
    const stream = new Writable({
      write: (chunk: Buffer, _encoding, done) => {
        drawn += chunk.toString();
        done();
      },
    });
    const terminal = Object.assign(stream, { isTTY: true, columns: 200, cursorTo: () => true });
    const { io: bare } = io(terminal);
    let now = 0;
    const progress = await makeProgress(bare, ["a", "b"], () => now);
    progress.begin(0);
    now = 10;
    progress.update(0, 0.5, "fitting {bar}");
    await new Promise((resolve) => setTimeout(resolve, 250));
    progress.close();
    expect(drawn).toContain("0 of 2");
    expect(drawn).toContain("a: fitting {bar}");
    // Derived: half a file in 10 s, one and a half are left
    expect(drawn).toContain("about 30 s left");
  });

  it("rounds times as far as they can be trusted", () => {
    expect([2, 22, 58, 200, 3600 * 2 + 120].map(remainingInWords)).toStrictEqual([
      "a few seconds",
      "about 20 s",
      "about 1 min",
      "about 3 min",
      "about 2 h 2 min",
    ]);
  });
});
