import { choleskyFactor, choleskySolve, fitLaw, type LawFit } from "../solve/index.ts";

export interface CurveProblem {
  /** (r) and its covariance (r x r, row-major) */
  readonly data: Float64Array;
  readonly covariance: Float64Array;
  readonly parameters: number;
  /** Value of datum i; derivatives go to out (p). */
  at(theta: Float64Array, i: number, out: Float64Array): number;
  readonly start: Float64Array;
  readonly lower?: Float64Array | undefined;
  readonly upper?: Float64Array | undefined;
  readonly fixed?: readonly boolean[] | undefined;
}

export interface CurveFit extends LawFit {
  /** d theta/d data (p x r, row-major), so that estimates from one spectrum fit can be combined. */
  readonly gain: Float64Array;
}

/** Part of the variance added to the diagonal: far below any error that matters, above rounding. */
const RIDGE = 1e-10;

/**
 * What      A curve fitted to correlated points (solve/fitLaw.ts), with its linear response to them,
 *           d theta/d y = C J' V^-1. Null where the covariance is not one or the fit does not arrive.
 */
export function fitCurve(problem: CurveProblem): CurveFit | null {
  const r = problem.data.length;
  const p = problem.parameters;
  const covariance = ridged(problem.covariance, r);
  if (covariance === null) return null;
  const row = new Float64Array(p);
  const jacobian = (theta: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < r; i++) {
      problem.at(theta, i, row);
      for (let j = 0; j < p; j++) out[j * r + i] = row[j]!;
    }
  };
  const fit = fitLaw(
    {
      data: problem.data,
      covariance,
      parameters: p,
      model: (theta, out) => {
        for (let i = 0; i < r; i++) out[i] = problem.at(theta, i, row);
      },
      jacobian,
    },
    problem.start,
    { lower: problem.lower, upper: problem.upper, fixed: problem.fixed, searchIterations: 10 },
  );
  if (!Number.isFinite(fit.chi2) || !fit.stationary) return null;
  const factor = choleskyFactor(covariance, r)!;
  const columns = new Float64Array(p * r);
  jacobian(fit.values, columns);
  const gain = new Float64Array(p * r);
  for (let j = 0; j < p; j++) {
    // Undetermined parameters have no variance to speak of.
    if (!Number.isFinite(fit.covariance[j * p + j]!)) return null;
  }
  const solved: Float64Array[] = [];
  for (let j = 0; j < p; j++) {
    const column = columns.slice(j * r, (j + 1) * r);
    choleskySolve(factor, r, column);
    solved.push(column);
  }
  for (let a = 0; a < p; a++) {
    for (let j = 0; j < p; j++) {
      const weight = fit.covariance[a * p + j]!;
      if (weight === 0) continue;
      for (let i = 0; i < r; i++) gain[a * r + i] = gain[a * r + i]! + weight * solved[j]![i]!;
    }
  }
  return { ...fit, gain };
}

/** The covariance with a ridge that makes it definite; null where a variance is not positive. */
function ridged(covariance: Float64Array, r: number): Float64Array | null {
  for (let i = 0; i < r; i++)
    if (!(covariance[i * r + i]! > 0 && covariance[i * r + i]! < Infinity)) return null;
  for (let ridge = RIDGE; ridge < 1e-3; ridge *= 100) {
    const out = Float64Array.from(covariance);
    for (let i = 0; i < r; i++) {
      out[i * r + i] = out[i * r + i]! * (1 + ridge);
      for (let j = 0; j < i; j++) {
        const mean = (covariance[i * r + j]! + covariance[j * r + i]!) / 2;
        out[i * r + j] = mean;
        out[j * r + i] = mean;
      }
    }
    if (isDefinite(out, r)) return out;
  }
  return null;
}

function isDefinite(v: Float64Array, r: number): boolean {
  const scale = Float64Array.from({ length: r }, (_, i) => 1 / Math.sqrt(v[i * r + i]!));
  return (
    choleskyFactor(
      v.map((x, at) => x * scale[Math.floor(at / r)]! * scale[at % r]!),
      r,
    ) !== null && choleskyFactor(v, r) !== null
  );
}
