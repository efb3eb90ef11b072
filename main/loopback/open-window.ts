import { stat } from "node:fs/promises";
import { findPlace, listPageFiles, readDemoSeries, readNamedFiles, type Place } from "../page/index.ts";
import { findBrowser, hasDisplay, openBrowser, type BrowserWindow } from "./browser.ts";
import { serveLoopback, type LoopbackServer } from "./serve.ts";
import type { ShellIo } from "./shell-io.ts";

export interface WindowOptions {
  /** Files and folders to open; none opens the demo run. */
  readonly paths: readonly string[];
  /** Protocol choices as written; `{}` where none were. */
  readonly choices: unknown;
  /** Only serve, print the address and stay. */
  readonly serve: boolean;
}

/** `rungline window`: the page on loopback, in an installed browser's own window or at a printed address. */
export async function openWindow(
  options: WindowOptions,
  io: ShellIo,
  place: Place = findPlace(),
): Promise<number> {
  for (const path of options.paths) {
    if (!(await exists(path))) {
      io.error(`rungline: ${path}: no such file or folder\n`);
      return 3;
    }
  }
  const server = await startServer(place, options.paths, options.choices, io);
  if (server === null) return 1;
  try {
    const browser = options.serve ? null : await openIfPossible(server, io);
    if (browser === null) {
      io.out(`${server.issueAddress()}\n`);
      if (!options.serve) io.error(`${WHY_ADDRESS}\n`);
      io.error("Rungline serves its window at this address, to one browser, until Ctrl+C.\n");
      await untilCancelled(io.cancel);
      return 0;
    }
    await untilClosed(browser, server, io);
    return 0;
  } finally {
    await server.close();
  }
}

export const WHY_ADDRESS =
  "No display is set or no Chromium-family browser was found (RUNGLINE_BROWSER may name one): open the address yourself.";

export async function startServer(
  place: Place,
  paths: readonly string[],
  choices: unknown,
  io: ShellIo,
): Promise<LoopbackServer | null> {
  if (!(await exists(place.page))) {
    io.error(`rungline: the window is not built (${place.page} is missing): run \`npm run build\`\n`);
    return null;
  }
  return serveLoopback(await listPageFiles(place.page), {
    facts: { version: place.version, node: process.version },
    startFiles: async () => ({ files: await readNamedFiles(paths), choices }),
    demoFiles: () => readNamedFiles([place.demo]),
    demoSeries: () => readDemoSeries(place),
  });
}

/** A browser window on the page where there is a display and a browser; null otherwise. */
export async function openIfPossible(server: LoopbackServer, io: ShellIo): Promise<BrowserWindow | null> {
  if (!hasDisplay(io.environment)) return null;
  const program = findBrowser(io.environment);
  return program === null ? null : openBrowser(program, server.issueAddress());
}

/**
 * Until the window is closed, or the user ends the program from the terminal. A browser that ends without having
 * fetched the page did not open a window: then the address is printed and the server stays.
 */
export async function untilClosed(
  browser: BrowserWindow,
  server: LoopbackServer,
  io: ShellIo,
): Promise<void> {
  const cancelled = untilCancelled(io.cancel);
  await Promise.race([browser.closed, cancelled]);
  browser.close();
  await browser.closed;
  if (server.entered() || io.cancel.aborted) return;
  io.error("The browser ended before it showed the window: open this address yourself, Ctrl+C ends.\n");
  io.out(`${server.issueAddress()}\n`);
  await cancelled;
}

export function untilCancelled(signal: AbortSignal): Promise<void> {
  return new Promise((resolve) => {
    if (signal.aborted) resolve();
    else signal.addEventListener("abort", () => resolve(), { once: true });
  });
}

export async function exists(path: string): Promise<boolean> {
  return stat(path).then(
    () => true,
    () => false,
  );
}
