import type { CommandLineIo } from "./command-line-io.ts";

export interface ProgressDisplay {
  /** A new file: its number (from 1), how many there are, its name. */
  begin(number: number, of: number, file: string): void;
  update(fraction: number, step: string): void;
  /** The file is done; the line stays. */
  end(outcome: string): void;
}

/** A moving bar at a terminal; elsewhere one line a file when it is done. Always on standard error. */
export async function makeProgress(io: CommandLineIo): Promise<ProgressDisplay> {
  const { terminal } = io;
  let label = "";
  const begin = (number: number, of: number, file: string): void => {
    label = of === 1 ? file : `[${number}/${of}] ${file}`;
  };
  const end = (outcome: string): void => io.stderr(`${label}: ${outcome}\n`);
  if (terminal === null) return { begin, update: () => undefined, end };

  const { SingleBar } = (await import("cli-progress")).default;
  let bar: InstanceType<typeof SingleBar> | null = null;
  return {
    begin: (number, of, file) => {
      begin(number, of, file);
      bar = new SingleBar({
        format: `${label.replaceAll("{", "(").replaceAll("}", ")")} [{bar}] {percentage} % {step}`,
        stream: terminal as NodeJS.WritableStream,
        clearOnComplete: true,
        hideCursor: true,
        // Ctrl+C is heard by the program itself, which puts the cursor back by ending the bar.
        gracefulExit: false,
      });
      bar.start(100, 0, { step: "" });
    },
    update: (fraction, step) => bar?.update(Math.round(100 * fraction), { step }),
    end: (outcome) => {
      bar?.stop();
      bar = null;
      end(outcome);
    },
  };
}
