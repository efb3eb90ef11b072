// Single files, not the room's index: what is not needed to start is loaded when a command asks for it.
import { OutputError } from "../services/output-error.ts";
import { makeLaterRunner } from "../services/later-runner.ts";
import { runPowerInThread } from "../services/power-runner.ts";
import { makeThreadRunner } from "../services/thread-runner.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT } from "./exit-status.ts";
import { runCommandLine } from "./run-command-line.ts";

/** The process around the command line: streams, signals, exit status. */
const cancel = new AbortController();
for (const name of ["SIGINT", "SIGTERM"] as const) {
  process.on(name, () => {
    // A second time means now.
    if (cancel.signal.aborted) process.exit(EXIT.cancelled);
    cancel.abort();
  });
}
// A closed pipe is answered where the text is written; nobody is left to read what standard error would say.
process.stdout.on("error", () => undefined);
process.stderr.on("error", () => undefined);

const io: CommandLineIo = {
  stdout: (text) =>
    new Promise((resolve, reject) => {
      process.stdout.write(text, (cause) => {
        if (cause) reject(new OutputError("standard output", cause));
        else resolve();
      });
    }),
  stderr: (text) => void process.stderr.write(text),
  terminal: process.stderr.isTTY ? process.stderr : null,
  interactive: process.stdin.isTTY,
  environment: process.env,
  workingFolder: process.cwd(),
  // One input takes one thread, which starts sooner than a pool.
  makeRunner: (threads = 1) =>
    threads === 1
      ? makeThreadRunner(new URL("./fit-thread.mjs", import.meta.url))
      : makeLaterRunner(threads, async () => {
          const { makePoolRunner } = await import("../services/pool-runner.ts");
          return makePoolRunner(new URL("./fit-pool-thread.mjs", import.meta.url), threads);
        }),
  runPower: runPowerInThread(new URL("./fit-thread.mjs", import.meta.url)),
  now: () => new Date().toISOString(),
};

process.exitCode = await runCommandLine(process.argv.slice(2), io, cancel.signal);
