import { Command, CommanderError, InvalidArgumentError, Option } from "commander";
import type { ShellIo, WindowOptions } from "../loopback/index.ts";
// Single files, not the room's index: what is not needed to start is loaded when a command asks for it.
import { OutputError } from "../services/output-error.ts";
import { programVersion } from "../services/version.ts";
import type { CommandLineIo } from "./command-line-io.ts";
import { EXIT, UsageError } from "./exit-status.ts";
import type { CompareOptions } from "./compare-command.ts";
import type { FitOptions } from "./fit-command.ts";
import type { PowerOptions } from "./power-command.ts";
import { FORMATS } from "./format.ts";
import type { ReportOptions } from "./report-command.ts";
import type { ChoiceOptions } from "./choices.ts";
import { sayFault } from "./say.ts";

/**
 * The command line as a function: arguments (without the program's own name) to an exit status. Results go to
 * standard output, everything else to standard error. Never throws.
 */
export async function runCommandLine(
  argv: readonly string[],
  io: CommandLineIo,
  signal: AbortSignal,
): Promise<number> {
  let status: number = EXIT.done;
  let help = "";
  const program = describeProgram(
    io,
    signal,
    (value) => {
      status = value;
    },
    (text) => {
      help += text;
    },
  );
  try {
    await program.parseAsync([...argv], { from: "user" });
    if (help !== "") await io.stdout(help);
    return status;
  } catch (thrown) {
    if (thrown instanceof CommanderError) {
      if (thrown.exitCode !== 0) return EXIT.usage;
      try {
        await io.stdout(help);
        return EXIT.done;
      } catch {
        return EXIT.output;
      }
    }
    if (thrown instanceof UsageError) {
      io.stderr(`rungline: ${thrown.message}\n`);
      return EXIT.usage;
    }
    if (thrown instanceof OutputError) {
      io.stderr(`rungline: ${thrown.message}\n`);
      return EXIT.output;
    }
    sayFault(thrown, io);
    return EXIT.fault;
  }
}

function describeProgram(
  io: CommandLineIo,
  signal: AbortSignal,
  end: (status: number) => void,
  say: (text: string) => void,
): Command {
  const program = new Command("rungline")
    .description(
      "From absorption or transmission files of a crystal to the gap, Rydberg energy, quantum defect and linewidth law of its exciton series.",
    )
    .version(programVersion(), "--version", "print the version")
    .exitOverride()
    .configureOutput({
      writeOut: say,
      writeErr: (text) => io.stderr(text),
      outputError: (text, write) => write(`rungline: ${text.replace(/^error: /, "")}`),
    })
    .showSuggestionAfterError(true)
    .helpCommand(false)
    .addHelpText(
      "after",
      "\nExit status: 0 done; 1 fault; 2 wrong usage; 3 input unreadable; 4 not converged or no series; 5 output not written; 130 cancelled.\nProgress and notes go to standard error.",
    );

  addChoices(
    program
      .command("inspect")
      .description("what was read: dialect, columns, units, range, noise, what was skipped")
      .argument("<file...>", "spectra, folders of spectra, or patterns with * and ?"),
  ).action(async (files: string[], options: ChoiceOptions) => {
    const { inspectCommand } = await import("./inspect-command.ts");
    end(await inspectCommand(files, options, io, signal));
  });

  addChoices(
    program
      .command("fit")
      .description("spectrum to result")
      .argument("<file...>", "spectra, folders of spectra, or patterns with * and ?"),
  )
    .option("--out <path>", "a file for one input; a folder for several or for a folder")
    .addOption(new Option("--format <format>", "how results are written").choices([...FORMATS]))
    .option("--curves", "write the fitted curves beside each result, for figures and the report")
    .option("--threads <number>", "fits at a time (default: the number of processors)", wholeNumber)
    .action(async (files: string[], options: FitOptions) => {
      const { fitCommand } = await import("./fit-command.ts");
      end(await fitCommand(files, options, io, signal));
    });

  addChoices(
    program
      .command("power")
      .description("power series to saturation and blockade: columns of one file, several files, or a folder")
      .argument("<file...>", "spectra, folders of spectra, or patterns with * and ?"),
  )
    .option(
      "--control <file...>",
      "a second series whose pump makes pairs but none of these excitons: what of the bleaching it shows is no blockade",
    )
    .option("--out <path>", "a file for the result; the ending says the format")
    .addOption(new Option("--format <format>", "how the result is written").choices([...FORMATS]))
    .option(
      "--curves",
      "write the fitted curves of all spectra beside the result, for figures and the report",
    )
    .action(async (files: string[], options: PowerOptions) => {
      const { powerCommand } = await import("./power-command.ts");
      end(await powerCommand(files, options, io, signal));
    });

  program
    .command("compare")
    .description("samples and batches side by side; results of separate runs merge here")
    .argument("<result...>", "results as JSON, reports, or folders of results")
    .option("--reference <batch>", "the batch that the others are compared with", once())
    .option(
      "--against <fact>",
      "trend over a header fact or typed column, such as date or temperature",
      once(),
    )
    .option(
      "--values <file>",
      "typed columns: file or sample first, then facts with their unit; sample and batch too",
      once(),
    )
    .addOption(
      new Option("--errors <kind>", "which errors count (default: total)").choices(["total", "statistical"]),
    )
    .option("--parameters <names>", "what is compared, separated by commas", once())
    .option("--quality <weights>", "weights of a figure of quality: highest_n=1,width_floor=-1", once())
    .option("--power-n <n>", "the line at which power series are compared", wholeNumber)
    .option("--choices <file>", "choices of an earlier comparison, from its JSON or a report", once())
    .option("--out <file>", "a file; the ending says the format")
    .addOption(new Option("--format <format>", "how the comparison is written").choices([...FORMATS]))
    .action(async (results: string[], options: CompareOptions) => {
      const { compareCommand } = await import("./compare-command.ts");
      end(await compareCommand(results, options, io));
    });

  program
    .command("report")
    .description("results to one HTML file that stands alone: figures, tables, notes, methods, protocol")
    .argument("<result...>", "results as JSON, reports, or folders of results")
    .option("--out <file>", "the report; without it, and without the options below, standard output", once())
    .option("--figures <folder>", "each figure alone at the size of print", once())
    .option("--figure-kinds <kinds>", "svg, pdf, png; several are separated by commas (default: svg)", once())
    .option(
      "--figure-width <mm>",
      "mm, or column (85), or page (178); default: each figure its own of these two",
      once(),
    )
    .option("--figure-dpi <dpi>", "dots an inch of PNG: 300 or 600 (default: 600)", once())
    .option("--tables <folder>", "the tables as CSV and LaTeX", once())
    .option("--reference <batch>", "the batch that the others are compared with", once())
    .option("--against <fact>", "trend over a header fact or typed column", once())
    .option("--values <file>", "typed columns, as for compare", once())
    .addOption(
      new Option("--errors <kind>", "which errors count (default: total)").choices(["total", "statistical"]),
    )
    .option("--quality <weights>", "weights of a figure of quality, as for compare", once())
    .option("--power-n <n>", "the line at which power series are compared", wholeNumber)
    .option("--choices <file>", "choices of an earlier comparison, from its JSON or a report", once())
    .action(async (results: string[], options: ReportOptions) => {
      const { reportCommand } = await import("./report-command.ts");
      end(await reportCommand(results, options, io, signal));
    });

  addChoices(
    program
      .command("window")
      .description("open the window; without a path on the demo run")
      .argument("[path...]", "spectra or folders to open"),
  )
    .option("--serve", "only serve it on loopback, print the address with its token, and stay", false)
    .action(async (paths: string[], options: ChoiceOptions & { serve: boolean }) => {
      const { readChoices } = await import("./choices.ts");
      const { choices } = await readChoices(options, io.workingFolder);
      const { openWindow } = await import("../loopback/index.ts");
      const request: WindowOptions = { paths, choices, serve: options.serve };
      end(await openWindow(request, shellIo(io, signal)));
    });

  program
    .command("start")
    .description("open the window on the demo run and print its result")
    .action(async () => {
      const { startDemo } = await import("../loopback/index.ts");
      end(await startDemo(shellIo(io, signal)));
    });

  return program;
}

function addChoices(command: Command): Command {
  return command
    .option(
      "--protocol <file>",
      "the choices that turn a spectrum into a result: a protocol file, or a result or report whose run is to be repeated",
      once(),
    )
    .option("--material <id>", "material preset: starting values only", once())
    .option(
      "--set <key=value>",
      "one choice by its dotted key; may be repeated, later ones win",
      (setting: string, before: readonly string[]) => [...before, setting],
      [],
    );
}

function wholeNumber(text: string): number {
  if (!/^[1-9]\d{0,2}$/.test(text)) throw new InvalidArgumentError("It is a whole number from 1 to 999.");
  return Number(text);
}

/** An option that is given twice is more likely a slip than a wish. */
function once(): (value: string, before: string | undefined) => string {
  return (value, before) => {
    if (before !== undefined && before !== value) throw new InvalidArgumentError("It is given twice.");
    return value;
  };
}

function shellIo(io: CommandLineIo, signal: AbortSignal): ShellIo {
  return {
    // A window whose terminal has gone away goes on.
    out: (text) => void Promise.resolve(io.stdout(text)).catch(() => undefined),
    error: (text) => io.stderr(text),
    environment: io.environment,
    interactive: io.interactive,
    cancel: signal,
  };
}
