export { runCommandLine } from "./run-command-line.ts";
export type { CommandLineIo } from "./command-line-io.ts";
export { EXIT } from "./exit-status.ts";
