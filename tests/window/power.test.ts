import { readFileSync, statSync } from "node:fs";
import { join } from "node:path";
import { AxeBuilder } from "@axe-core/playwright";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { dropFiles, openProgram, showStage, type Opened, type Watched } from "./program.ts";

const fixtures = new URL("../../fixtures/", import.meta.url);
const SERIES = ["1", "10", "40", "120", "300"].map((power) => ({
  name: `TH-A5_${power}uW.txt`,
  text: readFileSync(new URL(`generated/power-files/TH-A5_${power}uW.txt`, fixtures), "utf8"),
}));
const truth = JSON.parse(
  readFileSync(new URL("demo/power/TH-A4_power-series.truth.json", fixtures), "utf8"),
) as { lines: { n: number; saturation_per_uW: number }[] };

let opened: Opened;
let watched: Watched;
let page: Page;

/** One page for all: a series takes its time, and each test leaves the window as the next needs it. */
beforeAll(async () => {
  opened = await openProgram();
  watched = await opened.page();
  page = watched.page;
});
afterAll(async () => {
  await opened?.close();
});

const drawn = (): Promise<unknown> =>
  page.waitForSelector('.window[data-state="ready"] .stage[data-stage="power"] .figure[data-state="drawn"]');

describe("the demo power series", () => {
  it("is at hand where none is chosen, is fitted with progress, and can be cancelled", async () => {
    await page.click('.path-stage[data-stage="power"]');
    await page.waitForSelector('.stage-unfitted[data-state="not-yet"]');
    await page.getByRole("note").getByText("laser safety").waitFor();
    await page.getByRole("button", { name: "Open the demo series" }).click();
    await page.locator('.fit-job[data-state="running"]').getByRole("button", { name: "Cancel" }).click();
    await page.waitForSelector('.notes-first:has-text("was cancelled")');
    await page.getByRole("button", { name: "Fit", exact: true }).click();
    await page.waitForSelector('.path-stage[data-stage="power"][data-state="busy"]:has-text("fitting")');
    await drawn();
    expect(await page.locator('.path-stage[data-stage="power"]').innerText()).toMatch(
      /10 powers, \d+ bleach/,
    );
  });

  it("shows a saturation near the one it was made with, and the line chosen on the ladder", async () => {
    await page.locator("#rung-10").click();
    await page.waitForSelector('.ledger-section[aria-label="Line n = 10: bleaches"]');
    const text = await page.locator('[data-entry="power-saturation_per_uW"] .ledger-value').innerText();
    const value = Number(/^([\d.\s]+)\(/.exec(text)![1]!.replace(/\s/g, ""));
    // Source: fixtures/demo/power/TH-A4_power-series.truth.json
    const made = truth.lines.find(({ n }) => n === 10)!.saturation_per_uW;
    // Derived: a tenth is far more than the fit's own error, and far less than one step in n (a factor above two)
    expect(Math.abs(value / made - 1)).toBeLessThan(0.1);
  });

  it("has figure and ledger whole at 1280 by 800 in every panel, and says nothing on the console", async () => {
    for (const panel of ["Bleaching", "Scaling", "Volumes", "Spectra", "Shifts", "What for", "All"]) {
      await page.getByRole("button", { name: panel, exact: true }).click();
      await drawn();
      const over = await page.evaluate(() => {
        const ledger = document.querySelector(".ledger-place")!;
        const body = document.documentElement;
        return [
          body.scrollHeight - body.clientHeight,
          body.scrollWidth - body.clientWidth,
          ledger.scrollHeight - ledger.clientHeight,
        ];
      });
      for (const pixels of over) expect(pixels, panel).toBeLessThanOrEqual(0);
    }
    expect(watched.troubles).toEqual([]);
  });

  it("tells line by line what the crystal is good for, by keyboard too", async () => {
    await page.getByRole("button", { name: "What for", exact: true }).click();
    const table = page.getByRole("grid", { name: /what each n is good for/i });
    await table.focus();
    await page.keyboard.press("Home");
    await page.keyboard.press("ArrowDown");
    const chosen = await page.locator(".crystal-table tr[data-chosen]").getAttribute("data-n");
    expect(await table.getAttribute("aria-activedescendant")).toBe(`crystal-row-${chosen}`);
    await page.waitForSelector(`#rung-${chosen}[aria-selected="true"]`);
    await page.keyboard.press("Escape");
    await page.getByRole("button", { name: "All", exact: true }).click();
  });

  it("marks defaults as defaults and takes an input in the sentence, as one step of undo", async () => {
    await page.getByRole("button", { name: "Volumes", exact: true }).click();
    await page.waitForSelector('.inputs li[data-assumed]:has-text("default")');
    const spot = page.getByLabel("Spot diameter in micrometres");
    await spot.fill("0");
    await spot.press("Enter");
    await page.getByRole("alert").getByText("above zero").waitFor();
    await spot.fill("15");
    await spot.press("Enter");
    await page.waitForSelector('.path-stage[data-stage="power"]:has-text("choices changed")');
    await page.getByRole("button", { name: "Fit again" }).waitFor();
    await page.click('[data-action="undo"]');
    await page.waitForSelector('.path-stage[data-stage="power"]:not(:has-text("choices changed"))');
    expect(await spot.inputValue()).toBe("12");
    await page.getByRole("button", { name: "All", exact: true }).click();
  });

  it("opens the card of a number and is kept as a result with its part power", async () => {
    await page.locator('[data-entry="power-saturation-exponent"]').focus();
    await page.keyboard.press("Enter");
    await page.getByRole("dialog", { name: "Exponent of S" }).waitFor();
    await page.keyboard.press("Escape");
    await page.getByRole("button", { name: "Save" }).click();
    const [download] = await Promise.all([
      page.waitForEvent("download"),
      page.getByRole("menuitem", { name: "Result, JSON" }).click(),
    ]);
    const path = join(opened.folder, download.suggestedFilename());
    await download.saveAs(path);
    const result = JSON.parse(readFileSync(path, "utf8")) as { power: { spectra: unknown[] } };
    // Derived: ten columns of power
    expect(result.power.spectra).toHaveLength(10);
    expect(watched.troubles).toEqual([]);
  });

  it("is drawn in light and dark, at both sizes, and keeps to WCAG 2.2 AA", async () => {
    for (const [width, height, colorScheme] of [
      [1280, 800, "dark"],
      [1920, 1080, "dark"],
      [1920, 1080, "light"],
      [1280, 800, "light"],
    ] as const) {
      await page.setViewportSize({ width, height });
      await page.emulateMedia({ colorScheme });
      await drawn();
      const path = join(opened.folder, `power-${width}-${colorScheme}.png`);
      await page.screenshot({ path });
      // Derived: an empty picture of this size takes far less
      expect(statSync(path).size).toBeGreaterThan(40_000);
      if (width !== 1280) continue;
      await page.getByRole("button", { name: "What for", exact: true }).click();
      await drawn();
      const axe = new AxeBuilder({ page }).withTags(["wcag2a", "wcag2aa", "wcag21aa", "wcag22aa"]);
      const { violations } = await axe.analyze();
      expect(violations.map(({ id, nodes }) => `${id} ${nodes[0]?.target.join(" ")}`)).toEqual([]);
      await page.getByRole("button", { name: "All", exact: true }).click();
    }
    expect(watched.troubles).toEqual([]);
  });
});

describe("several files", () => {
  it("are marked as one series in the drawer, and fitted with powers from their names", async () => {
    await dropFiles(page, SERIES);
    await page.waitForSelector('.files-name:has-text("TH-A5_1uW.txt")');
    await page.click(".files-button");
    for (const { name } of SERIES) await page.getByLabel(`${name} for a power series`).check();
    await page.getByRole("button", { name: "One power series of 5" }).click();
    await page.waitForSelector('.stage-message:has-text("5 files are marked")');
    await page.getByRole("button", { name: "Fit", exact: true }).click();
    await drawn();
    expect(await page.locator('.path-stage[data-stage="power"]').innerText()).toMatch(/5 powers, \d+ bleach/);
    expect(watched.troubles).toEqual([]);
  });

  it("that are no power series are refused with the remedy, and the file stays as it was", async () => {
    await page.click(".files-button");
    await page.locator('.drawer-file:has-text("TH-A1_transmission.csv")').click();
    await showStage(page, "read");
    await page.getByRole("note").getByText("laser safety").waitFor();
    await page.click('.path-stage[data-stage="power"]');
    await page.getByRole("button", { name: "Fit", exact: true }).click();
    await page.waitForSelector('.stage-unfitted[data-state="refused"]');
    expect(await page.locator(".refusal").innerText()).toMatch(/power series needs spectra at two powers/);
  });
});
