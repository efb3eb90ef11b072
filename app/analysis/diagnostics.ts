import type { SpectrumFit } from "../fit/index.ts";
import type { Diagnostics, Protocol } from "../protocol/index.ts";
import {
  jointRegion,
  levelInfluence,
  levelProfileCurves,
  type LevelFit,
  type LevelInput,
} from "../series/index.ts";
import { autocorrelation, correlationTime, normalQuantile } from "../solve/index.ts";
import type { FullFit } from "./fit-full.ts";
import { levelInput } from "./level-range.ts";

const LAGS = 20;
const QUANTILES = 41;
const STRONG = 0.9;
const MOST_STRONG = 12;
const NEAR_BOUND = 5;

/** What a referee asks of a fit, beside chi square, runs and Durbin-Watson. */
export function describeDiagnostics(
  full: FullFit,
  protocol: Protocol,
  exponentCurve: readonly (readonly [number, number])[],
): Diagnostics {
  const { fit, range } = full;
  const { residuals, condition } = fit.solution;
  const { time } = correlationTime(residuals);
  const correlation = lineCorrelation(fit);
  const input = levelInput(fit, protocol);
  const free = protocol.series.mode === "free" && range !== null && input !== null;
  const reduced = fit.solution.chi2 / Math.max(1, fit.solution.degreesOfFreedom);
  return {
    autocorrelation: Array.from(
      autocorrelation(residuals, Math.min(LAGS, residuals.length - 1)).subarray(1),
      finite,
    ),
    correlation_time: finite(time),
    error_factor: finite(Math.sqrt(reduced * time)),
    ...distribution(residuals),
    correlation,
    strongest: strongest(correlation),
    influence: free
      ? levelInfluence(input, range.fit).map((one) => ({
          n: one.n,
          leverage: finite(one.leverage),
          residual: finite(one.residual),
          gap_eV: finite(one.gap_eV),
          rydberg_eV: finite(one.rydberg_eV),
          defect0: finite(one.defect0),
        }))
      : [],
    condition: finite(condition),
    bounds: nearBounds(fit),
    regions: free && protocol.uncertainty.profile ? regions(input, range.fit) : [],
    profiles: [
      ...(free && protocol.uncertainty.profile ? profiles(input, range.fit) : []),
      ...(exponentCurve.length === 0 ? [] : [{ name: "width_exponent", points: pairs(exponentCurve) }]),
    ],
  };
}

function finite(value: number | null): number | null {
  return value !== null && Number.isFinite(value) ? value : null;
}

/** Quantiles of the residuals against those of the normal distribution, and the two moments that say how they differ. */
function distribution(
  residuals: Float64Array,
): Pick<Diagnostics, "quantiles" | "skewness" | "excess_kurtosis"> {
  const m = residuals.length;
  const sorted = residuals.slice().sort();
  let mean = 0;
  for (const r of residuals) mean += r / m;
  let [second, third, fourth] = [0, 0, 0];
  for (const r of residuals) {
    const d = (r - mean) ** 2;
    second += d / m;
    third += (d * (r - mean)) / m;
    fourth += (d * d) / m;
  }
  const quantiles = Array.from({ length: QUANTILES }, (_, j) => {
    // The extreme ones stand for the last reading on each side, the others between.
    const least = 0.5 / m;
    const probability = least + ((1 - 2 * least) * (1 - Math.cos((Math.PI * j) / (QUANTILES - 1)))) / 2;
    const place = Math.min(m - 1, Math.max(0, probability * m - 0.5));
    const low = Math.floor(place);
    const high = Math.min(m - 1, low + 1);
    const residual = sorted[low]! + (place - low) * (sorted[high]! - sorted[low]!);
    return { probability, normal: normalQuantile(probability), residual };
  });
  return {
    quantiles: m < 3 ? [] : quantiles,
    skewness: finite(third / second ** 1.5),
    excess_kurtosis: finite(fourth / second ** 2 - 3),
  };
}

/** Energies, widths and areas of the lines, and what they share; parameters without an error are left out. */
function lineCorrelation(fit: SpectrumFit): Diagnostics["correlation"] {
  const { ns, covariance } = fit.lines;
  const k = ns.length;
  const size = 4 * k;
  const shared = fit.problem.spec.asymmetry === "shared";
  const parameters: { name: string; at: number }[] = [];
  ["energy", "width", "area"].forEach((word, block) =>
    ns.forEach((n, j) => parameters.push({ name: `${word}[${n}]`, at: block * k + j })),
  );
  if (shared) parameters.push({ name: "asymmetry", at: 3 * k });
  else ns.forEach((n, j) => parameters.push({ name: `asymmetry[${n}]`, at: 3 * k + j }));
  const known = parameters.filter(({ at }) => {
    const variance = covariance[at * size + at]!;
    return variance > 0 && Number.isFinite(variance);
  });
  const deviation = known.map(({ at }) => Math.sqrt(covariance[at * size + at]!));
  return {
    names: known.map((one) => one.name),
    // Three decimals: enough to see what hangs together, and a tenth of the size.
    matrix: known.map((a, i) =>
      known.map((b, j) =>
        i === j
          ? 1
          : finite(
              // No -0, which JSON does not keep.
              Math.round((1e3 * covariance[a.at * size + b.at]!) / (deviation[i]! * deviation[j]!)) / 1e3 + 0,
            ),
      ),
    ),
  };
}

function strongest({ names, matrix }: Diagnostics["correlation"]): Diagnostics["strongest"] {
  const pairs: Diagnostics["strongest"] = [];
  for (let i = 0; i < names.length; i++)
    for (let j = 0; j < i; j++) {
      const correlation = matrix[i]![j]!;
      if (correlation !== null && Math.abs(correlation) > STRONG)
        pairs.push({ a: names[j]!, b: names[i]!, correlation });
    }
  return pairs.sort((a, b) => Math.abs(b.correlation) - Math.abs(a.correlation)).slice(0, MOST_STRONG);
}

/** Bounds of nature, not those that keep a line in its place: areas and widths above zero, the factor of the tail. */
function nearBounds(fit: SpectrumFit): Diagnostics["bounds"] {
  const { ns, width, area, covariance } = fit.lines;
  const k = ns.length;
  const found: Diagnostics["bounds"] = [];
  const add = (name: string, value: number, bound: number, sigma: number): void => {
    const distance = sigma > 0 ? Math.abs(value - bound) / sigma : value === bound ? 0 : Infinity;
    if (distance < NEAR_BOUND) found.push({ name, value, bound, distance_sigma: distance });
  };
  ns.forEach((n, j) => {
    const sigmaOf = (block: number): number => Math.sqrt(covariance[(block * k + j) * (4 * k + 1)]!);
    add(`width[${n}]`, width[j]!, 0, sigmaOf(1));
    add(`area[${n}]`, area[j]!, 0, sigmaOf(2));
  });
  if (fit.factor !== null && fit.problem.spec.tail?.factorFree === true) {
    const { value, sigma } = fit.factor;
    add("tail.factor", value, 0, sigma);
    add("tail.factor", value, FACTOR_TOP, sigma);
  }
  return found;
}

const FACTOR_TOP = 1.2;

/** What a plot of two parameters shows: levels of one and two standard deviations, for the two together. */
const REGION_LEVELS = [0.6827, 0.9545];
const REGION_PAIRS = [
  ["gap_eV", "rydberg_eV"],
  ["gap_eV", "defect0"],
  ["rydberg_eV", "defect0"],
] as const;

function regions(input: LevelInput, fit: LevelFit): Diagnostics["regions"] {
  const out: Diagnostics["regions"] = [];
  for (const [x, y] of REGION_PAIRS)
    for (const level of REGION_LEVELS) {
      const region = jointRegion(input, fit, x, y, level);
      if (region !== null && region.points.every((point) => point.every(Number.isFinite)))
        out.push({ x, y, level, points: region.points.map(([a, b]): [number, number] => [a, b]) });
    }
  return out;
}

function profiles(input: LevelInput, fit: LevelFit): NonNullable<Diagnostics["profiles"]> {
  return levelProfileCurves(input, fit).map(({ name, points }) => ({
    name,
    points: pairs(points),
  }));
}

function pairs(points: readonly (readonly [number, number])[]): [number, number][] {
  return points.map(([value, rise]) => [value, rise]);
}
