import { spawn } from "node:child_process";
import { join } from "node:path";
import { findPlace, type Place } from "../page/index.ts";
import { hasDisplay, type BrowserWindow } from "./browser.ts";
import { demoFit } from "./demo-fit.ts";
import { findElectron } from "./electron-program.ts";
import { openIfPossible, startServer, untilCancelled, untilClosed, WHY_ADDRESS } from "./open-window.ts";
import type { LoopbackServer } from "./serve.ts";
import type { ShellIo } from "./shell-io.ts";

/**
 * `npm start`: opens the window on the demo run, says where it is, and prints the demo's result, so that a machine
 * without a display shows the main job too. Nothing is ever downloaded.
 */
export async function startDemo(io: ShellIo, place: Place = findPlace()): Promise<number> {
  const electron = electronFor(place, io);
  if (electron !== null) {
    io.out("Window: Electron\n\n");
    const window = openElectron(electron, place);
    await printDemo(place, io);
    await Promise.race([window.closed, untilCancelled(io.cancel)]);
    window.close();
    await window.closed;
    return 0;
  }
  const server = await startServer(place, [], {}, io);
  if (server === null) return 1;
  try {
    return await demoOnLoopback(place, server, io);
  } finally {
    await server.close();
  }
}

async function demoOnLoopback(place: Place, server: LoopbackServer, io: ShellIo): Promise<number> {
  const browser = await openIfPossible(server, io);
  if (browser !== null) {
    io.out(`Window: a browser window of its own, served from http://127.0.0.1:${server.port}/\n\n`);
    await printDemo(place, io);
    await untilClosed(browser, server, io);
    return 0;
  }
  io.out(`Window: ${server.issueAddress()}\n`);
  io.error(`${WHY_ADDRESS}\n`);
  io.out("\n");
  const status = await printDemo(place, io);
  if (!io.interactive) {
    io.error(
      "\nStandard input is no terminal, so this ends here: `npx rungline window --serve` keeps the window open.\n",
    );
    return status;
  }
  io.error("\nThe address above works until Ctrl+C, for one browser.\n");
  await untilCancelled(io.cancel);
  return 0;
}

/** Electron is used where it can work: binary there, display there, and not root (its sandbox refuses root). */
function electronFor(place: Place, io: ShellIo): string | null {
  if (!hasDisplay(io.environment) || process.getuid?.() === 0) return null;
  return findElectron(place.root);
}

function openElectron(program: string, place: Place): BrowserWindow {
  const child = spawn(program, [place.root], { stdio: "ignore" });
  const onExit = (): void => void child.kill("SIGTERM");
  process.once("exit", onExit);
  const closed = new Promise<number | null>((resolve) => {
    child.once("error", () => resolve(null));
    child.once("exit", (code) => resolve(code));
  });
  void closed.then(() => process.off("exit", onExit));
  return { closed, close: () => child.kill("SIGTERM") };
}

/** The demo's result through the command line in a process of its own, so that the window is served meanwhile. */
async function printDemo(place: Place, io: ShellIo): Promise<number> {
  const words = await demoFit(place);
  if (words === null) {
    io.error(`rungline: no demo spectra in ${place.demo}\n`);
    return 3;
  }
  io.out(`$ npx rungline ${words.join(" ")}\n\n`);
  return new Promise((resolve) => {
    const child = spawn(process.execPath, [join(place.root, "main", "rungline.mjs"), ...words], {
      cwd: place.root,
      stdio: ["ignore", "pipe", "pipe"],
    });
    child.stdout.setEncoding("utf8").on("data", (text: string) => io.out(text));
    child.stderr.setEncoding("utf8").on("data", (text: string) => io.error(text));
    const stop = (): void => void child.kill("SIGTERM");
    io.cancel.addEventListener("abort", stop, { once: true });
    process.once("exit", stop);
    child.once("error", () => resolve(1));
    child.once("close", (code) => {
      io.cancel.removeEventListener("abort", stop);
      process.off("exit", stop);
      resolve(code ?? (io.cancel.aborted ? 130 : 1));
    });
  });
}
