import { stopIfCancelled, type Watch } from "../base/index.ts";
import { ConstrainedProblem, setUpFit, type FitPoints } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { profileInterval, solveSeparable, type SeparableProblem } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { FullFit } from "./fit-full.ts";
import { intervalFactor } from "./interval.ts";
import { buildModel } from "./ladder-model.ts";

export interface ProfileEnds {
  readonly low: number | null;
  readonly high: number | null;
}

/** Null: not a parameter of the spectrum fit, but of a law fitted to its lines. */
export interface SpectrumProfile {
  readonly gap_eV: ProfileEnds | null;
  readonly rydberg_eV: ProfileEnds | null;
  readonly defect0: ProfileEnds | null;
  readonly exponent: ProfileEnds | null;
}

const NONE: SpectrumProfile = { gap_eV: null, rydberg_eV: null, defect0: null, exponent: null };
const SOLVE = { gradientTolerance: 1e-7, costTolerance: 1e-11 };

/**
 * What      Profile-likelihood intervals of the law parameters that are fitted to the spectrum itself: gap, Rydberg energy and
 *           defect where the levels are tied (`series.mode`), the exponent where the widths are (`width.mode`). Everything else
 *           in the spectrum, lines, tail and background, is fitted again for every held value.
 * Units     eV; exponent 1.
 * Domain    fits of the absorption; null where the light was fitted. Where the standard error that is reported is not that of
 *           white noise (correlation allowed for, jitter of the axis, errors scaled by the residuals), chi square has to rise
 *           by the square of its ratio to that.
 * Accuracy  tests/app/analysis/spectrum-profile.test.ts.
 * Source    Venzon and Moolgavkar, Appl. Stat. 37, 87 (1988); the scaled rise: Chandler and Bate, Biometrika 94, 167 (2007).
 */
export function profileSpectrum(
  points: FitPoints,
  full: FullFit,
  protocol: Protocol,
  unit: Spectrum["unit"],
  watch: Watch,
): SpectrumProfile {
  const { fit, range } = full;
  if (full.domain.name !== "alpha") return NONE;
  const lawCount = fit.problem.layout.lawCount;
  const widthLaw = fit.constrained?.widthLaw ?? null;
  if (lawCount === 0 && widthLaw === null) return NONE;
  const model = buildModel(points, full.state, protocol, unit, full.choices);
  const setUp = setUpFit(points, model.spec, model.start);
  const exponentAt =
    setUp.problem instanceof ConstrainedProblem ? (setUp.problem.widthLawPlaces?.[2] ?? -1) : -1;
  const quiet: Watch = { ...watch, report: () => undefined };
  const first = solveSeparable(setUp.problem, setUp.start, {
    ...SOLVE,
    lower: setUp.lower,
    upper: setUp.upper,
    watch: quiet,
  });
  stopIfCancelled(watch);
  if (!first.converged) return NONE;
  const few = setUp.problem.condense?.(first.theta) ?? null;
  const solveOn = (
    problem: SeparableProblem,
    start: Float64Array,
    at: number,
  ): { chi2: number; theta: Float64Array } => {
    const lower = setUp.lower.slice();
    const upper = setUp.upper.slice();
    lower[at] = start[at]!;
    upper[at] = start[at]!;
    const { chi2, theta, converged } = solveSeparable(problem, start, {
      ...SOLVE,
      lower,
      upper,
      watch: quiet,
    });
    stopIfCancelled(watch);
    return { chi2: converged ? chi2 : NaN, theta };
  };
  const size = setUp.problem.nonlinear + setUp.problem.linear;
  const factor = intervalFactor(protocol.uncertainty.level);
  const endsOf = (at: number, value: number, sigma: number): ProfileEnds | null => {
    const variance = first.covariance[at * (size + 1)]!;
    if (at < 0 || !(variance > 0) || !(sigma > 0)) return null;
    const best = first.theta[at]!;
    const { low, high } = profileInterval({
      minimised: (held) => {
        const start = first.theta.map(
          (one, i) => one + (first.covariance[i * size + at]! / variance) * (held - best),
        );
        if (few !== null) {
          const found = solveOn(few.problem, start, at);
          if (few.serves(found.theta)) return found.chi2 + few.lost;
        }
        return solveOn(setUp.problem, start, at).chi2;
      },
      best,
      chi2: first.chi2,
      sigma: Math.sqrt(variance),
      rise: (factor * sigma) ** 2 / variance,
      lower: setUp.lower[at],
      upper: setUp.upper[at],
    });
    // The laws of the tail were linearised anew: the minimum has moved by a hundredth of a standard error at most.
    const moved = value - best;
    return { low: low === null ? null : low + moved, high: high === null ? null : high + moved };
  };
  const level = range?.fit.estimates;
  const law = (i: number): ProfileEnds | null =>
    level === undefined || i >= lawCount
      ? null
      : endsOf(i, level.values[i]!, Math.sqrt(level.covariance[i * (level.values.length + 1)]!));
  return {
    gap_eV: law(0),
    rydberg_eV: law(1),
    defect0: law(2),
    exponent:
      widthLaw === null || exponentAt < 0
        ? null
        : endsOf(exponentAt, widthLaw.values[2]!, Math.sqrt(widthLaw.covariance[8]!)),
  };
}
