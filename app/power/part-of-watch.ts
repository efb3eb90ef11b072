import type { Watch } from "../base/index.ts";

/** A watch whose whole is the part from..to of another's. */
export function partOfWatch(watch: Watch, from: number, to: number): Watch {
  return {
    ...watch,
    report: (fraction, step) => watch.report(from + (to - from) * Math.min(1, Math.max(0, fraction)), step),
  };
}
