import type { Peak } from "./find-peaks.ts";
import type { FullFit } from "./fit-full.ts";

/** Some law passes near any three lines and often near four; five or more that do not follow it are a series off its law. */
const FEW_LINES = 4;
/** Reduced chi square of the level law beyond which errors that are too small are no excuse. */
const FLATLY_REJECTED = 100;
/** A peak this high over the median line of the reading is one of its kind. */
const OF_ITS_KIND = 1 / 3;
const LEAST_SHARE_LEFT_OUT = 1 / 5;

/**
 * Whether few lines that flatly reject their law were picked out of many of the same kind: then there is no series, since
 * any lines can be read so. Null where the reading stands; else why it does not, in words.
 */
export function readByChance({ range, state }: FullFit, peaks: readonly Peak[]): string | null {
  if (range === null) return null;
  const { chi2, degreesOfFreedom, n } = range.fit;
  if (n.length > FEW_LINES || degreesOfFreedom < 1 || chi2 < FLATLY_REJECTED * degreesOfFreedom) return null;
  const owned = peaks.filter((peak) =>
    state.ns.some(
      (_, j) => Math.abs(state.energy[j]! - peak.energy_eV) < Math.max(state.width[j]!, peak.width_eV),
    ),
  );
  const heights = owned.map(({ height }) => height).sort((a, b) => a - b);
  const least = OF_ITS_KIND * (heights[heights.length >> 1] ?? Infinity);
  const others = peaks.filter((peak) => !owned.includes(peak) && peak.height > least);
  if (others.length < LEAST_SHARE_LEFT_OUT * (others.length + owned.length)) return null;
  return ` The best reading, n = ${state.ns.join(", ")}, leaves out ${others.length} ${others.length === 1 ? "line" : "lines"} as strong, and its law misses the others by ${Math.sqrt(chi2 / degreesOfFreedom).toPrecision(3)} standard errors.`;
}
