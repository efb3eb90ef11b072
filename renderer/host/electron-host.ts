import type { Host } from "../../app/tasks/index.ts";

/** What the preload script puts on the page: one method per message, plain data both ways. */
export type Bridge = Omit<Host, "shell">;

declare global {
  interface Window {
    readonly runglineBridge?: Bridge;
  }
}

export function electronHost(bridge: Bridge): Host {
  return {
    shell: "electron",
    about: () => bridge.about(),
    startFiles: () => bridge.startFiles(),
    demoFiles: () => bridge.demoFiles(),
    demoSeries: () => bridge.demoSeries(),
    openFiles: () => bridge.openFiles(),
    saveFile: (name, bytes) => bridge.saveFile(name, bytes),
  };
}
