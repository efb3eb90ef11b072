import { contextBridge, ipcRenderer } from "electron";
import type { Host } from "../../../app/tasks/index.ts";

/**
 * The only thing that the page sees of this process: one method per host call, and the native menu's commands. Main
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

interface Bridge extends Omit<Host, "shell"> {
  /** Calls `listener` with each command of the native menu; returns how to stop. */
  onCommand(listener: (command: string) => void): () => void;
}

const bridge: Bridge = {
  about: () => call("about"),
  startFiles: () => call("startFiles"),
  demoFiles: () => call("demoFiles"),
  openFiles: () => call("openFiles"),
  saveFile: (suggestedName, bytes) => call("saveFile", suggestedName, bytes),
  onCommand(listener) {
    const hear = (_event: unknown, command: unknown): void => {
      if (typeof command === "string") listener(command);
    };
    ipcRenderer.on("rungline:command", hear);
    return () => void ipcRenderer.off("rungline:command", hear);
  },
};

contextBridge.exposeInMainWorld("runglineBridge", bridge);
