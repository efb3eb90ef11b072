import { CORRELATED_ABOVE } from "../analysis/index.ts";
import { doubt, type Note } from "../base/index.ts";
import { withCorrelatedJoint, type JointFit } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { correlationTime, neighbourCorrelation } from "../solve/index.ts";

export interface SharedNoise {
  readonly joint: JointFit;
  /** Factor of the errors of a parameter that sees all of the correlation, by spectrum; 1 where it is not allowed for. */
  readonly widening: Float64Array;
  readonly notes: readonly Note[];
}

/**
 * The joint fit with errors that allow for neighbouring residuals that correlate, spectrum by spectrum, as
 * `uncertainty.correlated` says: `auto` where they correlate by more than single spectra take for white. What was seen is
 * told either way.
 */
export function allowSharedNoise(
  joint: JointFit,
  powers: readonly number[],
  { uncertainty }: Protocol,
): SharedNoise {
  const seen = joint.fits.map(({ solution }) => neighbourCorrelation(solution.residuals));
  const times = joint.fits.map(({ solution }) => Math.max(1, correlationTime(solution.residuals).time));
  const above = seen.map((value) => value > CORRELATED_ABOVE);
  const mode = uncertainty.correlated;
  const allowed = above.map((value) => mode === "allow" || (mode === "auto" && value));
  const told = seen.flatMap((value, a) =>
    above[a]! ? [`${value.toFixed(2)} at ${powers[a]} uW (factor ${Math.sqrt(times[a]!).toFixed(2)})`] : [],
  );
  const notes =
    told.length === 0
      ? []
      : [
          doubt(
            "power-residuals-correlated",
            "power.fit",
            `Neighbouring residuals correlate by ${told.join(", ")}: ${
              mode === "note"
                ? "errors of areas, widths and saturations from these spectra are too small by up to that factor."
                : "all errors of these spectra allow for that and for the size of the residuals; where the model misses something, rather than the noise being correlated, they are a guess."
            }`,
            mode === "note"
              ? "set uncertainty.correlated=auto or allow"
              : "look at the residuals; uncertainty.correlated=note gives the errors of independent noise",
          ),
        ];
  return {
    joint: withCorrelatedJoint(joint, allowed),
    widening: Float64Array.from(times, (time, a) => (allowed[a]! ? Math.sqrt(time) : 1)),
    notes,
  };
}
