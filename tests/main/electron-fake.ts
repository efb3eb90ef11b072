import type { ElectronApi } from "../../main/electron/electron-api.ts";

type Listener = (...given: never[]) => unknown;

/** A recorded stand-in for Electron: what the shell registers is kept, so that a test can call it as Electron would. */
export interface FakeElectron {
  readonly api: ElectronApi;
  /** Every call in order, by name. */
  readonly calls: string[];
  readonly handlers: Map<string, Listener>;
  readonly appListeners: Map<string, Listener>;
  readonly windows: FakeWindow[];
  readonly session: Record<string, Listener>;
  readonly schemes: unknown[];
  readonly pages: Map<string, (request: Request) => Promise<Response>>;
  readonly dialogs: {
    open: object;
    save: object;
    asked: { kind: string; options: Record<string, unknown> }[];
  };
  menu: FakeMenuItem[];
}

export interface FakeMenuItem {
  readonly label?: string;
  readonly role?: string;
  readonly submenu?: FakeMenuItem[];
  readonly click?: () => void;
  readonly accelerator?: string;
  readonly registerAccelerator?: boolean;
}

export interface FakeWindow {
  readonly options: { webPreferences: Record<string, unknown> } & Record<string, unknown>;
  readonly loaded: string[];
  readonly sent: unknown[][];
  readonly webContents: object;
}

export function makeFakeElectron(isPackaged: boolean): FakeElectron {
  const calls: string[] = [];
  const handlers = new Map<string, Listener>();
  const appListeners = new Map<string, Listener>();
  const windows: FakeWindow[] = [];
  const session: Record<string, Listener> = {};
  const schemes: unknown[] = [];
  const pages = new Map<string, (request: Request) => Promise<Response>>();
  const dialogs: FakeElectron["dialogs"] = {
    open: { canceled: true, filePaths: [] },
    save: { canceled: true, filePath: "" },
    asked: [],
  };
  const ask = (kind: string, answer: () => object) => {
    return async (_owner: unknown, options: Record<string, unknown>) => {
      dialogs.asked.push({ kind, options });
      return answer();
    };
  };

  class Window implements FakeWindow {
    readonly loaded: string[] = [];
    readonly sent: unknown[][] = [];
    readonly webContents = { send: (...words: unknown[]): void => void this.sent.push(words) };
    readonly options: FakeWindow["options"];

    constructor(options: FakeWindow["options"]) {
      calls.push("new BrowserWindow");
      this.options = options;
      windows.push(this);
    }
    static fromWebContents(contents: object): Window | null {
      return (windows.find((one) => one.webContents === contents) as Window | undefined) ?? null;
    }
    once(): void {}
    show(): void {}
    async loadURL(address: string): Promise<void> {
      calls.push("loadURL");
      this.loaded.push(address);
    }
  }

  const fake: FakeElectron = {
    calls,
    handlers,
    appListeners,
    windows,
    session,
    schemes,
    pages,
    dialogs,
    menu: [],
    api: {
      app: {
        isPackaged,
        enableSandbox: () => calls.push("enableSandbox"),
        whenReady: async () => void calls.push("whenReady"),
        on: (name: string, listener: Listener) => appListeners.set(name, listener),
        quit: () => calls.push("quit"),
      },
      BrowserWindow: Window,
      Menu: {
        buildFromTemplate: (template: FakeMenuItem[]) => template,
        setApplicationMenu: (menu: FakeMenuItem[]) => void (fake.menu = menu),
      },
      dialog: {
        showOpenDialog: ask("open", () => dialogs.open),
        showSaveDialog: ask("save", () => dialogs.save),
        showMessageBox: ask("message", () => ({})),
      },
      ipcMain: { handle: (channel: string, handler: Listener) => handlers.set(channel, handler) },
      protocol: {
        registerSchemesAsPrivileged: (list: unknown[]) => {
          calls.push("registerSchemes");
          schemes.push(...list);
        },
        handle: (scheme: string, answer: (request: Request) => Promise<Response>) => {
          calls.push("handleScheme");
          pages.set(scheme, answer);
        },
      },
      session: {
        defaultSession: {
          setPermissionRequestHandler: (handler: Listener) => (session["request"] = handler),
          setPermissionCheckHandler: (handler: Listener) => (session["check"] = handler),
          setDevicePermissionHandler: (handler: Listener) => (session["device"] = handler),
          webRequest: { onBeforeRequest: (handler: Listener) => (session["load"] = handler) },
        },
      },
    } as unknown as ElectronApi,
  };
  return fake;
}
