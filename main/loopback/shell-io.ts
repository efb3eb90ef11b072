/** What the loopback shell needs of the process around it; the command line hands it in, so that tests can too. */
export interface ShellIo {
  /** Text for standard output and standard error, line ends included. */
  out(text: string): void;
  error(text: string): void;
  readonly environment: Readonly<Record<string, string | undefined>>;
  /** Whether someone sits at standard input. */
  readonly interactive: boolean;
  /** Fires on SIGINT and SIGTERM. */
  readonly cancel: AbortSignal;
}
