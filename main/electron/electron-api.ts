import type * as Electron from "electron";

/**
 * The part of Electron that this shell uses. It is handed in, never imported by the logic, so that tests can drive
 * the same code with a recorded stand-in where Electron's program cannot be had.
 */
export type ElectronApi = Pick<
  typeof Electron,
  "app" | "BrowserWindow" | "Menu" | "dialog" | "ipcMain" | "protocol" | "session"
>;
