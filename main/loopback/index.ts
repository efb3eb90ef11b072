export { openWindow, type WindowOptions } from "./open-window.ts";
export { startDemo } from "./start-demo.ts";
export type { ShellIo } from "./shell-io.ts";
export { serveLoopback, type LoopbackHost, type LoopbackServer } from "./serve.ts";
