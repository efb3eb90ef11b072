import { spawn } from "node:child_process";
import { accessSync, constants, rmSync } from "node:fs";
import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { delimiter, join } from "node:path";

type Environment = Readonly<Record<string, string | undefined>>;

/** Whether a window could be shown at all: on Linux that needs a display server, elsewhere there is always one. */
export function hasDisplay(environment: Environment, platform: string = process.platform): boolean {
  if (platform === "win32" || platform === "darwin") return true;
  return Boolean(environment["DISPLAY"]) || Boolean(environment["WAYLAND_DISPLAY"]);
}

const PATH_NAMES = [
  "chromium",
  "chromium-browser",
  "google-chrome",
  "google-chrome-stable",
  "microsoft-edge",
  "microsoft-edge-stable",
  "brave-browser",
  "vivaldi",
];

const MAC_BUNDLES = ["Chromium", "Google Chrome", "Microsoft Edge", "Brave Browser", "Vivaldi"];

const WINDOWS_PATHS = [
  "Chromium\\Application\\chrome.exe",
  "Google\\Chrome\\Application\\chrome.exe",
  "Microsoft\\Edge\\Application\\msedge.exe",
];

/** An installed Chromium-family browser, `RUNGLINE_BROWSER` first; null where there is none. */
export function findBrowser(
  environment: Environment,
  platform: string = process.platform,
  isProgram: (path: string) => boolean = canRun,
): string | null {
  const candidates: string[] = [];
  const wanted = environment["RUNGLINE_BROWSER"];
  if (wanted) candidates.push(wanted);
  if (platform === "darwin") {
    for (const name of MAC_BUNDLES) candidates.push(`/Applications/${name}.app/Contents/MacOS/${name}`);
  } else if (platform === "win32") {
    for (const base of ["ProgramFiles", "ProgramFiles(x86)", "LOCALAPPDATA"]) {
      const folder = environment[base];
      if (folder) for (const path of WINDOWS_PATHS) candidates.push(`${folder}\\${path}`);
    }
  } else {
    const folders = (environment["PATH"] ?? "").split(delimiter).filter((folder) => folder !== "");
    for (const name of PATH_NAMES) for (const folder of folders) candidates.push(join(folder, name));
  }
  return candidates.find(isProgram) ?? null;
}

function canRun(path: string): boolean {
  try {
    accessSync(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

/** Flags for a window of its own with an empty profile, kept off the network. */
export function browserFlags(address: string, profile: string, isRoot: boolean): readonly string[] {
  return [
    `--app=${address}`,
    `--user-data-dir=${profile}`,
    "--window-size=1280,800",
    "--no-first-run",
    "--no-default-browser-check",
    "--disable-background-networking",
    "--disable-background-mode",
    "--disable-component-update",
    "--disable-sync",
    "--disable-quic",
    // Chromium refuses to start its sandbox as root; nobody else is asked to go without.
    ...(isRoot ? ["--no-sandbox"] : []),
  ];
}

export interface BrowserWindow {
  /** Exit code once the window is closed; null where a signal ended it or it did not start. */
  readonly closed: Promise<number | null>;
  close(): void;
}

export async function openBrowser(program: string, address: string): Promise<BrowserWindow> {
  const profile = await mkdtemp(join(tmpdir(), "rungline-window-"));
  const isRoot = process.getuid?.() === 0;
  const child = spawn(program, browserFlags(address, profile, isRoot), { stdio: "ignore" });
  const ended = new Promise<number | null>((resolve) => {
    child.once("error", () => resolve(null));
    child.once("exit", (code) => resolve(code));
  });
  // An end at once (a second Ctrl+C; npm hands the first one on as well) must leave neither window nor profile behind.
  const onExit = (): void => {
    child.kill("SIGKILL");
    rmSync(profile, { recursive: true, force: true, maxRetries: 10, retryDelay: 50 });
  };
  process.once("exit", onExit);
  const closed = ended.then(async (code) => {
    process.off("exit", onExit);
    // A browser's helpers may still be writing for a moment; a profile left behind would be worse than a short wait.
    await rm(profile, { recursive: true, force: true, maxRetries: 10, retryDelay: 100 }).catch(
      () => undefined,
    );
    return code;
  });
  return { closed, close: () => child.kill("SIGTERM") };
}
