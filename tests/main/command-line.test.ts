import { mkdir, readdir, readFile, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { Cancelled } from "../../app/base/index.ts";
import { resultSchema } from "../../app/protocol/index.ts";
import { makeInlineRunner } from "../../main/services/index.ts";
import { analysed, makeBench, resultFor, type Bench, type BenchOptions } from "./command-line-bench.ts";

let bench: Bench;
const remake = async (options: BenchOptions): Promise<void> => {
  await bench.remove();
  bench = await makeBench(options);
};
const put = (name: string, text: string): Promise<void> => writeFile(join(bench.folder, name), text);
const get = (name: string): Promise<string> => readFile(join(bench.folder, name), "utf8");
const list = async (name = "."): Promise<string[]> => (await readdir(join(bench.folder, name))).sort();

beforeEach(async () => {
  bench = await makeBench();
});
afterEach(() => bench.remove());

describe("words that are wrong usage", () => {
  it.each([
    ["no command", []],
    ["an unknown command", ["fitt", "a.csv"]],
    ["no file", ["fit"]],
    ["an unknown option", ["fit", "a.csv", "--colour"]],
    ["an unknown format", ["fit", "a.csv", "--format", "xml"]],
    ["a material twice", ["fit", "a.csv", "--material", "sheet-2d", "--material", "allowed-3d"]],
    ["a setting without a value", ["fit", "a.csv", "--set", "axis.medium"]],
    ["an unknown key", ["fit", "a.csv", "--set", "axis.medum=air"]],
    ["a bad value", ["fit", "a.csv", "--set", "axis.medium=water"]],
    ["an unknown material", ["fit", "a.csv", "--material", "cuprous-oxyde-yellow-p"]],
    ["a protocol that is not there", ["fit", "a.csv", "--protocol", "none.json"]],
  ])("end with 2 and say what is wrong: %s", async (_name, argv) => {
    await put("a.csv", "1,2\n");
    const { status, out, error } = await bench.run(...argv);
    expect(status).toBe(2);
    expect(out).toBe("");
    expect(error).not.toBe("");
    expect(error).not.toMatch(/\n\s+at /);
    expect(bench.fitted).toStrictEqual([]);
  });

  it("name the nearest known key, material and command", async () => {
    await put("a.csv", "1,2\n");
    expect((await bench.run("fit", "a.csv", "--set", "axis.medum=air")).error).toContain('"axis.medium"');
    expect((await bench.run("fit", "a.csv", "--material", "sheet2d")).error).toContain("sheet-2d");
    expect((await bench.run("inspct", "a.csv")).error).toContain("inspect");
  });

  it("do not include asking for help or for the version, which go to standard output", async () => {
    const help = await bench.run("--help");
    expect(help).toMatchObject({ status: 0, error: "" });
    expect(help.out).toContain("inspect");
    expect(help.out).toContain("fit");
    expect(help.out).toContain("report");
    const version = await bench.run("--version");
    expect(version.status).toBe(0);
    expect(version.out).toMatch(/^\d+\.\d+\.\d+\n$/);
  });

  it("a protocol file that is not JSON is named", async () => {
    await put("a.csv", "1,2\n");
    await put("p.json", "{");
    const { status, error } = await bench.run("fit", "a.csv", "--protocol", "p.json");
    expect(status).toBe(2);
    expect(error).toContain("p.json: not JSON");
  });
});

describe("choices", () => {
  const choicesOf = async (...argv: string[]): Promise<Record<string, Record<string, unknown>>> => {
    const { status, error } = await bench.run("fit", "a.csv", ...argv, "--out", "r.json");
    expect(status, error).toBe(0);
    return JSON.parse(await get("r.protocol.json")) as Record<string, Record<string, unknown>>;
  };

  beforeEach(async () => {
    await put("a.csv", "1,2\n");
    await put(
      "p.json",
      JSON.stringify({
        material: { preset: "sheet-2d", gap_eV: 1.7 },
        signal: { thickness_um: 30 },
        axis: { medium: "air" },
      }),
    );
  });

  it("are taken from the protocol, then the material, then the settings, later ones last", async () => {
    const protocol = await choicesOf(
      ...["--set", "axis.medium=vacuum", "--protocol", "p.json", "--material", "allowed-3d"],
      ...["--set", "signal.thickness_um=34", "--set", "signal.thickness_um=35"],
    );
    expect(protocol["material"]).toMatchObject({ preset: "allowed-3d", gap_eV: null });
    expect(protocol["axis"]!["medium"]).toBe("vacuum");
    expect(protocol["signal"]!["thickness_um"]).toBe(35);
  });

  it("are JSON where they parse, else text", async () => {
    const protocol = await choicesOf("--set", "mask_eV=[[2.1,2.2]]", "--set", "axis.unit=cm-1");
    expect(protocol["mask_eV"]).toStrictEqual([[2.1, 2.2]]);
    expect(protocol["axis"]!["unit"]).toBe("cm-1");
  });

  it("written beside a result give the same protocol again", async () => {
    await choicesOf("--protocol", "p.json", "--set", "axis.scale_sigma=1e-6");
    const first = await get("r.protocol.json");
    await bench.run("fit", "a.csv", "--protocol", "r.protocol.json", "--out", "again.json");
    expect(await get("again.protocol.json")).toBe(first);
  });
});

describe("where results go", () => {
  beforeEach(async () => {
    await put("a.csv", "1,2\n");
    await put("b.csv", "3,4\n");
  });

  it("without --out to standard output, notes and progress to standard error", async () => {
    const { status, out, error } = await bench.run("fit", "a.csv");
    expect(status).toBe(0);
    expect(out).toMatch(/^Exciton series of a\.csv\n/);
    expect(error).toContain("a.csv: 3 lines, converged");
    expect(error.indexOf("law-rejected")).toBeLessThan(error.indexOf("energy-may-come-from-air"));
    expect(await list()).toStrictEqual(["a.csv", "b.csv"]);
  });

  it("in the format asked for, several as one document", async () => {
    const one = await bench.run("fit", "a.csv", "--format", "json");
    expect(resultSchema.safeParse(JSON.parse(one.out)).success).toBe(true);
    const two = await bench.run("fit", "a.csv", "b.csv", "--format", "json");
    expect(JSON.parse(two.out)).toHaveLength(2);
    const csv = await bench.run("fit", "a.csv", "b.csv", "--format", "csv");
    expect(csv.out.match(/^file,section/gm)).toHaveLength(1);
    expect(csv.out).toContain("b.csv,series,gap");
  });

  it("for one input to a file in the format of its ending, with the protocol beside it", async () => {
    expect(await bench.run("fit", "a.csv", "--out", "x.json")).toMatchObject({ status: 0, out: "" });
    expect((JSON.parse(await get("x.json")) as { source: { file: string } }).source.file).toBe("a.csv");
    expect(JSON.parse(await get("x.protocol.json"))).toMatchObject({ schema: "rungline-protocol/1" });
    await bench.run("fit", "a.csv", "--out", "y.csv");
    expect(await get("y.csv")).toMatch(/^file,section,name,/);
    await bench.run("fit", "a.csv", "--out", "z.txt");
    expect(await get("z.txt")).toMatch(/^Exciton series of/);
    await bench.run("fit", "a.csv", "--out", "w.json", "--format", "text");
    expect(await get("w.json")).toMatch(/^Exciton series of/);
  });

  it("a result may be replaced by a result in any format", async () => {
    for (const name of ["x.json", "x.csv", "x.txt"]) {
      expect((await bench.run("fit", "a.csv", "--out", name)).status).toBe(0);
      expect((await bench.run("fit", "b.csv", "--out", name)).status).toBe(0);
    }
    expect((JSON.parse(await get("x.json")) as { source: { file: string } }).source.file).toBe("b.csv");
  });

  it("any other existing file is refused with 2 and left as it was, before any work", async () => {
    await put("thesis.txt", "chapter one");
    await put("data.json", '{"schema":"other/1"}');
    await put("x.protocol.json", "[]");
    for (const name of ["a.csv", "thesis.txt", "data.json", "x.json", "."]) {
      const { status, error } = await bench.run("fit", "b.csv", "--out", name);
      expect(status, name).toBe(2);
      expect(error).toContain("rungline:");
    }
    expect(await get("thesis.txt")).toBe("chapter one");
    expect(await get("a.csv")).toBe("1,2\n");
    expect(bench.fitted).toStrictEqual([]);
    expect(await list()).toStrictEqual(["a.csv", "b.csv", "data.json", "thesis.txt", "x.protocol.json"]);
  });

  it("a folder that is not there ends with 5 before any work", async () => {
    const { status, error } = await bench.run("fit", "a.csv", "--out", "nowhere/x.json");
    expect(status).toBe(5);
    expect(error).toContain("x.json");
    expect(bench.fitted).toStrictEqual([]);
  });

  it("standard output that cannot be written ends with 5", async () => {
    const { OutputError } = await import("../../main/services/index.ts");
    await remake({
      io: { stdout: () => Promise.reject(new OutputError("standard output", { code: "ENOSPC" })) },
    });
    await put("a.csv", "1,2\n");
    const { status, error } = await bench.run("fit", "a.csv");
    expect(status).toBe(5);
    expect(error).toContain("standard output: no space left on the disk");
    expect((await bench.run("--help")).status).toBe(5);
  });
});

describe("several inputs and folders", () => {
  beforeEach(async () => {
    await mkdir(join(bench.folder, "run", "deeper"), { recursive: true });
    await put("run/a.csv", "1,2\n");
    await put("run/b.txt", "1,3\n");
    await put("run/b.dat", "1,4\n");
    await put("run/.hidden.csv", "1,5\n");
    await put("run/picture.png", "no");
    await put("run/deeper/c.csv", "1,6\n");
  });

  it("a folder means its own non-hidden spectra, and output names a folder", async () => {
    const { status, error } = await bench.run("fit", "run", "--out", "out");
    expect(status, error).toBe(0);
    expect(bench.fitted).toStrictEqual(["a.csv", "b.dat", "b.txt"]);
    expect(await list("out")).toStrictEqual([
      "a.json",
      "b.dat.json",
      "b.txt.json",
      "failures.json",
      "protocol.json",
      "summary.csv",
      "summary.json",
    ]);
    expect(JSON.parse(await get("out/failures.json"))).toStrictEqual({
      schema: "rungline-failures/1",
      failures: [],
    });
    expect((await get("out/summary.csv")).trimEnd().split("\r\n")).toHaveLength(4);
  });

  it("the good ones are finished and written, the bad ones named, and the highest status returned", async () => {
    await remake({
      fit: (request) => {
        if (request.file === "bad.csv")
          return Promise.resolve({
            type: "refused",
            wordings: [{ message: "bad.csv: line 3: found words", remedy: "give numbers" }],
          });
        if (request.file === "fault.csv")
          return Promise.resolve({ type: "fault", message: "broken promise", stack: "at somewhere" });
        const status = request.file === "slow.csv" ? "not-converged" : "converged";
        return Promise.resolve(analysed(resultFor(request, { status })));
      },
    });
    for (const name of ["bad.csv", "fault.csv", "good.csv", "slow.csv"]) await put(name, name);
    const { status, error } = await bench.run(
      "fit",
      "bad.csv",
      "fault.csv",
      "good.csv",
      "gone.csv",
      "slow.csv",
      "--out",
      "out",
    );
    expect(status).toBe(4);
    expect(error).toContain("bad.csv: line 3: found words");
    expect(error).toContain("give numbers");
    expect(error).toContain("gone.csv: no such file or folder");
    expect(error).toContain("fault.csv: a fault of Rungline: broken promise");
    expect(error).not.toContain("at somewhere");
    expect(await list("out")).toStrictEqual([
      "failures.json",
      "good.json",
      "protocol.json",
      "slow.json",
      "summary.csv",
      "summary.json",
    ]);
    const { failures } = JSON.parse(await get("out/failures.json")) as {
      failures: { file: string; status: number }[];
    };
    expect(failures.map(({ file, status: one }) => [file, one])).toStrictEqual([
      ["bad.csv", 3],
      ["fault.csv", 1],
      ["gone.csv", 3],
    ]);
    expect((await bench.run("fit", "bad.csv", "good.csv", "--out", "out2")).status).toBe(3);
  });

  it("a folder started again keeps what is there for the same input, protocol and version", async () => {
    await bench.run("fit", "run", "--out", "out");
    const before = await get("out/a.json");
    bench.fitted.length = 0;
    const again = await bench.run("fit", "run", "--out", "out");
    expect(again.status).toBe(0);
    expect(again.error).toContain("kept: same input, protocol and version");
    expect(bench.fitted).toStrictEqual([]);
    expect(await get("out/a.json")).toBe(before);

    await put("run/a.csv", "7,7\n");
    await bench.run("fit", "run", "--out", "out");
    expect(bench.fitted).toStrictEqual(["a.csv"]);
    bench.fitted.length = 0;

    await bench.run("fit", "run", "--out", "out", "--set", "lines.max_n=20");
    expect(bench.fitted).toStrictEqual(["a.csv", "b.dat", "b.txt"]);
    bench.fitted.length = 0;

    const other = (await get("out/b.dat.json")).replace(/"version": "[^"]*"/, '"version": "0.0.1"');
    await put("out/b.dat.json", other);
    await put("out/b.txt.json", (await get("out/b.txt.json")).slice(0, 900));
    await bench.run("fit", "run", "--out", "out", "--set", "lines.max_n=20");
    expect(bench.fitted).toStrictEqual(["b.dat", "b.txt"]);
  });

  it("a kept result that had not converged still counts", async () => {
    await remake({
      fit: (request) => Promise.resolve(analysed(resultFor(request, { status: "no-series" }))),
    });
    await put("a.csv", "1");
    await put("b.csv", "2");
    expect((await bench.run("fit", "a.csv", "b.csv", "--out", "out")).status).toBe(4);
    expect((await bench.run("fit", "a.csv", "b.csv", "--out", "out")).status).toBe(4);
    expect(bench.fitted).toHaveLength(2);
  });

  it("a foreign file in the way of any output is refused with 2", async () => {
    await mkdir(join(bench.folder, "out"));
    for (const name of ["a.json", "summary.csv", "failures.json", "protocol.json"]) {
      await put(`out/${name}`, "mine");
      expect((await bench.run("fit", "run", "--out", "out")).status, name).toBe(2);
      expect(await get(`out/${name}`)).toBe("mine");
      const { rm } = await import("node:fs/promises");
      await rm(join(bench.folder, "out", name));
    }
    expect((await bench.run("fit", "run", "--out", "run/a.csv")).status).toBe(2);
  });

  it("writes NAME.csv or NAME.txt beside NAME.json where that format is asked for", async () => {
    await bench.run("fit", "run", "--out", "out", "--format", "csv");
    expect(await list("out")).toContain("a.csv");
    expect(await list("out")).toContain("a.json");
    expect(await get("out/a.csv")).toMatch(/^file,section/);
    expect((await bench.run("fit", "run", "--out", "out", "--format", "csv")).status).toBe(0);
  });

  it("tells apart inputs of one name from different folders, takes one named twice once, and keeps its own names free", async () => {
    await mkdir(join(bench.folder, "other"));
    await put("other/a.csv", "9,9\n");
    await put("protocol.csv", "8,8\n");
    await bench.run("fit", "run/a.csv", "other/a.csv", "./run/a.csv", "protocol.csv", "--out", "out");
    expect(bench.fitted).toHaveLength(3);
    expect(await list("out")).toStrictEqual([
      "failures.json",
      "other-a.csv.json",
      "protocol.csv.json",
      "protocol.json",
      "run-a.csv.json",
      "summary.csv",
      "summary.json",
    ]);
  });

  it("an empty folder ends with 3", async () => {
    await mkdir(join(bench.folder, "empty"));
    const { status, error } = await bench.run("fit", "empty");
    expect(status).toBe(3);
    expect(error).toContain("empty: no spectrum files in this folder");
  });
});

describe("exit status of a fit", () => {
  it.each([
    ["converged", 0],
    ["not-converged", 4],
    ["no-series", 4],
  ] as const)("%s gives %i, and the result is still written", async (state, expected) => {
    await remake({ fit: (request) => Promise.resolve(analysed(resultFor(request, { status: state }))) });
    await put("a.csv", "1");
    expect((await bench.run("fit", "a.csv", "--out", "x.json")).status).toBe(expected);
    expect((JSON.parse(await get("x.json")) as { status: string }).status).toBe(state);
  });

  it("a file that cannot be read gives 3", async () => {
    const { status, error, out } = await bench.run("fit", "none.csv");
    expect({ status, out }).toStrictEqual({ status: 3, out: "" });
    expect(error).toContain("none.csv: no such file or folder");
  });

  it("cancelling gives 130, keeps what is finished and writes no half result", async () => {
    const cancel = new AbortController();
    await remake({
      signal: cancel.signal,
      fit: (request) => {
        if (request.file === "a.csv") return Promise.resolve(analysed(resultFor(request)));
        cancel.abort();
        return Promise.resolve({ type: "cancelled" });
      },
    });
    for (const name of ["a.csv", "b.csv", "c.csv"]) await put(name, name);
    const { status, error } = await bench.run("fit", "a.csv", "b.csv", "c.csv", "--out", "out");
    expect(status).toBe(130);
    expect(error).toContain("b.csv: cancelled");
    expect(bench.fitted).toStrictEqual(["a.csv", "b.csv"]);
    expect(await list("out")).toStrictEqual(["a.json", "protocol.json"]);
  });

  it("a fault gives 1 in one line; the stack only with RUNGLINE_DEBUG=1", async () => {
    const fit = (): never => {
      throw new Error("broken promise\nsecond line");
    };
    await remake({ fit });
    await put("a.csv", "1");
    const quiet = await bench.run("fit", "a.csv");
    expect(quiet.status).toBe(1);
    expect(quiet.error).toBe("rungline: a fault of Rungline: broken promise\n");
    await remake({ fit, io: { environment: { RUNGLINE_DEBUG: "1" } } });
    await put("a.csv", "1");
    expect((await bench.run("fit", "a.csv")).error).toMatch(/\n\s+at /);
  });
});

describe("the runner in this thread", () => {
  it("turns a file that is no table into a refusal in words, and bad choices as well", async () => {
    const runner = makeInlineRunner();
    const run = { version: "0", node: "v20", started: "" };
    const bytes = new TextEncoder().encode("");
    const outcome = await runner.fit(
      { file: "e.csv", bytes, choices: {} },
      run,
      () => undefined,
      new AbortController().signal,
    );
    expect(outcome.type).toBe("refused");
    const aborted = await runner.fit(
      { file: "e.csv", bytes, choices: {} },
      run,
      () => undefined,
      AbortSignal.abort(),
    );
    expect(aborted.type).toBe("cancelled");
    await runner.close();
  });

  it("takes a thrown cancellation as a cancellation", async () => {
    const runner = makeInlineRunner();
    const stop = (): never => {
      throw new Cancelled();
    };
    const outcome = await runner.fit(
      { file: "e.csv", bytes: new Uint8Array(0), choices: {} },
      { version: "0", node: "v20", started: "" },
      stop,
      new AbortController().signal,
    );
    expect(outcome.type).toBe("cancelled");
  });
});

describe("inspect", () => {
  it("shows how a file was read on standard output and ends with 0", async () => {
    const rows = Array.from(
      { length: 60 },
      (_, i) => `${(2.1 + i / 1000).toFixed(4)},${(50 + (i % 7)).toFixed(1)}`,
    );
    await put("a.csv", `# Sample: 7\nPhoton energy (eV),alpha (1/cm)\n${rows.join("\n")}\nbad row\n`);
    const { status, out, error } = await bench.run("inspect", "a.csv");
    expect(status, error).toBe(0);
    expect(out).toMatch(/^Reading of a\.csv\n/);
    expect(out).toContain("60 points");
    expect(out).toMatch(/line 63/);
    expect(error).toBe("");
  });

  it("ends with 3 where a file is no spectrum, and shows the others", async () => {
    await put("words.csv", "only words here\nand here\n");
    const { status, out, error } = await bench.run("inspect", "words.csv", "gone.csv");
    expect(status).toBe(3);
    expect(out).toBe("");
    expect(error).toContain("words.csv");
    expect(error).toContain("gone.csv: no such file or folder");
  });
});
