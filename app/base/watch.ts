/** How long work tells where it is and hears that it should stop. Shells supply it; the default does nothing. */
export interface Watch {
  /** fraction 0..1 of the whole, and the step in plain words. */
  report(fraction: number, step: string): void;
  cancelled(): boolean;
  /** Wall time in seconds from any fixed origin, for the `run.seconds` of a result only; 0 where none is supplied. */
  seconds(): number;
}

export const NO_WATCH: Watch = { report: () => undefined, cancelled: () => false, seconds: () => 0 };

/** Thrown inside the science when the watch says so, caught where a task begins. */
export class Cancelled extends Error {
  constructor() {
    super("cancelled");
    this.name = "Cancelled";
  }
}

export function stopIfCancelled(watch: Watch): void {
  if (watch.cancelled()) throw new Cancelled();
}

/** A watch whose whole is the part from..to of another's. */
export function partOfWatch(watch: Watch, from: number, to: number): Watch {
  return {
    ...watch,
    report: (fraction, step) => watch.report(from + (to - from) * Math.min(1, Math.max(0, fraction)), step),
  };
}
