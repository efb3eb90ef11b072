import { contextBridge, ipcRenderer } from "electron";
import type { Host } from "../../../app/tasks/index.ts";

/**
 * The only thing that the page sees of this process: one method per host call. Main
 * answers with data in either case; a refusal becomes an error here, on the page's side of the bridge, where its
 * message is all that is needed.
 */
type HostMethod = Exclude<keyof Host, "shell">;
type Answer =
  { readonly ok: true; readonly value: unknown } | { readonly ok: false; readonly message: string };

async function call<M extends HostMethod>(method: M, ...sent: Parameters<Host[M]>): Promise<never> {
  const answer = (await ipcRenderer.invoke(`rungline:${method}`, ...sent)) as Answer;
  if (!answer.ok) throw new Error(answer.message);
  return answer.value as never;
}

const bridge: Omit<Host, "shell"> = {
  about: () => call("about"),
  startFiles: () => call("startFiles"),
  demoFiles: () => call("demoFiles"),
  demoSeries: () => call("demoSeries"),
  openFiles: () => call("openFiles"),
  saveFile: (suggestedName, bytes) => call("saveFile", suggestedName, bytes),
};

contextBridge.exposeInMainWorld("runglineBridge", bridge);

/** The native menu presses the page's own keys, so that page and menu can never do different things. */
const KEYS: Readonly<Record<string, KeyboardEventInit>> = {
  open: { key: "o" },
  save: { key: "s" },
  undo: { key: "z" },
  redo: { key: "z", shiftKey: true },
};

ipcRenderer.on("rungline:command", (_event, command: unknown) => {
  const keys = typeof command === "string" && Object.hasOwn(KEYS, command) ? KEYS[command] : undefined;
  if (keys !== undefined) window.dispatchEvent(new KeyboardEvent("keydown", { ...keys, ctrlKey: true }));
});
