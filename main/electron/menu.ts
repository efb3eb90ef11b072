import type { MenuItemConstructorOptions } from "electron";
import { CRYOGEN_CAUTION, LASER_CAUTION } from "../../app/report/index.ts";

/** What the menu asks of the page; the page's own controls do the same. */
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
  const command = (label: string, name: MenuCommand, accelerator?: string): MenuItemConstructorOptions => ({
    label,
    ...(accelerator !== undefined && { accelerator }),
    click: () => actions.send(name),
  });
  // The page has its own undo, and text fields have theirs: the keys stay with the page, the menu only shows them.
  const shownOnly = { registerAccelerator: false };
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
        { ...command("&Undo", "undo", "CmdOrCtrl+Z"), ...shownOnly },
        { ...command("&Redo", "redo", "CmdOrCtrl+Shift+Z"), ...shownOnly },
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
