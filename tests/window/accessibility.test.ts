import { AxeBuilder } from "@axe-core/playwright";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { dropFiles, openProgram, showStage, type Opened } from "./program.ts";

let opened: Opened;

beforeAll(async () => {
  opened = await openProgram();
});
afterAll(async () => {
  await opened?.close();
});

const RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"];

async function faults(page: Page): Promise<string[]> {
  const { violations } = await new AxeBuilder({ page }).withTags(RULES).analyze();
  return violations.flatMap(({ id, nodes }) =>
    nodes.map((node) => `${id}: ${node.target.join(" ")} ${node.failureSummary ?? ""}`),
  );
}

describe.each(["light", "dark"] as const)("in %s", (colorScheme) => {
  it("every stage, the drawer, the notes and a card keep to WCAG 2.2 AA", async () => {
    const { page } = await opened.page({ colorScheme });
    for (const stage of ["read", "lines", "ladder"] as const) {
      await showStage(page, stage);
      expect(await faults(page)).toEqual([]);
    }
    await page.locator('[data-entry="gap"]').click();
    await page.getByRole("dialog").waitFor();
    expect(await faults(page)).toEqual([]);
    await page.keyboard.press("Escape");
    await page.locator("#rung-6").click();
    await page.locator(".notes-line").click();
    await page.locator(".files-button").click();
    await page.waitForSelector(".drawer");
    expect(await faults(page)).toEqual([]);
    await page.context().close();
  });

  it("a refused file and a stale fit keep to it too", async () => {
    const { page } = await opened.page({ colorScheme });
    await page.getByLabel("Asymmetry of the lines").selectOption("zero");
    await page.getByRole("button", { name: "Fit again" }).waitFor();
    expect(await faults(page)).toEqual([]);
    await dropFiles(page, [{ name: "broken.csv", text: "no table\n" }]);
    await page.waitForSelector(".stage-refused");
    expect(await faults(page)).toEqual([]);
    await page.context().close();
  });
});

describe("the theme", () => {
  it("is switched in the window: light, dark, as the system", async () => {
    const { page } = await opened.page({ colorScheme: "light" });
    const theme = (): Promise<string | null> => page.locator("html").getAttribute("data-theme");
    expect(await theme()).toBe("light");
    await page.click('[data-action="theme"]');
    await page.click('[data-action="theme"]');
    await page.waitForSelector('html[data-theme="dark"]');
    await page.click('[data-action="theme"]');
    await page.waitForSelector('html[data-theme="light"]');
    await page.context().close();
  });
});
