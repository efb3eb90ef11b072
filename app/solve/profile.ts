export interface ProfileProblem {
  /**
   * Chi square minimised over the other parameters with this one held at `value`; NaN or Infinity where that cannot
   * be had (outside the model's domain, or the fit does not converge).
   */
  minimised(value: number): number;
  readonly best: number;
  readonly chi2: number;
  /** Standard error from the covariance: the first guess of the half width. */
  readonly sigma: number;
  /** Rise of chi square at the ends: 1 for 68.27 %, 3.841 for 95 %. Default 1. */
  readonly rise?: number | undefined;
  readonly lower?: number | undefined;
  readonly upper?: number | undefined;
}

export interface ProfileInterval {
  /** Ends of the interval; null where chi square does not rise that far within the bounds, or the search failed. */
  readonly low: number | null;
  readonly high: number | null;
  /** Both half widths agree with sqrt(rise) sigma within ten per cent. */
  readonly parabolic: boolean;
  /** A value with a chi square lower than the minimum by more than 1e-6 and its chi square: the fit was not at its minimum. */
  readonly better: { readonly value: number; readonly chi2: number } | null;
  readonly evaluations: number;
}

/** Ends are found to this part of sigma. */
const PRECISION = 1e-4;
const MOST_EVALUATIONS = 40;

/**
 * What      Interval of one parameter by profile likelihood: where the chi square minimised over all others has risen by
 *           `rise`. The root of the rise is nearly linear in the parameter, so it is searched in sqrt(chi2 - min) by
 *           bracketing from sigma outwards and the Illinois form of false position.
 * Shapes    scalars.
 * Units     those of the parameter.
 * Domain    sigma > 0 and finite, else both ends are null.
 * Accuracy  ends to 1e-4 sigma; tests/app/solve/profile.test.ts.
 * Source    Venzon and Moolgavkar, Appl. Stat. 37, 87 (1988); Dowell and Jarratt, BIT 11, 168 (1971).
 */
export function profileInterval(problem: ProfileProblem): ProfileInterval {
  const { best, chi2, sigma } = problem;
  const rise = problem.rise ?? 1;
  let evaluations = 0;
  let better: { value: number; chi2: number } | null = null;
  if (!(sigma > 0) || !Number.isFinite(sigma)) {
    return { low: null, high: null, parabolic: false, better, evaluations };
  }
  const excess = (value: number): number => {
    evaluations++;
    const c = problem.minimised(value);
    if (c < chi2 - 1e-6 && (better === null || c < better.chi2)) better = { value, chi2: c };
    return Math.sqrt(Math.max(0, c - chi2)) - Math.sqrt(rise);
  };
  const side = (sign: 1 | -1, bound: number): number | null => {
    const room = Math.abs(bound - best);
    let a = 0;
    let fa = -Math.sqrt(rise);
    let b = Math.min(Math.sqrt(rise) * sigma, room);
    if (b === 0) return null;
    let fb = excess(best + sign * b);
    for (let turn = 0; fb < 0; turn++) {
      if (b >= room || turn === 12) return null;
      // The line through the last two, a little beyond, at least a quarter and at most thrice as far.
      const slope = (fb - fa) / (b - a);
      const aim = slope > 0 ? b - (1.1 * fb) / slope : 3 * b;
      a = b;
      fa = fb;
      b = Math.min(Math.max(aim, 1.25 * b), 3 * b, room);
      fb = excess(best + sign * b);
    }
    let kept = 0;
    for (let turn = 0; turn < MOST_EVALUATIONS && b - a > PRECISION * sigma; turn++) {
      // Where chi square cannot be had the bracket is halved.
      const middle = Number.isFinite(fb) ? b - (fb * (b - a)) / (fb - fa) : 0.5 * (a + b);
      const f = excess(best + sign * middle);
      if (Math.abs(f) < 1e-5) return best + sign * middle;
      if (f < 0) {
        a = middle;
        fa = f;
        if (kept === -1 && Number.isFinite(fb)) fb *= 0.5;
        kept = -1;
      } else {
        b = middle;
        fb = Number.isNaN(f) ? Infinity : f;
        if (kept === 1) fa *= 0.5;
        kept = 1;
      }
    }
    return Number.isFinite(fb) ? best + sign * 0.5 * (a + b) : null;
  };
  const low = side(-1, problem.lower ?? -Infinity);
  const high = side(1, problem.upper ?? Infinity);
  const straight = (end: number | null): boolean =>
    end !== null && Math.abs(Math.abs(end - best) / (Math.sqrt(rise) * sigma) - 1) <= 0.1;
  return { low, high, parabolic: straight(low) && straight(high), better, evaluations };
}
