import { readFileSync } from "node:fs";
import { join } from "node:path";
import { AxeBuilder } from "@axe-core/playwright";
import type { Page } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from "vitest";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { openProgram, settled, showStage, type Opened, type Watched } from "./program.ts";

let opened: Opened;
let watched: Watched;
let page: Page;

beforeAll(async () => {
  opened = await openProgram();
});
afterAll(async () => {
  await opened?.close();
});
beforeEach(async () => {
  watched = await opened.page();
  page = watched.page;
  await showStage(page, "ladder");
  await page.getByRole("button", { name: "Errors", exact: true }).click();
});
afterEach(async () => {
  await page.context().close();
});

const RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"];
const VIEWS = [
  ["regions", "Joint regions of gap"],
  ["profiles", "Profiles of chi square"],
  ["influence", "What leaving out each of"],
  ["correlations", "Correlations of"],
  ["residuals", "Residuals of the spectrum"],
] as const;

const choose = (view: string): Promise<unknown> =>
  page.getByLabel("What the errors rest on").selectOption(view);

async function faults(): Promise<string[]> {
  const { violations } = await new AxeBuilder({ page }).withTags(RULES).analyze();
  return violations.flatMap(({ id, nodes }) => nodes.map((node) => `${id}: ${node.target.join(" ")}`));
}

async function tooLarge(): Promise<number[]> {
  return page.evaluate(() => {
    const ledger = document.querySelector(".ledger-place")!;
    const body = document.documentElement;
    return [
      body.scrollHeight - body.clientHeight,
      body.scrollWidth - body.clientWidth,
      ledger.scrollHeight - ledger.clientHeight,
    ];
  });
}

describe("what the errors of the ladder rest on", () => {
  it("is drawn whole at 1280 by 800 in every view, within WCAG 2.2 AA", async () => {
    for (const [view, summary] of VIEWS) {
      await choose(view);
      await page.waitForSelector(`.figure[aria-label^="${summary}"][data-state="drawn"]`);
      for (const pixels of await tooLarge()) expect(pixels).toBeLessThanOrEqual(0);
      expect(await faults()).toEqual([]);
    }
    expect(watched.troubles).toEqual([]);
  });

  it("lights and chooses a line by its influence, with its rung", async () => {
    await choose("influence");
    await page.locator('.influence-table tr[data-n="7"]').hover();
    await page.waitForSelector("#rung-7[data-lit]");
    await page.locator('.influence-table tr[data-n="8"]').click();
    await page.waitForSelector('#rung-8[aria-selected="true"]');
    expect(watched.troubles).toEqual([]);
  });
});

describe("spectra drawn anew", () => {
  it("are drawn on request beside the intervals of the fit; number and seed stand in result and protocol", async () => {
    await choose("draws");
    await page.waitForSelector('.figure-empty:has-text("No spectra were drawn anew")');
    const count = page.getByLabel("Number of spectra drawn anew");
    await count.fill("5");
    await count.press("Enter");
    await page.getByRole("alert").getByText("10 to 100000").waitFor();
    await count.fill("12");
    await count.press("Enter");
    await page.getByLabel("Seed of the random numbers").fill("7");
    await page.getByLabel("Noise of the spectra drawn anew").selectOption("residual");
    await page.getByRole("button", { name: "Draw and fit them" }).click();
    await page.waitForSelector('.figure[aria-label="Series parameters of 12 spectra drawn anew"]');
    await settled(page);
    await page.getByRole("region", { name: "12 spectra drawn anew" }).getByText("seed 7").waitFor();
    for (const pixels of await tooLarge()) expect(pixels).toBeLessThanOrEqual(0);
    expect(await faults()).toEqual([]);
    await page.getByRole("button", { name: "Save" }).click();
    const [download] = await Promise.all([
      page.waitForEvent("download"),
      page.getByRole("menuitem", { name: "Result, JSON" }).click(),
    ]);
    const path = join(opened.folder, "drawn.json");
    await download.saveAs(path);
    const { protocol, resampled } = JSON.parse(readFileSync(path, "utf8")) as RunglineResult;
    expect(protocol.uncertainty).toMatchObject({ resample: "residual", resamples: 12, seed: 7 });
    expect(resampled).toMatchObject({ kind: "residual", count: 12, seed: 7 });
    // Derived: every draw that did not fail
    expect(resampled!.draws!.gap_eV.length).toBe(12 - resampled!.failed);
    // One step of undo takes draws and choices back together.
    await page.click('[data-action="undo"]');
    await page.waitForSelector('.figure-empty:has-text("No spectra were drawn anew")');
    await page.waitForSelector('.path-stage[data-stage="lines"]:not(:has-text("choices changed"))');
    expect(watched.troubles).toEqual([]);
  });

  it("are stopped on request; the window answers meanwhile, and the fit before stands", async () => {
    await choose("draws");
    const count = page.getByLabel("Number of spectra drawn anew");
    await count.fill("5000");
    await count.press("Enter");
    await page.getByRole("button", { name: "Draw and fit them" }).click();
    await page.locator(".draw-job").getByText("of 5000").waitFor();
    // While it draws, another view is a click away.
    await choose("influence");
    await page.waitForSelector('.figure[aria-label^="What leaving out"][data-state="drawn"]');
    await choose("draws");
    await page.getByRole("button", { name: "Stop" }).click();
    await page.waitForSelector('.window[data-state="ready"]');
    await page.waitForSelector('.notes-first:has-text("the fit before stands")');
    await page.waitForSelector('.path-stage[data-stage="lines"]:not(:has-text("choices changed"))');
    expect(watched.troubles).toEqual([]);
  });
});
