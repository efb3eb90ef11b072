import { mkdir, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { resultToJson, REPORT_HTML_MARK } from "../../app/report/index.ts";
import { reportSamples } from "../support/report-samples.ts";
import { analysed, makeBench, resultFor, type Bench } from "./command-line-bench.ts";

let bench: Bench;
const put = (name: string, text: string): Promise<void> => writeFile(join(bench.folder, name), text);
const get = (name: string): Promise<string> => readFile(join(bench.folder, name), "utf8");
const list = async (name: string): Promise<string[]> => (await readdir(join(bench.folder, name))).sort();

/** Curves of four points that fit the range of the hand-made results. */
function fewCurves(): ReturnType<typeof analysed> & { type: "analysed" } {
  const outcome = analysed(reportSamples(1)[0]!) as ReturnType<typeof analysed> & { type: "analysed" };
  const energy_eV = Float64Array.of(2.14, 2.15, 2.16, 2.173);
  const one = energy_eV.map(() => 1);
  return {
    ...outcome,
    analysed: {
      ...outcome.analysed,
      curves: {
        ...outcome.analysed.curves,
        energy_eV,
        signal: energy_eV.map((_, i) => 100 + i),
        sigma: one,
        used: Uint8Array.of(0, 1, 1, 1),
        model: Float64Array.of(NaN, 101, 102, 103),
        background: Float64Array.of(NaN, 90, 90, 90),
        residual: Float64Array.of(NaN, 0, 1, -1),
      },
    },
  };
}

beforeEach(async () => {
  const few = fewCurves();
  bench = await makeBench({
    fit: (request) => Promise.resolve({ ...few, analysed: { ...few.analysed, result: resultFor(request) } }),
  });
  await mkdir(join(bench.folder, "results"));
  for (const [i, result] of reportSamples(4).entries())
    await put(`results/r${i + 1}.json`, resultToJson(result));
});
afterEach(() => bench.remove());

describe("rungline report", () => {
  it("writes one file from a folder of results, and may replace it, but nothing else", async () => {
    expect((await bench.run("report", "results", "--out", "r.html")).status).toBe(0);
    const html = await get("r.html");
    expect(html.startsWith(REPORT_HTML_MARK)).toBe(true);
    expect(html).toContain("Exciton series of 4 samples");
    expect(html).toContain('id="comparison"');
    expect((await bench.run("report", "results/r1.json", "--out", "r.html")).status).toBe(0);
    expect(await get("r.html")).toContain("<h2>Result</h2>");
    await put("mine.html", "<p>mine</p>");
    const refused = await bench.run("report", "results", "--out", "mine.html");
    expect(refused.status).toBe(2);
    expect(refused.error).toContain("not a report of Rungline");
    expect(await get("mine.html")).toBe("<p>mine</p>");
  });

  it("prints to standard output where no place is named", async () => {
    const { status, out } = await bench.run("report", "results/r1.json");
    expect(status).toBe(0);
    expect(out.startsWith(REPORT_HTML_MARK)).toBe(true);
  });

  it("names what is no result, reports the rest, and ends with 3", async () => {
    await put("no.json", "{}");
    const { status, error } = await bench.run("report", "results", "no.json", "--out", "r.html");
    expect(status).toBe(3);
    expect(error).toContain("no.json: is no result");
    expect(await get("r.html")).toContain("4 samples");
    expect((await bench.run("report", "no.json", "--out", "s.html")).status).toBe(3);
    expect(await list(".")).not.toContain("s.html");
  });

  it("gives figures and tables alone, with names after the results", async () => {
    const { status } = await bench.run("report", "results", "--figures", "f", "--tables", "t");
    expect(status).toBe(0);
    expect(await list("f")).toEqual(
      expect.arrayContaining(["r1-levels.svg", "r4-widths.svg", "compare-gap-eV.svg"]),
    );
    expect(await get("f/r1-levels.svg")).toMatch(
      /^<\?xml version="1.0" encoding="UTF-8"\?>\n<!-- Rungline -->\n<svg /,
    );
    expect(await list("t")).toEqual(
      ["comparison.csv", "comparison.tex", ...[1, 2, 3, 4].flatMap((i) => [`r${i}.csv`, `r${i}.tex`])].sort(),
    );
    // Replaced by the same again.
    expect((await bench.run("report", "results", "--figures", "f", "--tables", "t")).status).toBe(0);
  });

  it("writes figures of the kinds, width and dots asked for, replaces its own and nothing else", async () => {
    const run = (...more: string[]) => bench.run("report", "results/r1.json", "--figures", "f", ...more);
    expect(
      (await run("--figure-kinds", "PDF, png", "--figure-width", "column", "--figure-dpi", "300")).status,
    ).toBe(0);
    const files = await list("f");
    expect(files).toContain("r1-levels.pdf");
    expect(files).toContain("r1-levels.png");
    expect(files.some((file) => file.endsWith(".svg"))).toBe(false);
    const png = await readFile(join(bench.folder, "f/r1-levels.png"));
    // Derived: 85 mm at 300 dots an inch: 85/25.4*300 = 1003.9
    expect(png.readUInt32BE(16)).toBe(1004);
    expect(
      (await run("--figure-kinds", "pdf,png,svg", "--figure-width", "120mm", "--figure-dpi", "300")).status,
    ).toBe(0);
    expect(await get("f/r1-levels.svg")).toContain('width="120mm"');
    for (const name of ["f/r1-levels.pdf", "f/r1-levels.png"]) {
      await put(name, name.endsWith("pdf") ? "%PDF-1.7 mine" : "\x89PNG mine");
      const refused = await run("--figure-kinds", "pdf,png");
      expect(refused.status).toBe(2);
      expect(refused.error).toContain("not a figure of Rungline");
      await rm(join(bench.folder, name));
    }
  });

  it("says what is wrong with how figures are asked for", async () => {
    const wrong: [string[], string][] = [
      [["--figures", "f", "--figure-kinds", "svg,tiff"], '"tiff" is none of svg, pdf, png'],
      [["--figures", "f", "--figure-width", "20"], "a number of mm from 60 to 260"],
      [["--figures", "f", "--figure-width", "wide"], "column (85 mm), page (178 mm)"],
      [["--figures", "f", "--figure-kinds", "png", "--figure-dpi", "72"], "is one of 300, 600"],
      [["--figures", "f", "--figure-dpi", "300"], "--figure-kinds png"],
      [["--figure-kinds", "pdf"], "name their folder with --figures"],
    ];
    for (const [words, message] of wrong) {
      const { status, error } = await bench.run("report", "results/r1.json", ...words);
      expect(status).toBe(2);
      expect(error).toContain(message);
    }
    expect(await list(".")).not.toContain("f");
  });

  it("refuses a reference batch that is not there", async () => {
    const { status, error } = await bench.run("report", "results", "--reference", "Z", "--out", "r.html");
    expect(status).toBe(2);
    expect(error).toContain('no batch "Z"');
  });

  it("can be repeated from: the protocol in it is taken, and what is no longer the same is said", async () => {
    await bench.run("report", "results/r1.json", "--out", "r.html");
    await put("A1.csv", "1,2\n");
    const { status, out, error } = await bench.run(
      "fit",
      "A1.csv",
      "--protocol",
      "r.html",
      "--format",
      "json",
    );
    expect(status).toBe(0);
    const again = JSON.parse(out) as { protocol: unknown };
    expect(again.protocol).toStrictEqual(reportSamples(1)[0]!.protocol);
    expect(error).toMatch(/A1\.csv/);
    expect(error).toMatch(/changed|other|differ|not the/);
  });
});

describe("fitted curves", () => {
  it("are written beside results, drawn in the report, and missing ones are fitted anew", async () => {
    await put("a.csv", "1,2\n");
    await put("b.csv", "1,3\n");
    const files = ["a.csv", "b.csv"];
    expect((await bench.run("fit", ...files, "--out", "o", "--curves")).status).toBe(0);
    expect(await list("o")).toEqual(expect.arrayContaining(["a.curves.csv", "a.json", "b.curves.csv"]));
    const [head, ...rows] = (await get("o/a.curves.csv")).trimEnd().split("\r\n");
    expect(head).toMatch(
      /^energy \(eV\),alpha \(1\/cm\),sigma,used,model,background,tail,residual \(sigma\),line n = 5/,
    );
    expect(rows).toHaveLength(4);
    expect(rows[0]).toMatch(/^2\.14,100,1,0,,,,,/);
    expect(rows[1]).toMatch(/^2\.15,101,1,1,101,90,,0,/);
    await bench.run("report", "o", "--figures", "f");
    expect(await list("f")).toEqual(expect.arrayContaining(["a-spectrum.svg", "b-spectrum.svg"]));
    expect(bench.fitted).toHaveLength(2);
    await writeFile(join(bench.folder, "o/b.curves.csv"), "");
    const { error } = await bench.run("report", "o", "--out", "r.html");
    expect(error).toContain("not the curves of");
  });

  it("beside a single result too, and not without a place to write", async () => {
    await put("a.csv", "1,2\n");
    expect((await bench.run("fit", "a.csv", "--out", "x.json", "--curves")).status).toBe(0);
    expect(await list(".")).toEqual(expect.arrayContaining(["x.curves.csv", "x.json", "x.protocol.json"]));
    expect((await bench.run("fit", "a.csv", "--curves")).status).toBe(2);
  });
});

describe("LaTeX", () => {
  it("is written by fit and compare, by option or ending", async () => {
    await put("a.csv", "1,2\n");
    expect((await bench.run("fit", "a.csv", "--format", "latex")).out).toContain("\\begin{tabular}");
    expect((await bench.run("compare", "results", "--out", "c.tex")).status).toBe(0);
    expect(await get("c.tex")).toMatch(/^% Rungline, tables of a comparison\n/);
    expect((await bench.run("compare", "results", "--out", "c.tex")).status).toBe(0);
  });
});
