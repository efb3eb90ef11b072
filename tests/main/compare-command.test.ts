import { mkdir, readFile, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { symmetric } from "../../app/base/index.ts";
import { comparisonSchema } from "../../app/protocol/index.ts";
import { analysed, makeBench, resultFor, type Bench } from "./command-line-bench.ts";
import { makeResult } from "./make-result.ts";

let bench: Bench;
const put = (name: string, text: string): Promise<void> => writeFile(join(bench.folder, name), text);
const get = (name: string): Promise<string> => readFile(join(bench.folder, name), "utf8");

/** Samples a1, a2, b1, b2: batch by the first letter, temperature by the digit, gap by both. */
beforeEach(async () => {
  const base = makeResult();
  bench = await makeBench({
    fit: (request) => {
      const [letter, digit] = request.file;
      const gap = (letter === "a" ? 2.172 : 2.1715) + Number(digit) * 1e-5;
      const facts = [
        { key: "sample", label: "Sample", text: request.file.slice(0, 2) },
        { key: "batch", label: "Batch", text: letter!.toUpperCase() },
        { key: "temperature", label: "T", text: `${digit}0 K` },
      ];
      return Promise.resolve(
        analysed(
          resultFor(request, {
            reading: { ...base.reading, facts },
            series: { ...base.series!, gap_eV: symmetric(gap, 1e-5) },
          }),
        ),
      );
    },
  });
  for (const name of ["a1.csv", "a2.csv", "b1.csv", "b2.csv"]) await put(name, name);
  await bench.run("fit", "a1.csv", "a2.csv", "--out", "first");
  await bench.run("fit", "b1.csv", "b2.csv", "a2.csv", "--out", "second");
});
afterEach(() => bench.remove());

describe("rungline compare", () => {
  it("merges the folders of separate runs and prints a table", async () => {
    const { status, out, error } = await bench.run("compare", "first", "second", "--reference", "A");
    expect(status, error).toBe(0);
    expect(out).toMatch(/^Comparison of 4 samples in 2 batches\n/);
    expect(out).toContain("B - A: -500(");
    expect(error).toContain("result-twice");
  });

  it("writes JSON by its schema, CSV or text, by the ending or the format, and replaces only its own kind", async () => {
    expect((await bench.run("compare", "first", "second", "--out", "c.json")).status).toBe(0);
    const parsed = comparisonSchema.safeParse(JSON.parse(await get("c.json")));
    expect(parsed.success).toBe(true);
    await bench.run("compare", "first", "second", "--out", "c.csv");
    expect(await get("c.csv")).toMatch(/^section,parameter,/);
    for (const name of ["c.json", "c.csv"])
      expect((await bench.run("compare", "first", "second", "--out", name)).status).toBe(0);
    await put("mine.txt", "mine");
    for (const name of ["mine.txt", "first/a1.json", "first"])
      expect((await bench.run("compare", "first", "second", "--out", name)).status).toBe(2);
    expect((await bench.run("compare", "first", "second", "--out", "no/where.json")).status).toBe(5);
  });

  it("takes single results and lists of results; what is none is named and ends with 3", async () => {
    await put("list.json", `[${await get("second/b1.json")},${await get("second/b2.json")}]`);
    const good = await bench.run("compare", "first/a1.json", "list.json");
    expect(good.out).toMatch(/^Comparison of 3 samples in 2 batches/);
    const bad = await bench.run("compare", "first", "a1.csv", "gone.json", "list.json");
    expect(bad.status).toBe(3);
    expect(bad.error).toContain("a1.csv: not JSON");
    expect(bad.error).toContain("gone.json: no such file");
    expect(bad.out).toMatch(/^Comparison of 4 samples/);
    await mkdir(join(bench.folder, "empty"));
    expect((await bench.run("compare", "empty", "first/a1.json")).status).toBe(3);
  });

  it("wrong words end with 2 and the remedy", async () => {
    const wrong = async (...argv: string[]): Promise<string> => {
      const { status, error } = await bench.run("compare", "first", "second", ...argv);
      expect(status, argv.join(" ")).toBe(2);
      return error;
    };
    expect(await wrong("--reference", "C")).toContain("batches: A, B");
    expect(await wrong("--against", "growth")).toContain("facts in the headers: sample, batch, temperature");
    expect(await wrong("--parameters", "gap,width")).toContain('no parameter "width"');
    expect(await wrong("--quality", "highest_n")).toContain("parameter=weight");
    expect(await wrong("--values", "none.csv")).toContain("no such file");
  });

  it("fits trends over typed columns, and the laws of temperature where that is what it runs against", async () => {
    await put("typed.csv", "sample;Growth (h)\r\na1;1\r\na2;2\r\nb1;3\r\nb2;4\r\n");
    const trend = await bench.run(
      "compare",
      ...["first", "second", "--values", "typed.csv", "--against", "Growth", "--parameters", "gap"],
    );
    expect(trend.out).toMatch(/against Growth: -?\d+\(\d+\) µeV\/h/);
    const temperature = await bench.run("compare", "first", "second", "--against", "temperature");
    expect(temperature.error).toContain("temperature-of-several-samples");
    expect(temperature.error).toContain("temperatures-few");
  });

  it("repeats a comparison from its file or from a report: weights, typed columns, reference", async () => {
    await put("typed.csv", "sample;Growth (h)\r\na1;1\r\na2;2\r\nb1;3\r\nb2;4\r\n");
    const choices = [
      ...["--values", "typed.csv", "--against", "Growth", "--reference", "A"],
      ...["--quality", "gap=1,highest_n=-0.5"],
    ];
    await bench.run("compare", "first", "second", ...choices, "--out", "c.json");
    await bench.run("report", "first", "second", ...choices, "--out", "r.html");
    const first = comparisonSchema.parse(JSON.parse(await get("c.json")));
    expect(first.choices).toMatchObject({ quality: { gap_eV: 1, highest_n: -0.5 }, reference: "A" });
    expect(first.notes.map(({ code }) => code)).toContain("quality-part-left-out");
    for (const from of ["c.json", "r.html"]) {
      const again = await bench.run(
        "compare",
        ...["first", "second", "--choices", from, "--out", "again.json"],
      );
      expect(again.status, again.error).toBe(0);
      const repeated = comparisonSchema.parse(JSON.parse(await get("again.json")));
      expect({ ...repeated, run: null }).toStrictEqual({ ...first, run: null });
    }
    const other = await bench.run("compare", "first", "second", "--choices", "c.json", "--reference", "B");
    expect(other.out).toMatch(/^Reference +batch B$/m);
    for (const wrong of ["first/a1.json", "typed.csv", "none.json"])
      expect((await bench.run("compare", "first", "second", "--choices", wrong)).status, wrong).toBe(2);
  });
});
