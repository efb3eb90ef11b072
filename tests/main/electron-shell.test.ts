import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { runInNewContext } from "node:vm";
import { build } from "esbuild";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { CRYOGEN_CAUTION, LASER_CAUTION } from "../../app/report/index.ts";
import { isPageAddress } from "../../main/electron/page-address.ts";
import { pathsFrom, startElectron } from "../../main/electron/start.ts";
import { makeFakeElectron, type FakeElectron, type FakeMenuItem } from "./electron-fake.ts";

let root: string;
let electron: FakeElectron;
const PAGE = "app://rungline/index.html";

beforeEach(async () => {
  root = mkdtempSync(join(tmpdir(), "rungline-test-"));
  mkdirSync(join(root, "page", "assets"), { recursive: true });
  mkdirSync(join(root, "demo"));
  writeFileSync(
    join(root, "page", "index.html"),
    '<meta property="csp-nonce" nonce="__CSP_NONCE__" /><title>page</title>',
  );
  writeFileSync(join(root, "page", "assets", "main.js"), "export {};");
  writeFileSync(join(root, "demo", "crystal.csv"), "1,2\n");
  writeFileSync(join(root, "outside.txt"), "outside");
  electron = await start(false);
});

afterEach(() => rmSync(root, { recursive: true, force: true }));

async function start(isPackaged: boolean): Promise<FakeElectron> {
  const fake = makeFakeElectron(isPackaged);
  const place = { root, page: join(root, "page"), demo: join(root, "demo"), version: "1.2.3" };
  await startElectron(fake.api, place, [join(root, "demo", "crystal.csv")]);
  return fake;
}

interface Sender {
  readonly sender: object;
  readonly senderFrame: { url: string; parent: object | null } | null;
}

function fromPage(url = PAGE): Sender {
  return { sender: electron.windows[0]!.webContents, senderFrame: { url, parent: null } };
}

function invoke(method: string, sender: Sender, ...sent: unknown[]): Promise<unknown> {
  const handler = electron.handlers.get(`rungline:${method}`) as (...given: unknown[]) => Promise<unknown>;
  return handler(sender, ...sent);
}

const METHODS = ["about", "startFiles", "demoFiles", "demoSeries", "openFiles", "saveFile"];

describe("start", () => {
  it("sets the sandbox and the scheme before the application is ready, the locks before the window", () => {
    expect(electron.calls).toEqual([
      "enableSandbox",
      "registerSchemes",
      "whenReady",
      "handleScheme",
      "new BrowserWindow",
      "loadURL",
    ]);
    expect(Object.keys(electron.session).sort()).toEqual(["check", "device", "load", "request"]);
    expect(electron.schemes).toEqual([
      { scheme: "app", privileges: { standard: true, secure: true, supportFetchAPI: true } },
    ]);
  });

  it("opens one window on the page, isolated and sandboxed, with the preload script", () => {
    expect(electron.windows).toHaveLength(1);
    const { options, loaded } = electron.windows[0]!;
    expect(loaded).toEqual([PAGE]);
    expect(options.webPreferences).toMatchObject({
      preload: join(root, "dist", "main", "preload.cjs"),
      contextIsolation: true,
      sandbox: true,
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      webSecurity: true,
      webviewTag: false,
      navigateOnDragDrop: false,
    });
  });

  it("offers developer tools only where it is not packed", async () => {
    expect(electron.windows[0]!.options.webPreferences["devTools"]).toBe(true);
    const packed = await start(true);
    expect(packed.windows[0]!.options.webPreferences["devTools"]).toBe(false);
    expect(JSON.stringify(packed.menu)).not.toContain("toggleDevTools");
  });

  it("ends with its last window", () => {
    electron.appListeners.get("window-all-closed")!();
    expect(electron.calls.at(-1)).toBe("quit");
  });

  it("takes paths, not switches, from the program's words", () => {
    expect(pathsFrom(["electron", ".", "a.csv", "--inspect", "b.csv"], false)).toEqual(["a.csv", "b.csv"]);
    expect(pathsFrom(["rungline", "a.csv"], true)).toEqual(["a.csv"]);
  });
});

describe("the locks", () => {
  it("no navigation, no new window, no embedded browser", () => {
    const listeners = new Map<string, (event: { preventDefault(): void }) => void>();
    let opening: () => { action: string } = () => ({ action: "allow" });
    const contents = {
      on: (name: string, listener: (event: { preventDefault(): void }) => void) =>
        listeners.set(name, listener),
      setWindowOpenHandler: (handler: () => { action: string }) => (opening = handler),
    };
    const created = electron.appListeners.get("web-contents-created") as (...given: unknown[]) => void;
    created({}, contents);
    for (const name of ["will-navigate", "will-frame-navigate", "will-redirect", "will-attach-webview"]) {
      let prevented = false;
      listeners.get(name)!({ preventDefault: () => (prevented = true) });
      expect(prevented, name).toBe(true);
    }
    expect(opening()).toEqual({ action: "deny" });
  });

  it("no permission is granted", () => {
    let granted: boolean | null = null;
    const { request, check, device } = electron.session as Record<string, (...given: unknown[]) => unknown>;
    request!({}, "media", (answer: boolean) => (granted = answer));
    expect(granted).toBe(false);
    expect(check!()).toBe(false);
    expect(device!()).toBe(false);
  });

  it("nothing is loaded but the page's own files", async () => {
    const mayLoad = (fake: FakeElectron, url: string): boolean => {
      let cancelled: boolean | undefined;
      const load = fake.session["load"] as (...given: unknown[]) => void;
      load({ url }, (answer: { cancel: boolean }) => (cancelled = answer.cancel));
      return cancelled === false;
    };
    for (const own of [
      PAGE,
      "app://rungline/assets/main.js",
      "data:image/png;base64,AA",
      "blob:app://rungline/1",
    ]) {
      expect(mayLoad(electron, own), own).toBe(true);
    }
    for (const foreign of [
      "https://elsewhere.example/",
      "http://127.0.0.1/",
      "file:///etc/hostname",
      "app://elsewhere/",
      "blob:https://elsewhere.example/1",
      "ws://elsewhere.example/",
    ]) {
      expect(mayLoad(electron, foreign), foreign).toBe(false);
    }
    expect(mayLoad(electron, "devtools://devtools/bundled/a.html")).toBe(true);
    expect(mayLoad(await start(true), "devtools://devtools/bundled/a.html")).toBe(false);
  });

  it("an address is the page's own by scheme and host, not by its looks", () => {
    expect(isPageAddress(PAGE)).toBe(true);
    for (const other of [
      "app://rungline.example/",
      "app://user@rungline/",
      "https://rungline/",
      "app:rungline",
      "about:blank",
      "",
    ]) {
      expect(isPageAddress(other), other).toBe(false);
    }
  });
});

describe("the page's protocol", () => {
  const get = (path: string, method = "GET"): Promise<Response> =>
    electron.pages.get("app")!(new Request(`app://rungline${path}`, { method }));

  it("serves the page under the same policy as the loopback shell, with a nonce in policy and page", async () => {
    const answer = await get("/index.html");
    expect(answer.status).toBe(200);
    const nonce = /nonce="([^"]+)"/.exec(await answer.text())![1]!;
    expect(nonce).not.toBe("__CSP_NONCE__");
    const policy = answer.headers.get("content-security-policy");
    expect(policy).toContain("default-src 'none'");
    expect(policy).toContain(`style-src 'self' 'nonce-${nonce}'`);
    expect(answer.headers.get("cross-origin-opener-policy")).toBe("same-origin");
    expect(answer.headers.get("cross-origin-embedder-policy")).toBe("require-corp");
    expect((await get("/assets/main.js")).headers.get("content-type")).toBe("text/javascript; charset=utf-8");
  });

  it("leads nowhere else", async () => {
    for (const path of [
      "/../outside.txt",
      "/..%2foutside.txt",
      "/%2e%2e/outside.txt",
      "/none.js",
      "/assets",
    ]) {
      const answer = await get(path);
      expect(answer.status, path).toBe(404);
      expect(await answer.text(), path).not.toContain("outside");
    }
    expect((await electron.pages.get("app")!(new Request("app://elsewhere/index.html"))).status).toBe(404);
    expect((await get("/index.html", "POST")).status).toBe(405);
  });
});

describe("the host's calls", () => {
  it("answer the page with data", async () => {
    expect([...electron.handlers.keys()].sort()).toEqual(METHODS.map((name) => `rungline:${name}`).sort());
    expect(await invoke("about", fromPage())).toEqual({
      ok: true,
      value: { version: "1.2.3", node: process.version },
    });
    const file = { name: "crystal.csv", bytes: readFileSync(join(root, "demo", "crystal.csv")) };
    expect(await invoke("startFiles", fromPage())).toEqual({
      ok: true,
      value: { files: [file], choices: {} },
    });
    expect(await invoke("demoFiles", fromPage())).toEqual({ ok: true, value: [file] });
    expect(await invoke("demoSeries", fromPage())).toEqual({ ok: true, value: [] });
  });

  it("refuse every sender but the top frame of our own window on our own page", async () => {
    const { sender } = fromPage();
    const strangers: Sender[] = [
      fromPage("https://elsewhere.example/"),
      fromPage("app://elsewhere/index.html"),
      fromPage("file:///index.html"),
      fromPage("about:blank"),
      { sender, senderFrame: null },
      { sender, senderFrame: { url: PAGE, parent: {} } },
      { sender: {}, senderFrame: { url: PAGE, parent: null } },
    ];
    for (const method of METHODS) {
      for (const stranger of strangers) {
        const payload = method === "saveFile" ? ["a.json", new Uint8Array(1)] : [];
        expect(await invoke(method, stranger, ...payload), method).toEqual({
          ok: false,
          message: `${method}: asked for by something that is not the page`,
        });
      }
    }
    expect(electron.dialogs.asked).toEqual([]);
  });

  it("refuse a payload of another form before any dialog opens", async () => {
    const bytes = new Uint8Array(1);
    const wrong: [string, unknown[]][] = [
      ["about", ["surplus"]],
      ["openFiles", ["/etc"]],
      ["saveFile", []],
      ["saveFile", ["a.json"]],
      ["saveFile", ["a.json", "text"]],
      ["saveFile", ["a.json", bytes, "surplus"]],
      ["saveFile", ["", bytes]],
      ["saveFile", ["../a.json", bytes]],
      ["saveFile", ["/etc/a.json", bytes]],
      ["saveFile", ["C:\\a.json", bytes]],
      ["saveFile", ["..", bytes]],
      ["saveFile", ["a\u0000.json", bytes]],
      ["saveFile", ["a".repeat(201), bytes]],
      ["saveFile", [{ toString: () => "a.json" }, bytes]],
    ];
    for (const [method, sent] of wrong) {
      expect(await invoke(method, fromPage(), ...sent), JSON.stringify(sent)).toMatchObject({ ok: false });
    }
    expect(electron.dialogs.asked).toEqual([]);
  });

  it("open the files that the user chose, none when they change their mind", async () => {
    expect(await invoke("openFiles", fromPage())).toEqual({ ok: true, value: [] });
    electron.dialogs.open = { canceled: false, filePaths: [join(root, "outside.txt")] };
    expect(await invoke("openFiles", fromPage())).toEqual({
      ok: true,
      value: [{ name: "outside.txt", bytes: Buffer.from("outside") }],
    });
  });

  it("save under the name that the user chose, whole, and say it; null when they change their mind", async () => {
    const bytes = new TextEncoder().encode("{}");
    expect(await invoke("saveFile", fromPage(), "crystal.json", bytes)).toEqual({ ok: true, value: null });
    expect(electron.dialogs.asked[0]!.options["defaultPath"]).toBe("crystal.json");
    electron.dialogs.save = { canceled: false, filePath: join(root, "kept.json") };
    expect(await invoke("saveFile", fromPage(), "crystal.json", bytes)).toEqual({
      ok: true,
      value: "kept.json",
    });
    expect(readFileSync(join(root, "kept.json"), "utf8")).toBe("{}");
    expect(readdirSync(root).sort()).toEqual(["demo", "kept.json", "outside.txt", "page"]);
  });

  it("tell what went wrong as data", async () => {
    electron.dialogs.open = { canceled: false, filePaths: [join(root, "gone.csv")] };
    const answer = await invoke("openFiles", fromPage());
    expect(answer).toMatchObject({ ok: false });
    expect((answer as { message: string }).message).toContain("gone.csv");
  });
});

describe("the menu", () => {
  const item = (label: string): FakeMenuItem => {
    const all = electron.menu.flatMap((menu) => menu.submenu ?? []);
    return all.find((one) => one.label?.replaceAll("&", "").startsWith(label))!;
  };

  it("opens and saves through the page", () => {
    item("Open Spectra").click!();
    item("Save Result").click!();
    expect(electron.windows[0]!.sent).toEqual([
      ["rungline:command", "open"],
      ["rungline:command", "save"],
    ]);
  });

  it("shows the page's keys and leaves them to the page", () => {
    for (const label of ["Open Spectra", "Save Result", "Undo", "Redo"]) {
      expect(item(label).accelerator, label).toMatch(/^CmdOrCtrl\+/);
      expect(item(label).registerAccelerator, label).toBe(false);
    }
  });

  it("shows the cautions", () => {
    item("Cautions").click!();
    const [asked] = electron.dialogs.asked;
    expect(asked!.options["detail"]).toBe(`${LASER_CAUTION}\n\n${CRYOGEN_CAUTION}`);
  });
});

describe("the preload script", () => {
  type Bridge = Record<string, (...sent: unknown[]) => unknown>;

  /** The script as built for the sandbox, run with nothing but a stand-in for Electron's half of the bridge. */
  async function loadBridge(): Promise<{
    bridge: Bridge;
    exposed: string[];
    pressed: object[];
    emit: (command: unknown) => void;
  }> {
    const { outputFiles } = await build({
      entryPoints: ["main/electron/preload/index.ts"],
      bundle: true,
      platform: "node",
      format: "cjs",
      external: ["electron"],
      write: false,
      logLevel: "silent",
    });
    const exposed: Record<string, Bridge> = {};
    const heard = new Map<string, (...sent: unknown[]) => void>();
    const pressed: object[] = [];
    const press = function (this: object, type: string, init: object): void {
      Object.assign(this, { type, ...init });
    };
    runInNewContext(outputFiles[0]!.text, {
      window: { dispatchEvent: (event: object) => pressed.push({ ...event }) },
      KeyboardEvent: press,
      require: (name: string) => {
        if (name !== "electron") throw new Error(`the sandbox has no ${name}`);
        return {
          contextBridge: { exposeInMainWorld: (key: string, value: Bridge) => (exposed[key] = value) },
          ipcRenderer: {
            invoke: (channel: string, ...sent: unknown[]) => {
              const handler = electron.handlers.get(channel) as (...given: unknown[]) => Promise<unknown>;
              return handler(fromPage(), ...sent);
            },
            on: (channel: string, listener: (...sent: unknown[]) => void) => heard.set(channel, listener),
          },
        };
      },
      Error,
    });
    return {
      bridge: exposed["runglineBridge"]!,
      exposed: Object.keys(exposed),
      pressed,
      emit: (command) => heard.get("rungline:command")!({}, command),
    };
  }

  it("puts one method per host call on the page, and nothing of Electron itself", async () => {
    const { bridge, exposed } = await loadBridge();
    expect(exposed).toEqual(["runglineBridge"]);
    expect(Object.keys(bridge).sort()).toEqual([...METHODS].sort());
  });

  it("reaches a handler of the main process with every method", async () => {
    const { bridge } = await loadBridge();
    expect(await bridge["about"]!()).toEqual({ version: "1.2.3", node: process.version });
    expect(await bridge["demoFiles"]!()).toHaveLength(1);
    expect(await bridge["demoSeries"]!()).toEqual([]);
    expect(await bridge["startFiles"]!()).toMatchObject({ choices: {} });
    expect(await bridge["openFiles"]!()).toEqual([]);
    expect(await bridge["saveFile"]!("a.json", new Uint8Array(1))).toBeNull();
  });

  it("turns a refusal into an error with its message", async () => {
    const { bridge } = await loadBridge();
    await expect(bridge["saveFile"]!("../a.json", new Uint8Array(1))).rejects.toThrow(
      "saveFile: a file name without a folder",
    );
  });

  it("presses the page's own keys for the menu's commands, and for nothing else", async () => {
    const { pressed, emit } = await loadBridge();
    for (const command of ["open", "save", "undo", "redo", "constructor", "other", { not: "a command" }])
      emit(command);
    expect(pressed).toEqual([
      { type: "keydown", key: "o", ctrlKey: true },
      { type: "keydown", key: "s", ctrlKey: true },
      { type: "keydown", key: "z", ctrlKey: true },
      { type: "keydown", key: "z", shiftKey: true, ctrlKey: true },
    ]);
  });
});
