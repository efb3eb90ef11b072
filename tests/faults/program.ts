import { spawn, type ChildProcess, type StdioOptions } from "node:child_process";
import { fileURLToPath } from "node:url";

export const PROGRAM = fileURLToPath(new URL("../../main/rungline.mjs", import.meta.url));
export const DEMO_FILE = fileURLToPath(
  new URL("../../fixtures/demo/TH-A1_transmission.csv", import.meta.url),
);

/** Far above what any run here takes; below the limit of a test. */
const PATIENCE_MS = 50_000;

export interface Ended {
  readonly status: number | null;
  readonly signal: NodeJS.Signals | null;
  readonly out: string;
  readonly error: string;
}

/** The real program in a process of its own; `meet` may send it signals or close its streams. */
export function runProgram(
  argv: readonly string[],
  options: { cwd?: string; stdio?: StdioOptions; meet?: (child: ChildProcess) => void } = {},
): Promise<Ended> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [PROGRAM, ...argv], {
      cwd: options.cwd,
      stdio: options.stdio ?? ["ignore", "pipe", "pipe"],
    });
    let out = "";
    let error = "";
    child.stdout?.setEncoding("utf8").on("data", (text: string) => {
      out += text;
    });
    child.stderr?.setEncoding("utf8").on("data", (text: string) => {
      error += text;
    });
    options.meet?.(child);
    // A program that hangs fails its test and does not outlive it.
    const timer = setTimeout(() => child.kill("SIGKILL"), PATIENCE_MS);
    child.once("error", reject);
    child.once("close", (status, signal) => {
      clearTimeout(timer);
      resolve({ status, signal, out, error });
    });
  });
}

/** Without the words about building, which come only where dist was not up to date. */
export function withoutBuild(error: string): string {
  return error.replace(/^rungline: (building|built) .*\n/gm, "");
}
