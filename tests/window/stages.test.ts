import { readFileSync, statSync } from "node:fs";
import { join } from "node:path";
import type { Page } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from "vitest";
import { dropFiles, openProgram, settled, showStage, type Opened, type Watched } from "./program.ts";

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
});
afterEach(async () => {
  await page.context().close();
});

/** What the demo's own truth file says. */
const truth = JSON.parse(
  readFileSync(new URL("../../fixtures/demo/TH-A1_transmission.truth.json", import.meta.url), "utf8"),
) as unknown;

describe("the window on the demo", () => {
  it("opens with a finished analysis, without an error or a breach of the content policy", async () => {
    expect(await page.locator('.path-stage[data-stage="lines"]').getAttribute("aria-current")).toBe("step");
    for (const stage of ["read", "lines", "ladder"])
      expect(await page.locator(`.path-stage[data-stage="${stage}"]`).getAttribute("data-state")).toMatch(
        /done|doubt/,
      );
    await showStage(page, "read");
    await showStage(page, "ladder");
    await showStage(page, "lines");
    expect(watched.troubles).toEqual([]);
  });

  it("shows the gap that the demo was made with", async () => {
    await showStage(page, "ladder");
    const text = await page.locator('[data-entry="gap"] .ledger-value').innerText();
    const match = /^([\d.\s]+)\((\d+)\)\s*eV$/.exec(text)!;
    const value = Number(match[1]!.replace(/\s/g, ""));
    // Source: fixtures/demo/TH-A1_transmission.truth.json, the value the demo's generator used
    const made = findNumber(truth, "gap_eV");
    expect(Math.abs(value - made)).toBeLessThan(1e-5);
  });

  it("has the figure and the ledger whole at 1280 by 800, without scrolling", async () => {
    for (const stage of ["lines", "ladder"] as const) {
      await showStage(page, stage);
      const over = await page.evaluate(() => {
        const ledger = document.querySelector(".ledger-place")!;
        const body = document.documentElement;
        return [
          body.scrollHeight - body.clientHeight,
          body.scrollWidth - body.clientWidth,
          ledger.scrollHeight - ledger.clientHeight,
        ];
      });
      for (const pixels of over) expect(pixels).toBeLessThanOrEqual(0);
    }
  });
});

describe("the ladder at the edge", () => {
  it("is climbed with the arrow keys, and the line is chosen everywhere", async () => {
    await page.locator(".rungs-list").focus();
    await page.keyboard.press("ArrowUp");
    await page.keyboard.press("ArrowUp");
    await page.waitForSelector('.rung[aria-selected="true"]');
    const active = await page.locator(".rungs-list").getAttribute("aria-activedescendant");
    const lowest = await page.locator(".rung").first().getAttribute("id");
    // Derived: the second step of a ladder stands one above the lowest
    expect(Number(active!.slice(5))).toBe(Number(lowest!.slice(5)) + 1);
    const n = active!.slice(5);
    await page.waitForSelector(`.lines-table tr[data-n="${n}"][data-chosen]`);
    await page.waitForSelector(`.ledger-section[aria-label="Line n = ${n}"]`);
    await page.keyboard.press("Escape");
    await page.waitForSelector('.rung[aria-selected="true"]', { state: "detached" });
  });

  it("lights a line in the table when its rung is pointed at, and a rung when a row is", async () => {
    await page.locator("#rung-5").hover();
    await page.waitForSelector('.lines-table tr[data-n="5"][data-lit]');
    await page.locator('.lines-table tr[data-n="6"]').hover();
    await page.waitForSelector("#rung-6[data-lit]");
    await page.waitForSelector("#rung-5[data-lit]", { state: "detached" });
  });
});

describe("choices", () => {
  it("make the fit out of date until it is made again; undo and redo go over both", async () => {
    await page.getByLabel("Asymmetry of the lines").selectOption("zero");
    await page.waitForSelector('.path-stage[data-stage="lines"]:has-text("choices changed")');
    await page.keyboard.press("Control+z");
    await page.waitForSelector('.path-stage[data-stage="lines"]:not(:has-text("choices changed"))');
    expect(await page.getByLabel("Asymmetry of the lines").inputValue()).toBe("shared");
    await page.keyboard.press("Control+Shift+z");
    await page.waitForSelector('.path-stage[data-stage="lines"]:has-text("choices changed")');
    await page.getByRole("button", { name: "Fit again" }).click();
    await page.waitForSelector(".fit-job");
    await settled(page);
    await page.waitForSelector('[data-action="undo"][aria-label="Undo: fit TH-A1_transmission.csv"]');
    await page.click('[data-action="undo"]');
    await page.waitForSelector('.path-stage[data-stage="lines"]:has-text("choices changed")');
    expect(watched.troubles).toEqual([]);
  });

  it("that make no sense are refused beside the field", async () => {
    const field = page.getByLabel("Lines to fit");
    await field.fill("5-2");
    await field.press("Enter");
    await page.getByRole("alert").getByText("a list such as").waitFor();
    await field.press("Escape");
    await page.getByRole("alert").waitFor({ state: "detached" });
  });

  it("of the window are made by moving its edge in the figure, one undo step a move", async () => {
    const edge = page.getByRole("slider", { name: "Low end of the fitted window" });
    const box = (await edge.boundingBox())!;
    const x = box.x + box.width / 2;
    const y = box.y + box.height / 3;
    await page.mouse.move(x, y);
    await page.mouse.down();
    await page.mouse.move(x + 60, y, { steps: 5 });
    await page.mouse.up();
    await page.waitForSelector('.path-stage[data-stage="lines"]:has-text("choices changed")');
    const field = page.getByLabel("Low end of the window in eV");
    const moved = Number(await field.inputValue());
    expect(moved).toBeGreaterThan(2.1405);
    await edge.focus();
    await page.keyboard.press("ArrowRight");
    await page.waitForFunction(
      ([input, before]) => Number((input as HTMLInputElement).value) > (before as number),
      [await field.elementHandle(), moved] as const,
    );
    await page.click('[data-action="undo"]');
    await page.click('[data-action="undo"]');
    await page.waitForSelector('.path-stage[data-stage="lines"]:not(:has-text("choices changed"))');
    expect(watched.troubles).toEqual([]);
  });
});

describe("a running fit", () => {
  it("is cancelled on request, and what was there stays", async () => {
    await page.getByRole("button", { name: "Fit", exact: true }).click();
    await page.locator('.fit-job[data-state="running"]').getByRole("button", { name: "Cancel" }).click();
    await settled(page);
    await page.waitForSelector('.notes-first:has-text("was cancelled")');
    expect(await page.locator(".lines-table tbody tr").count()).toBeGreaterThan(5);
    expect(watched.troubles).toEqual([]);
  });
});

describe("files", () => {
  it("that are no spectrum are refused with file, line and remedy", async () => {
    await dropFiles(page, [{ name: "broken.csv", text: "this is\nno table\nat all\n" }]);
    await page.waitForSelector('.stage-refused[data-state="refused"]');
    const said = await page.locator(".refusal").innerText();
    expect(said).toContain("broken.csv");
    await page.waitForSelector('.path-stage[data-stage="read"][data-state="refused"]');
    await page.click('[data-action="undo"]');
    await page.waitForSelector(
      '.path-stage[data-stage="read"][data-state="done"], .path-stage[data-stage="read"][data-state="doubt"]',
    );
    expect(watched.troubles).toEqual([]);
  });

  it("are chosen in the drawer by keyboard, and Escape gives the focus back", async () => {
    await page.locator(".files-button").focus();
    await page.keyboard.press("Enter");
    await page.waitForSelector(".drawer");
    await page.keyboard.press("Escape");
    await page.waitForSelector(".drawer", { state: "detached" });
    expect(await page.evaluate(() => document.activeElement?.className)).toBe("files-button");
    await page.keyboard.press("Enter");
    await page.locator(".drawer-file").nth(1).click();
    await page.waitForSelector('.path-stage[data-stage="lines"]:has-text("not fitted")');
    await page.waitForSelector('.figure[data-state="drawn"]');
  });

  it("are kept: result, protocol, figure as SVG and PNG", async () => {
    const save = async (item: string): Promise<string> => {
      await page.getByRole("button", { name: "Save" }).click();
      const [download] = await Promise.all([
        page.waitForEvent("download"),
        page.getByRole("menuitem", { name: item }).click(),
      ]);
      const path = join(opened.folder, download.suggestedFilename());
      await download.saveAs(path);
      return path;
    };
    const result = JSON.parse(readFileSync(await save("Result, JSON"), "utf8")) as { schema: string };
    expect(result.schema).toBe("rungline-result/1");
    const protocol = JSON.parse(readFileSync(await save("Protocol, JSON"), "utf8")) as { schema: string };
    expect(protocol.schema).toBe("rungline-protocol/1");
    const svg = readFileSync(await save("Figure, SVG"), "utf8");
    expect(svg).toMatch(/^<svg[\s\S]*Photon energy/);
    // Source: ISO/IEC 15948:2004 (PNG), 5.2: the signature of a file
    expect(Array.from(readFileSync(await save("Figure, PNG")).subarray(0, 4))).toEqual([137, 80, 78, 71]);
    expect(watched.troubles).toEqual([]);
  });
});

describe("a number of the ledger", () => {
  it("opens its card by keyboard and closes it again", async () => {
    await showStage(page, "ladder");
    await page.locator('[data-entry="rydberg"]').focus();
    await page.keyboard.press("Enter");
    await page.getByRole("dialog", { name: "Rydberg energy" }).waitFor();
    await page.getByRole("dialog").getByText("Correlation").waitFor();
    await page.keyboard.press("Escape");
    await page.getByRole("dialog").waitFor({ state: "detached" });
    expect(watched.troubles).toEqual([]);
  });
});

describe("pictures of every stage", () => {
  it.each([
    [1280, 800, "light"],
    [1280, 800, "dark"],
    [1920, 1080, "light"],
    [1920, 1080, "dark"],
  ] as const)("are taken at %i by %i in %s without trouble", async (width, height, colorScheme) => {
    const other = await opened.page({ viewport: { width, height }, colorScheme });
    for (const stage of ["read", "lines", "ladder"] as const) {
      await showStage(other.page, stage);
      const path = join(opened.folder, `${stage}-${width}-${colorScheme}.png`);
      await other.page.screenshot({ path });
      // Derived: an empty picture of this size takes far less
      expect(statSync(path).size).toBeGreaterThan(40_000);
    }
    expect(other.troubles).toEqual([]);
    await other.page.context().close();
  });
});

function findNumber(value: unknown, key: string): number {
  if (typeof value === "object" && value !== null)
    for (const [name, inner] of Object.entries(value)) {
      if (name === key && typeof inner === "number") return inner;
      const found = findNumber(inner, key);
      if (Number.isFinite(found)) return found;
    }
  return Number.NaN;
}
