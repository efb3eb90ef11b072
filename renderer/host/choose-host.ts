import type { Host } from "../../app/tasks/index.ts";
import { electronHost } from "./electron-host.ts";
import { loopbackHost } from "./loopback-host.ts";

/** The shell around the page: Electron where its preload has put the bridge, else the loopback server. */
export function chooseHost(view: Window): Host {
  return view.runglineBridge === undefined ? loopbackHost(view.document) : electronHost(view.runglineBridge);
}
