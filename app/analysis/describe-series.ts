import { NOT_DETERMINED, symmetric, type Note, type Quantity } from "../base/index.ts";
import type { SpectrumFit } from "../fit/index.ts";
import type { Protocol, RunglineResult } from "../protocol/index.ts";
import { LEVEL, levelLaw } from "../laws/index.ts";
import type { LevelFit, RangeChoice } from "../series/index.ts";
import { fitLaw, profileInterval } from "../solve/index.ts";
import { intervalFactor } from "./interval.ts";

type Series = NonNullable<RunglineResult["series"]>;

/** Level law to the result's `series`: values, intervals (profile likelihood where asked), scaled errors where rejected. */
export function describeSeries(
  range: RangeChoice,
  fit: SpectrumFit,
  covariance: Float64Array,
  places: readonly number[],
  readings: Series["readings"],
  protocol: Protocol,
): { series: Series; notes: readonly Note[] } {
  const factor = intervalFactor(protocol.uncertainty.level);
  const { fit: levels } = range;
  const { values, covariance: c } = levels.estimates;
  const size = values.length;
  const residualScale = protocol.uncertainty.scale_by_residuals
    ? Math.sqrt(fit.solution.chi2 / fit.solution.degreesOfFreedom)
    : 1;
  const sigma = (i: number): number => Math.sqrt(c[i * size + i]!) * residualScale;
  const isHeld = (i: number): boolean => !(c[i * size + i]! > 0);
  const quantity = (i: number, scale = 1): Quantity =>
    isHeld(i)
      ? { value: values[i]!, sigma: 0, low: values[i]!, high: values[i]! }
      : symmetric(values[i]!, sigma(i) * scale, factor);
  const profiled = (i: number): Quantity => {
    if (isHeld(i) || !protocol.uncertainty.profile) return quantity(i);
    const interval = profileOf(levels, fit, covariance, places, i, factor * residualScale);
    return { value: values[i]!, sigma: sigma(i), low: interval.low, high: interval.high };
  };
  const free = [0, 1, 2, 3].filter((i) => !isHeld(i));
  const names = ["gap_eV", "rydberg_eV", "defect0", "defect2"];
  const scale = levels.errorScale;
  return {
    series: {
      gap_eV: profiled(0),
      rydberg_eV: profiled(1),
      defect0: profiled(2),
      defect2: levels.defect === "ritz" ? quantity(3) : NOT_DETERMINED,
      fit_n: [range.fit_n[0], range.fit_n[1]],
      chi2: levels.chi2,
      dof: levels.degreesOfFreedom,
      p: levels.degreesOfFreedom > 0 ? levels.p : null,
      scaled:
        scale === null
          ? null
          : { gap_eV: quantity(0, scale), rydberg_eV: quantity(1, scale), defect0: quantity(2, scale) },
      correlation: {
        names: free.map((i) => names[i]!),
        matrix: free.map((i) =>
          free.map((j) => c[i * size + j]! / Math.sqrt(c[i * size + i]! * c[j * size + j]!)),
        ),
      },
      ranges: range.ranges.map((step) => ({ ...step })),
      readings,
    },
    notes: range.notes,
  };
}

/**
 * Profile of the level law's chi square in line-energy space with its full covariance: one parameter is held, the
 * others are fitted anew.
 */
function profileOf(
  levels: LevelFit,
  fit: SpectrumFit,
  covariance: Float64Array,
  places: readonly number[],
  i: number,
  factor: number,
): { low: number | null; high: number | null } {
  const { values, covariance: c } = levels.estimates;
  const size = values.length;
  const inFit = places.map((_, at) => at).filter((at) => levels.n.includes(fit.lines.ns[places[at]!]!));
  const k = inFit.length;
  const v = new Float64Array(k * k);
  for (let a = 0; a < k; a++)
    for (let b = 0; b < k; b++) v[a * k + b] = covariance[inFit[a]! * places.length + inFit[b]!]!;
  const n = inFit.map((at) => fit.lines.ns[places[at]!]!);
  const free = [0, 1, 2, 3].filter((p) => c[p * size + p]! > 0);
  const out = new Float64Array(LEVEL.size);
  const law = (
    parameters: Float64Array,
    each: (a: number, value: number, slopes: Float64Array) => void,
  ): void => {
    const all = Array.from(values);
    free.forEach((p, at) => (all[p] = parameters[at]!));
    n.forEach((one, a) => {
      levelLaw(one, { gap: all[0]!, rydberg: all[1]!, defect0: all[2]!, defect2: all[3]!, defect4: 0 }, out);
      each(a, out[LEVEL.energy]!, out.subarray(LEVEL.byGap));
    });
  };
  const problem = {
    data: Float64Array.from(inFit, (at) => fit.lines.energy[places[at]!]!),
    covariance: v,
    parameters: free.length,
    model: (parameters: Float64Array, model: Float64Array): void =>
      law(parameters, (a, value) => (model[a] = value)),
    jacobian: (parameters: Float64Array, jacobian: Float64Array): void =>
      law(parameters, (a, _, slopes) => free.forEach((p, at) => (jacobian[at * k + a] = slopes[p]!))),
  };
  const best = values[i]!;
  const at = free.indexOf(i);
  const minimised = (value: number): number => {
    const start = Float64Array.from(free, (p) => (p === i ? value : values[p]!));
    return fitLaw(problem, start, { fixed: free.map((p) => p === i) }).chi2;
  };
  if (at < 0) return { low: best, high: best };
  const sigma = Math.sqrt(c[i * size + i]!);
  const interval = profileInterval({ minimised, best, chi2: levels.chi2, sigma, rise: factor * factor });
  return { low: interval.low, high: interval.high };
}
