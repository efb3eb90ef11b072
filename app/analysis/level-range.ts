import type { LevelValues, SpectrumFit } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { chooseLevelRange, type LevelInput, type RangeChoice } from "../series/index.ts";
import { isSensible, type LadderState } from "./ladder-model.ts";
import { intervalFactor } from "./interval.ts";

/** Square block `block` of the 4k x 4k covariance of the line parameters, for lines with a finite error. */
export function covarianceBlock(fit: SpectrumFit, block: number, places: readonly number[]): Float64Array {
  const k = fit.lines.ns.length;
  const count = places.length;
  const out = new Float64Array(count * count);
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) {
      out[a * count + b] = fit.lines.covariance[(block * k + places[a]!) * 4 * k + block * k + places[b]!]!;
    }
  }
  return out;
}

const BLOCKS = ["energy", "width", "area", "asymmetry"] as const;

/** Lines whose parameter in this block was free and determined, not held or following from others. */
export function determinedPlaces(fit: SpectrumFit, block: number): number[] {
  const k = fit.lines.ns.length;
  const tied = fit.constrained?.tied[BLOCKS[block]!] ?? [];
  return fit.lines.ns
    .map((_, j) => j)
    .filter((j) => {
      if (tied.includes(fit.lines.ns[j]!)) return false;
      const i = block * k + j;
      const variance = fit.lines.covariance[i * 4 * k + i]!;
      return variance > 0 && Number.isFinite(variance) && !fit.atBound.includes(fit.lines.ns[j]!);
    });
}

/** The level law of a fit whose line energies are tied to it; null else. */
export function tiedLevels({ problem, solution }: SpectrumFit): LevelValues | null {
  return problem.spec.tiedLevels === null ? null : problem.tiedLaw(solution.theta);
}

/** Line energies with their full covariance, as the level law takes them; null where too few are determined. */
export function levelInput(fit: SpectrumFit, protocol: Protocol): LevelInput | null {
  const places = determinedPlaces(fit, 0);
  if (places.length < 2) return null;
  const centre = (3 - protocol.material.dimension) / 2;
  return {
    n: places.map((j) => fit.lines.ns[j]!),
    energy_eV: Float64Array.from(places, (j) => fit.lines.energy[j]!),
    covariance: covarianceBlock(fit, 0, places),
    defect: protocol.series.defect,
    heldDefect: protocol.series.defect === "none" ? centre : (protocol.material.defect0 ?? centre),
  };
}

/** The level law over the range of n that the protocol asks for or the lines support. */
export function judgeLevels(fit: SpectrumFit, protocol: Protocol): RangeChoice | null {
  const input = levelInput(fit, protocol);
  if (input === null) return null;
  const chosen = chooseLevelRange({
    ...input,
    fit_n: protocol.series.fit_n,
    factor: intervalFactor(protocol.uncertainty.level),
  });
  return chosen.ok ? chosen.value : null;
}

/** The state with the lines that the level law speaks for marked, and the law's values as the next start. */
export function withLevelRange(state: LadderState, range: RangeChoice | null): LadderState {
  if (range === null) return state;
  const [low, high] = range.fit_n;
  const include = state.ns.map((n) => n >= low && n <= high);
  if (include.filter(Boolean).length < 2) return state;
  const [gap, rydberg, defect0, defect2] = range.fit.estimates.values as unknown as [
    number,
    number,
    number,
    number,
  ];
  const levels = { gap, rydberg, defect0, defect2 };
  return isSensible(levels, state) ? { ...state, include, levels } : state;
}
