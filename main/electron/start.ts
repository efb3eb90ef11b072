import { join } from "node:path";
import type { BrowserWindow } from "electron";
import { listPageFiles, type Place } from "../page/index.ts";
import { COMMAND_CHANNEL } from "./answer.ts";
import type { ElectronApi } from "./electron-api.ts";
import { handleHostCalls } from "./host-calls.ts";
import { lockDownContents, lockDownSession } from "./lock-down.ts";
import { menuTemplate } from "./menu.ts";
import { PAGE_ADDRESS } from "./page-address.ts";
import { registerPageScheme, servePage } from "./page-protocol.ts";
import { pageWindowOptions } from "./page-window.ts";

/** The whole life of the application: what must precede readiness first, then locks, protocol, calls, menu, window. */
export async function startElectron(
  electron: ElectronApi,
  place: Place,
  startPaths: readonly string[],
): Promise<void> {
  const { app, protocol } = electron;
  app.enableSandbox();
  registerPageScheme(protocol);
  app.on("web-contents-created", (_event, contents) => lockDownContents(contents));
  app.on("window-all-closed", () => app.quit());
  await app.whenReady();

  const devTools = !app.isPackaged;
  lockDownSession(electron.session.defaultSession, devTools);
  servePage(protocol, await listPageFiles(place.page));
  handleHostCalls(electron, { place, startPaths });

  const window = new electron.BrowserWindow(
    pageWindowOptions(join(place.root, "dist", "main", "preload.cjs"), devTools),
  );
  window.once("ready-to-show", () => window.show());
  electron.Menu.setApplicationMenu(buildMenu(electron, place, window, devTools));
  await window.loadURL(PAGE_ADDRESS);
}

function buildMenu(
  { Menu, dialog }: ElectronApi,
  place: Place,
  window: BrowserWindow,
  devTools: boolean,
): Electron.Menu {
  return Menu.buildFromTemplate(
    menuTemplate(
      { version: place.version, mac: process.platform === "darwin", devTools },
      {
        send: (command) => window.webContents.send(COMMAND_CHANNEL, command),
        tell: (title, text) =>
          void dialog.showMessageBox(window, { type: "info", title, message: title, detail: text }),
      },
    ),
  );
}

/** Paths among the program's words: those after the program (and, unpacked, after the folder it was pointed at). */
export function pathsFrom(words: readonly string[], isPackaged: boolean): readonly string[] {
  return words.slice(isPackaged ? 1 : 2).filter((word) => !word.startsWith("-"));
}
