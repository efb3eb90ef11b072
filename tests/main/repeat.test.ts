import { readFile, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { analysed, makeBench, resultFor, type Bench } from "./command-line-bench.ts";

let bench: Bench;
const put = (name: string, text: string): Promise<void> => writeFile(join(bench.folder, name), text);
const get = (name: string): Promise<string> => readFile(join(bench.folder, name), "utf8");

beforeEach(async () => {
  bench = await makeBench();
  await put("a.csv", "1,2\n");
  await bench.run("fit", "a.csv", "--material", "sheet-2d", "--set", "axis.medium=air", "--out", "a.json");
});
afterEach(() => bench.remove());

describe("a result as the source of its protocol", () => {
  it("repeats the run: the same protocol, and the outcome is said to be the same to the last bit", async () => {
    const { status, error } = await bench.run("fit", "a.csv", "--protocol", "a.json", "--out", "b.json");
    expect(status, error).toBe(0);
    expect(error).toContain("repeats a.json to the last bit");
    expect(error).not.toContain("changed");
    expect(await get("b.protocol.json")).toBe(await get("a.protocol.json"));
  });

  it("names a changed input, protocol and version", async () => {
    await put("a.csv", "1,3\n");
    const input = await bench.run("fit", "a.csv", "--protocol", "a.json", "--out", "b.json");
    expect(input.error).toMatch(/input changed: SHA-256 of a\.csv was [0-9a-f]{64}, is [0-9a-f]{64}/);
    await put("a.csv", "1,2\n");
    const protocol = await bench.run(
      "fit",
      "a.csv",
      "--protocol",
      "a.json",
      "--set",
      "axis.medium=vacuum",
      "--out",
      "b.json",
    );
    expect(protocol.error).toContain('protocol changed: axis.medium was "air", is "vacuum"');
    await put("old.json", (await get("a.json")).replace(/"version": "[^"]*"/, '"version": "0.0.1"'));
    const version = await bench.run("fit", "a.csv", "--protocol", "old.json", "--out", "b.json");
    expect(version.error).toMatch(/version changed: old\.json was made by Rungline 0\.0\.1, this is \d/);
    await put("z.csv", "7,7\n");
    const other = await bench.run("fit", "z.csv", "--protocol", "a.json", "--out", "z.json");
    expect(other.error).toContain("a.json was not made from this file");
  });

  it("says where an outcome differs though nothing was changed", async () => {
    const { fit } = { fit: resultFor };
    await bench.remove();
    bench = await makeBench({
      fit: (request) => {
        const result = fit(request);
        return Promise.resolve(analysed({ ...result, tail: null }));
      },
    });
    await put("a.csv", "1,2\n");
    const first = await bench.run("fit", "a.csv", "--out", "a.json");
    expect(first.status).toBe(0);
    await put("a.json", (await get("a.json")).replace('"gap_eV": 0.00002', '"gap_eV": 0.00003'));
    const { error } = await bench.run("fit", "a.csv", "--protocol", "a.json", "--out", "b.json");
    expect(error).toContain("differs from a.json in 1 values (same input, protocol and version)");
    expect(error).toContain("systematic.gap_eV, was 0.00003, is 0.00002");
  });

  it("may be one of a report that carries its results", async () => {
    const html = `<!doctype html><title>x</title><script type="application/json" id="more">{"schema":"other/1"}</script>
      <script type="application/json" id="results">${await get("a.json")}</script>`;
    await put("report.html", html);
    const { status, error } = await bench.run("fit", "a.csv", "--protocol", "report.html", "--out", "b.json");
    expect(status, error).toBe(0);
    expect(error).toContain("repeats report.html to the last bit");
    await put("empty.html", "<p>nothing</p>");
    const empty = await bench.run("fit", "a.csv", "--protocol", "empty.html");
    expect([empty.status, empty.error]).toStrictEqual([2, expect.stringContaining("holds no result")]);
  });

  it("is refused where its results have different protocols", async () => {
    const one = JSON.parse(await get("a.json")) as { protocol: { lines: { max_n: number } } };
    const other = structuredClone(one);
    other.protocol.lines.max_n = 12;
    await put("both.json", JSON.stringify([one, other]));
    const { status, error } = await bench.run("fit", "a.csv", "--protocol", "both.json");
    expect(status).toBe(2);
    expect(error).toContain("different protocols");
  });

  it("made before a key was known gets that key's default", async () => {
    const old = JSON.parse(await get("a.json")) as { protocol: { lines: Record<string, unknown> } };
    delete old.protocol.lines["max_n"];
    await put("old.json", JSON.stringify(old));
    const { status, error } = await bench.run("fit", "a.csv", "--protocol", "old.json", "--out", "b.json");
    expect(status, error).toBe(0);
    expect(error).toContain("repeats old.json to the last bit");
  });
});
