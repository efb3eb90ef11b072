/** What the process tells its caller; with several files the highest counts. */
export const EXIT = {
  done: 0,
  fault: 1,
  usage: 2,
  input: 3,
  fit: 4,
  output: 5,
  cancelled: 130,
} as const;

/** The user asked for something that cannot be: told in one line, with the remedy. */
export class UsageError extends Error {
  constructor(message: string) {
    super(message);
    this.name = "UsageError";
  }
}
