import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { chromium, type Browser } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { reportToHtml } from "../../app/report/index.ts";
import { compareSamples } from "../../app/tasks/index.ts";
import { findBrowser } from "../../main/loopback/browser.ts";
import { reportCurves, reportSamples } from "../support/report-samples.ts";

let browser: Browser;
let folder: string;

beforeAll(async () => {
  const program = findBrowser(process.env);
  if (program === null) throw new Error("no Chromium-family browser: see tests/run.mjs");
  folder = mkdtempSync(join(tmpdir(), "rungline-report-test-"));
  const results = reportSamples(20);
  const run = { version: "0.1.0", node: "v20.0.0", started: "2026-01-02T03:04:05.000Z" };
  const compared = compareSamples(results, {}, run);
  if (!compared.ok) throw new Error("no comparison");
  const curves = results.map((result) => reportCurves(result));
  writeFileSync(
    join(folder, "report.html"),
    reportToHtml({ results, curves, comparison: compared.value, run }),
  );
  browser = await chromium.launch({
    executablePath: program,
    args: [
      ...(process.getuid?.() === 0 ? ["--no-sandbox"] : []),
      "--disable-background-networking",
      "--no-first-run",
    ],
  });
});
afterAll(async () => {
  await browser?.close();
  rmSync(folder, { recursive: true, force: true });
});

describe("a report of 20 samples in a browser without a network", () => {
  it("asks for nothing, says no error, breaks no policy, and shows its figures", async () => {
    const context = await browser.newContext({ offline: true, viewport: { width: 1280, height: 800 } });
    const page = await context.newPage();
    const asked: string[] = [];
    const troubles: string[] = [];
    page.on("request", (request) => asked.push(request.url()));
    page.on("console", (message) => troubles.push(message.text()));
    page.on("pageerror", (error) => troubles.push(error.message));
    const address = pathToFileURL(join(folder, "report.html")).href;
    await page.goto(address);
    expect(asked).toEqual([address]);
    expect(troubles).toEqual([]);
    expect(await page.title()).toBe("Exciton series of 20 samples");
    const sizes = await page.$$eval("figure svg", (all) =>
      all.map((one) => one.getBoundingClientRect().width),
    );
    expect(sizes.length).toBeGreaterThan(100);
    expect(Math.min(...sizes)).toBeGreaterThan(300);
    // Nothing reaches out of the page to the side.
    const [inner, outer] = await page.evaluate(() => [
      document.documentElement.scrollWidth,
      document.documentElement.clientWidth,
    ]);
    expect(inner).toBeLessThanOrEqual(outer!);
    await context.close();
  });

  it("prints on A4 with every table within the page", async () => {
    const page = await browser.newPage();
    await page.emulateMedia({ media: "print" });
    // Derived: A4 is 210 mm wide, less margins of 14 mm each, at 96 pixels an inch
    const width = Math.floor(((210 - 28) / 25.4) * 96);
    await page.setViewportSize({ width, height: 1000 });
    await page.goto(pathToFileURL(join(folder, "report.html")).href);
    const wide = await page.$$eval(
      "table, figure, pre",
      (all, limit) => all.filter((one) => one.getBoundingClientRect().right > limit + 1).length,
      width,
    );
    expect(wide).toBe(0);
    const pdf = await page.pdf({ preferCSSPageSize: true });
    expect(pdf.subarray(0, 5).toString()).toBe("%PDF-");
    await page.close();
  });
});
