import type { CommandLineIo } from "./command-line-io.ts";
import { remainingInWords } from "./remaining-time.ts";

export interface ProgressDisplay {
  /** A fit of one file begins (files whose result is kept need not say so). */
  begin(file: number): void;
  update(file: number, fraction: number, step: string): void;
  /** A file is done; its line stays, with `more` below it. `fitted`: it took a fit, not only a look. */
  end(file: number, outcome: string, fitted: boolean, more?: string): void;
  close(): void;
}

/** Lines that tell the remaining time where there is no terminal come at every tenth of at least this many files. */
const FEWEST_FOR_TENTHS = 20;

/**
 * A moving bar over all files at a terminal, with the remaining time; elsewhere one line a file when it is done.
 * Always on standard error. `seconds`: a clock from any origin.
 */
export async function makeProgress(
  io: CommandLineIo,
  files: readonly string[],
  seconds: () => number = () => performance.now() / 1000,
): Promise<ProgressDisplay> {
  const { terminal } = io;
  const of = files.length;
  const label = (file: number): string => (of === 1 ? files[0]! : `[${file + 1}/${of}] ${files[file]!}`);
  const under = new Map<number, { fraction: number; step: string }>();
  let done = 0;
  let fitted = 0;
  let began: number | null = null;
  const left = (): number | null => {
    const work = fitted + [...under.values()].reduce((sum, { fraction }) => sum + fraction, 0);
    // Below a twentieth of one file the rate is a guess from nothing.
    if (began === null || work < 0.05) return null;
    const missing = of - done - [...under.values()].reduce((sum, { fraction }) => sum + fraction, 0);
    return ((seconds() - began) * missing) / work;
  };

  let bar: { update(at: number, words: object): void; stop(): void } | null = null;
  if (terminal !== null) {
    const { SingleBar } = (await import("cli-progress")).default;
    const start = (): typeof bar => {
      const one = new SingleBar({
        format: "{label} [{bar}] {percentage} % {step}{left}",
        stream: terminal,
        clearOnComplete: true,
        hideCursor: true,
        // Ctrl+C is heard by the program itself, which puts the cursor back by ending the bar.
        gracefulExit: false,
      });
      one.start(100, 0, { label: "", step: "", left: "" });
      return one;
    };
    const draw = (): void => {
      if (done === of) return;
      bar ??= start();
      const part = [...under.values()].reduce((sum, { fraction }) => sum + fraction, 0);
      const newest = [...under.entries()].at(-1);
      const seconds_left = left();
      bar?.update(Math.floor((100 * (done + part)) / of), {
        label: of === 1 ? files[0]! : `${done} of ${of}`,
        step:
          newest === undefined ? "" : of === 1 ? newest[1].step : `${files[newest[0]]!}: ${newest[1].step}`,
        left: of === 1 || seconds_left === null ? "" : `, ${remainingInWords(seconds_left)} left`,
      });
    };
    const clear = (): void => {
      bar?.stop();
      bar = null;
    };
    return makeDisplay(draw, clear);
  }
  return makeDisplay(
    () => undefined,
    () => undefined,
  );

  function makeDisplay(draw: () => void, clear: () => void): ProgressDisplay {
    let tenths = 0;
    return {
      begin: (file) => {
        began ??= seconds();
        under.set(file, { fraction: 0, step: "" });
        draw();
      },
      update: (file, fraction, step) => {
        // The one that moved last is shown.
        if (!under.delete(file)) return;
        under.set(file, { fraction, step });
        draw();
      },
      end: (file, outcome, wasFitted, more = "") => {
        under.delete(file);
        done++;
        if (wasFitted) fitted++;
        clear();
        io.stderr(`${label(file)}: ${outcome}\n${more}`);
        const time = left();
        const now = Math.floor((10 * done) / of);
        if (terminal === null && of >= FEWEST_FOR_TENTHS && now > tenths && done < of && time !== null) {
          tenths = now;
          io.stderr(`${done} of ${of} files done, ${remainingInWords(time)} left\n`);
        }
        draw();
      },
      close: clear,
    };
  }
}
