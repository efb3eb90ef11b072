import { spawn, type ChildProcess } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { chromium, type Browser, type BrowserContextOptions, type Page } from "playwright-core";
import { findBrowser } from "../../main/loopback/browser.ts";

const ROOT = new URL("../..", import.meta.url).pathname;

/** The program as a user starts it, and a real browser to look at it with. */
export interface Opened {
  readonly browser: Browser;
  /** A page of its own that has waited for the demo to be read, fitted and drawn. */
  page(options?: BrowserContextOptions): Promise<Watched>;
  /** A temporary folder for pictures and downloads. */
  readonly folder: string;
  close(): Promise<void>;
}

/** A page with everything that went wrong in it: errors on the console, uncaught errors, refused by the policy. */
export interface Watched {
  readonly page: Page;
  readonly troubles: string[];
}

export async function openProgram(paths: readonly string[] = []): Promise<Opened> {
  const program = findBrowser(process.env);
  if (program === null) throw new Error("no Chromium-family browser: see tests/run.mjs");
  const folder = mkdtempSync(join(tmpdir(), "rungline-window-test-"));
  const child = spawn(process.execPath, [join(ROOT, "main/rungline.mjs"), "window", "--serve", ...paths], {
    stdio: ["ignore", "pipe", "pipe"],
  });
  const address = await printedAddress(child);
  const browser = await chromium.launch({
    executablePath: program,
    args: [
      ...(process.getuid?.() === 0 ? ["--no-sandbox"] : []),
      "--disable-background-networking",
      "--disable-component-update",
      "--disable-sync",
      "--no-first-run",
      "--disable-quic",
    ],
  });
  // The address lets one browser in once: its cookie is kept for the pages that follow.
  const door = await browser.newContext();
  const first = await door.newPage();
  await first.goto(address);
  const storageState = await door.storageState();
  await door.close();
  return {
    browser,
    folder,
    async page(options = {}) {
      const context = await browser.newContext({
        viewport: { width: 1280, height: 800 },
        acceptDownloads: true,
        ...options,
        storageState,
      });
      const page = await context.newPage();
      const troubles: string[] = [];
      page.on("console", (message) => {
        if (message.type() === "error" || message.type() === "warning")
          troubles.push(`${message.type()}: ${message.text()}`);
      });
      page.on("pageerror", (error) => troubles.push(`uncaught: ${error.message}`));
      await page.addInitScript(() => {
        addEventListener("securitypolicyviolation", (event) =>
          console.error(`policy: ${event.violatedDirective} ${event.blockedURI} ${event.sample}`),
        );
      });
      await page.goto(new URL("/", address).href);
      await settled(page);
      return { page, troubles };
    },
    async close() {
      await browser.close();
      const ended = new Promise((resolve) => child.once("exit", resolve));
      child.kill("SIGTERM");
      await ended;
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

/** Nothing at work, and the figure of the stage drawn. */
export async function settled(page: Page): Promise<void> {
  await page.waitForSelector('.window[data-state="ready"]');
  await page.waitForSelector('.figure[data-state="drawn"]');
}

/** The theme of the system changed, and colours no longer on their way: half way between two themes nothing has contrast. */
export async function changeTheme(page: Page, colorScheme: "light" | "dark"): Promise<void> {
  await page.emulateMedia({ colorScheme });
  await page.waitForSelector(`html[data-theme="${colorScheme}"]`);
  await page.evaluate(async () => {
    await new Promise((drawn) => requestAnimationFrame(() => requestAnimationFrame(drawn)));
    await Promise.allSettled(document.getAnimations().map((one) => one.finished));
  });
}

export async function showStage(
  page: Page,
  stage: "read" | "lines" | "ladder" | "power" | "batches",
): Promise<void> {
  await page.click(`.path-stage[data-stage="${stage}"]`);
  await page.waitForSelector(`.stage[data-stage="${stage}"] .figure[data-state="drawn"]`);
}

/** Files as if dragged from a folder onto the window. */
export async function dropFiles(
  page: Page,
  files: readonly { readonly name: string; readonly text: string }[],
): Promise<void> {
  const transfer = await page.evaluateHandle((list) => {
    const data = new DataTransfer();
    for (const { name, text } of list) data.items.add(new File([text], name));
    return data;
  }, files);
  await page.dispatchEvent(".window", "drop", { dataTransfer: transfer });
}

function printedAddress(child: ChildProcess): Promise<string> {
  return new Promise((resolve, reject) => {
    let out = "";
    let said = "";
    child.stdout!.on("data", (chunk: Buffer) => {
      out += chunk.toString();
      const match = /http:\/\/127\.0\.0\.1:\d+\/\?token=\S+/.exec(out);
      if (match !== null) resolve(match[0]);
    });
    child.stderr!.on("data", (chunk: Buffer) => (said += chunk.toString()));
    child.once("exit", (code) => reject(new Error(`the program ended with ${code}: ${said}`)));
  });
}
