import { readFileSync } from "node:fs";
import { unzipSync } from "fflate";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, expect, it } from "vitest";
import { openProgram, type Opened, type Watched } from "./program.ts";

let opened: Opened;
let watched: Watched;
beforeAll(async () => {
  opened = await openProgram();
  watched = await opened.page();
  await watched.page.click('.path-stage[data-stage="record"]');
  await watched.page.waitForSelector('.record[data-state="written"]');
});
afterAll(() => opened.close());

async function saved(page: Page, button: string): Promise<{ name: string; bytes: Buffer }> {
  const [download] = await Promise.all([
    page.waitForEvent("download"),
    page.getByRole("button", { name: button, exact: true }).click(),
  ]);
  return { name: download.suggestedFilename(), bytes: readFileSync(await download.path()) };
}

it("saves one figure as PDF, PNG and SVG at the width chosen, and all of them at once, within the content policy", async () => {
  const { page, troubles } = watched;
  const choices = page.getByRole("region", { name: "Figures alone" });
  await expect
    .poll(() => choices.getByLabel("Figure", { exact: true }).locator("option").count())
    .toBeGreaterThan(4);
  await choices.getByLabel("Figure", { exact: true }).selectOption("TH-A1_transmission-levels");
  const pdf = await saved(page, "Save the figure");
  expect(pdf.name).toBe("TH-A1_transmission-levels.pdf");
  expect(pdf.bytes.subarray(0, 5).toString("latin1")).toBe("%PDF-");
  // Derived: 85 mm are 85/25.4 inches of 72 points
  expect(pdf.bytes.toString("latin1")).toMatch(/\/MediaBox \[ 0 0 240\.94/);
  expect(pdf.bytes.toString("latin1")).toContain("+IBMPlexSans-Italic");

  await choices.getByRole("button", { name: "PNG" }).click();
  await choices.getByLabel("Width in print").selectOption("178");
  await choices.getByLabel("Dots an inch").selectOption("300");
  const png = await saved(page, "Save the figure");
  expect(png.name).toBe("TH-A1_transmission-levels.png");
  expect(png.bytes.subarray(1, 4).toString("latin1")).toBe("PNG");
  // Derived: 178 mm at 300 dots an inch: 178/25.4*300 = 2102.4
  expect(png.bytes.readUInt32BE(16)).toBe(2102);

  await choices.getByRole("button", { name: "SVG" }).click();
  await choices.getByLabel("Figure", { exact: true }).selectOption("");
  const all = await saved(page, "Save the figures");
  expect(all.name).toBe("TH-A1_transmission.figures.zip");
  const files = unzipSync(new Uint8Array(all.bytes));
  expect(Object.keys(files)).toContain("TH-A1_transmission-spectrum.svg");
  expect(new TextDecoder().decode(files["TH-A1_transmission-levels.svg"])).toContain('width="178mm"');
  expect(troubles).toEqual([]);
});
