import type { CommandLineIo } from "./command-line-io.ts";

/** A fault of Rungline's own in one line; the stack only for those who ask for it. */
export function sayFault(thrown: unknown, io: CommandLineIo, about?: string): void {
  const where = about === undefined ? "" : `${about}: `;
  const message = thrown instanceof Error ? thrown.message : String(thrown);
  io.stderr(`rungline: ${where}a fault of Rungline: ${message.split("\n")[0] ?? ""}\n`);
  if (io.environment["RUNGLINE_DEBUG"] === "1" && thrown instanceof Error)
    io.stderr(`${thrown.stack ?? ""}\n`);
}
