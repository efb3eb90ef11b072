import { normalQuantile } from "../solve/index.ts";

/** Factor that turns a standard error into the half width of an interval at this level. */
export function intervalFactor(level: number): number {
  return normalQuantile(0.5 + level / 2);
}
