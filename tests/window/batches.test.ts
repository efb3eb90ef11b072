import { AxeBuilder } from "@axe-core/playwright";
import { readFileSync, statSync } from "node:fs";
import { join } from "node:path";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { changeTheme, dropFiles, openProgram, showStage, type Opened, type Watched } from "./program.ts";

let opened: Opened;
let watched: Watched;
let page: Page;

beforeAll(async () => {
  opened = await openProgram(
    ["TH-A1_transmission.csv", "TH-A3_alpha.csv", "TH-B1_transmission.csv"].map(
      (name) => new URL(`../../fixtures/demo/${name}`, import.meta.url).pathname,
    ),
  );
  watched = await opened.page({ colorScheme: "light" });
  page = watched.page;
});
afterAll(async () => {
  await opened?.close();
});

const RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"];

async function faults(): Promise<string[]> {
  const { violations } = await new AxeBuilder({ page }).withTags(RULES).analyze();
  return violations.flatMap(({ id, nodes }) =>
    nodes.map((node) => `${id}: ${node.target.join(" ")} ${node.failureSummary ?? ""}`),
  );
}

const words = (stage: string): Promise<string> =>
  page.locator(`.path-stage[data-stage="${stage}"]`).innerText();
const rows = (): Promise<number> => page.locator(".batches-table tbody tr").count();

describe("the stage Batches", () => {
  it("says what to do next, then fits all files and sets them side by side", async () => {
    await page.click('.path-stage[data-stage="batches"]');
    expect(await page.locator(".stage-message").innerText()).toMatch(/2 files wait in the drawer/);
    expect(await page.getByRole("button", { name: "Fit them" }).isEnabled()).toBe(true);
    await page.getByRole("button", { name: "Fit all" }).click();
    await page.waitForSelector('.stage[data-stage="batches"] .figure[data-state="drawn"]');
    await page.waitForSelector('.window[data-state="ready"]');
    await page.waitForFunction(() => document.querySelectorAll(".batches-table tbody tr").length === 3);
    expect(await words("batches")).toMatch(/3 in 2 batches/);
    expect(await words("record")).toMatch(/3 results/);
    expect(await page.locator('[data-entry="batches-gap_eV-mean"]').innerText()).toMatch(/eV/);
  });

  it("is filtered by its key and by temperature, and every filter is undone", async () => {
    const key = page.getByRole("group", { name: "Batches shown" });
    await page.getByLabel("Highest temperature in kelvin").fill("1.6");
    await page.keyboard.press("Enter");
    await page.waitForFunction(() => document.querySelectorAll(".batches-table tbody tr").length === 2);
    await page.click('[data-action="undo"]');
    await page.waitForFunction(() => document.querySelectorAll(".batches-table tbody tr").length === 3);
    await key.getByRole("button", { name: "TH-A" }).click();
    await page.waitForSelector('.stage-message:has-text("The filters leave one sample")');
    await page.click('[data-action="undo"]');
    await page.waitForSelector(".batches-table");
    expect(await rows()).toBe(3);
  });

  it("weighs a figure of quality of parts that are seen, each step undone", async () => {
    const plots = page.getByRole("group", { name: "Plots" });
    await plots.getByRole("button", { name: "Quality" }).click();
    await page.getByRole("heading", { name: "A figure of quality is what you weigh" }).waitFor();
    expect(await faults()).toEqual([]);
    await page.getByLabel("Add a part").selectOption("gap_eV");
    await page.getByLabel("Add a part").selectOption("width_floor_eV");
    await page.getByLabel("Weight of floor of the widths").fill("-2");
    await page.keyboard.press("Enter");
    await page.waitForSelector('.ledger:has-text("--quality gap_eV=1,width_floor_eV=-2")');
    expect(await page.locator('.batches-table th:has-text("Quality")').count()).toBe(1);
    expect(await page.locator('[data-entry^="quality-part-"]').count()).toBe(2);
    await changeTheme(page, "dark");
    expect(await faults()).toEqual([]);
    await changeTheme(page, "light");
    await page.click('[data-action="undo"]');
    await page.waitForSelector('.ledger:has-text("--quality gap_eV=1,width_floor_eV=-1")');
    await page.click('[data-action="undo"]');
    await page.click('[data-action="undo"]');
    await page.getByRole("heading", { name: "A figure of quality is what you weigh" }).waitFor();
    await plots.getByRole("button", { name: "Parameters" }).click();
  });

  it("takes typed temperatures, pasted as a column, and draws the laws over them", async () => {
    await page.getByRole("button", { name: "Typed columns" }).click();
    const fields = page.locator('.typed-table input[aria-label^="Temperature"]');
    const paste = (text: string): Promise<void> =>
      fields.first().evaluate((field, pasted) => {
        const clipboardData = new DataTransfer();
        clipboardData.setData("text", pasted);
        field.dispatchEvent(new ClipboardEvent("paste", { clipboardData, bubbles: true, cancelable: true }));
      }, text);
    expect(await fields.count()).toBe(3);
    await paste("2\n60\n120\n");
    await page.waitForFunction(
      () =>
        [...document.querySelectorAll<HTMLInputElement>('.typed-table input[aria-label^="Temperature"]')]
          .map(({ value }) => value)
          .join() === "2,60,120",
    );
    await page.getByLabel("Name of a new column").fill("Growth (mm/h)");
    await page.keyboard.press("Enter");
    await page.getByLabel(/^Growth \/ mm\/h of TH-B1/).fill("fast");
    await page.keyboard.press("Enter");
    await page.getByRole("alert").filter({ hasText: "a number, with or without its unit" }).waitFor();
    await page.keyboard.press("Escape");
    expect(await faults()).toEqual([]);
    await page.getByLabel("Trend along").selectOption("temperature");
    const plots = page.getByRole("group", { name: "Plots" });
    await plots.getByRole("button", { name: "Temperature" }).click();
    await page.waitForSelector('.law-key:has-text("acoustic phonons")');
    await page.waitForSelector('.ledger:has-text("Width at 0 K")');
    expect(await faults()).toEqual([]);
    await page.click('[data-action="undo"]');
    await page.click('[data-action="undo"]');
    await page.waitForFunction(
      () =>
        document.querySelector<HTMLInputElement>('.typed-table input[aria-label^="Temperature"]')?.value ===
        "",
    );
    await page.getByRole("button", { name: "Samples", exact: true }).click();
    await page.waitForSelector(".batches-table");
  });

  it("keeps to WCAG 2.2 AA in light and dark, and is drawn at both sizes", async () => {
    for (const [width, height, colorScheme] of [
      [1920, 1080, "dark"],
      [1280, 800, "light"],
    ] as const) {
      await page.setViewportSize({ width, height });
      await changeTheme(page, colorScheme);
      await page.waitForSelector('.figure[data-state="drawn"]');
      expect(await faults()).toEqual([]);
      const path = join(opened.folder, `batches-${width}.png`);
      await page.screenshot({ path });
      // Derived: an empty picture of this size takes far less
      expect(statSync(path).size).toBeGreaterThan(40_000);
    }
  });

  it("is climbed with keys; Enter opens the sample in its ladder", async () => {
    await page.locator(".batches-table").focus();
    await page.keyboard.press("End");
    await page.getByLabel("Batch of TH-B1").waitFor();
    await page.keyboard.press("Enter");
    await page.waitForSelector('.stage[data-stage="ladder"] .figure[data-state="drawn"]');
    expect(await page.locator(".files-name").innerText()).toBe("TH-B1_transmission.csv");
    await showStage(page, "batches");
  });
});

describe("the stage Record", () => {
  it("shows the report as it will be kept, without breaking the policy", async () => {
    await page.click('.path-stage[data-stage="record"]');
    await page.waitForSelector('.record[data-state="written"]');
    // Text of an open shadow tree is found as any other.
    await page.getByRole("heading", { name: "Exciton series of 3 samples" }).waitFor();
    await page.getByRole("heading", { name: "Cautions" }).waitFor();
    await page.getByRole("link", { name: "TH-B1" }).first().click();
    for (const colorScheme of ["dark", "light"] as const) {
      await changeTheme(page, colorScheme);
      expect(await faults()).toEqual([]);
    }
    expect(watched.troubles).toEqual([]);
  });

  it("saves the report, which comes back as results, and prints it alone", async () => {
    const [download] = await Promise.all([
      page.waitForEvent("download"),
      page.getByRole("button", { name: "Save the report" }).click(),
    ]);
    const path = join(opened.folder, download.suggestedFilename());
    await download.saveAs(path);
    expect(readFileSync(path, "utf8")).toMatch(/^<!doctype html>/);
    await page.emulateMedia({ media: "print" });
    expect(await page.locator(".top").isVisible()).toBe(false);
    expect(await page.locator(".report-host").isVisible()).toBe(true);
    await page.emulateMedia({ media: "screen" });
    await dropFiles(page, [{ name: "back.html", text: readFileSync(path, "utf8") }]);
    await page.click(".files-button");
    expect(await page.locator('.drawer-file:has-text("back.html")').count()).toBe(3);
    expect(await faults()).toEqual([]);
    await page.keyboard.press("Escape");
    await page.click('.path-stage[data-stage="record"]');
    await page.waitForSelector('.record[data-state="written"]');
    expect(watched.troubles).toEqual([]);
  });

  it("is about one sample where one is chosen", async () => {
    await page.getByLabel("Samples of the record").selectOption("TH-A3_alpha.csv");
    await page.getByRole("heading", { name: "Exciton series of TH-A3" }).waitFor();
  });
});
