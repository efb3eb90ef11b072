import type { FitRunner, RunPower } from "../services/index.ts";

/** What the command line needs of the process around it; tests hand in their own. */
export interface CommandLineIo {
  /** Results. The promise is kept once the text has left, and broken when it cannot. */
  stdout(text: string): void | Promise<void>;
  /** Progress, notes and errors. */
  stderr(text: string): void;
  /** The terminal at standard error, for a moving bar; null where there is none. */
  readonly terminal: NodeJS.WritableStream | null;
  /** Whether someone sits at standard input. */
  readonly interactive: boolean;
  readonly environment: Readonly<Record<string, string | undefined>>;
  /** Relative paths are meant from here. */
  readonly workingFolder: string;
  /** `threads`: how many fits run at a time; 1 where it is not said. */
  makeRunner(threads?: number): FitRunner;
  /** A power series; in this thread where it is not said. */
  readonly runPower?: RunPower;
  /** The moment a run began, ISO 8601, for the provenance of a result. */
  now(): string;
}
