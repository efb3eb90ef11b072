import type { BrowserWindowConstructorOptions } from "electron";

/** A window whose page has no Node, no reach into this process but the preload script's bridge, and a sandbox. */
export function pageWindowOptions(preload: string, devTools: boolean): BrowserWindowConstructorOptions {
  return {
    title: "Rungline",
    width: 1280,
    height: 800,
    minWidth: 960,
    minHeight: 600,
    show: false,
    webPreferences: {
      preload,
      contextIsolation: true,
      sandbox: true,
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      webSecurity: true,
      webviewTag: false,
      navigateOnDragDrop: false,
      // The spelling checker would fetch dictionaries.
      spellcheck: false,
      devTools,
    },
  };
}
