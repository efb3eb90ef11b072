import type { MenuItemConstructorOptions } from "electron";
import { CRYOGEN_CAUTION, LASER_CAUTION } from "../../app/report/index.ts";

/** What the menu asks of the page; the preload script presses the page's own keys for it. */
export type MenuCommand = "open" | "save" | "undo" | "redo";

export interface MenuActions {
  send(command: MenuCommand): void;
  tell(title: string, text: string): void;
}

/** The native menu as plain data. */
export function menuTemplate(
  facts: { readonly version: string; readonly mac: boolean; readonly devTools: boolean },
  actions: MenuActions,
): MenuItemConstructorOptions[] {
  const command = (label: string, name: MenuCommand, accelerator: string): MenuItemConstructorOptions => ({
    label,
    accelerator,
    // The keys belong to the page, which knows whether a text field is being typed in; the menu only shows them.
    registerAccelerator: false,
    click: () => actions.send(name),
  });
  return [
    ...(facts.mac ? [{ role: "appMenu" } as const] : []),
    {
      label: "&File",
      submenu: [
        command("&Open Spectra…", "open", "CmdOrCtrl+O"),
        command("&Save Result and Protocol…", "save", "CmdOrCtrl+S"),
        { type: "separator" },
        facts.mac ? { role: "close" } : { role: "quit" },
      ],
    },
    {
      label: "&Edit",
      submenu: [
        command("&Undo", "undo", "CmdOrCtrl+Z"),
        command("&Redo", "redo", "CmdOrCtrl+Shift+Z"),
        { type: "separator" },
        { role: "cut" },
        { role: "copy" },
        { role: "paste" },
        { role: "selectAll" },
      ],
    },
    {
      label: "&View",
      submenu: [
        { role: "resetZoom" },
        { role: "zoomIn" },
        { role: "zoomOut" },
        { type: "separator" },
        { role: "togglefullscreen" },
        ...(facts.devTools ? [{ role: "toggleDevTools" } as const] : []),
      ],
    },
    {
      label: "&Help",
      submenu: [
        {
          label: "&Cautions",
          click: () => actions.tell("Cautions", `${LASER_CAUTION}\n\n${CRYOGEN_CAUTION}`),
        },
        { label: "&About Rungline", click: () => actions.tell("Rungline", `Version ${facts.version}`) },
      ],
    },
  ];
}
