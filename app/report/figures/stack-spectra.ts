import type { RunglineResult } from "../../protocol/index.ts";
import type { FittedCurves } from "../curves-csv.ts";

/** One spectrum of a power series as fitted. */
export interface PowerSpectrum {
  readonly power_uW: number;
  readonly curves: FittedCurves;
}

export interface StackedSpectra {
  /** Range of energies, and of the signal with all offsets. */
  readonly low: number;
  readonly high: number;
  readonly least: number;
  readonly most: number;
  /** From the lowest power; the signal is NaN where it took no part in the fit. */
  readonly rows: readonly {
    readonly power_uW: number;
    readonly x: readonly number[];
    readonly signal: readonly number[];
    readonly model: readonly number[];
  }[];
}

/** The share of the lines by n that the picture begins with: high n, where power shows first. */
const FIRST_SHARE = 0.45;
/** Each spectrum stands above the one before by this share of the reach of the first. */
const OFFSET = 0.45;

/** The spectra of a power series towards the gap, one above the other by power; null where there are none. */
export function stackSpectra(
  result: RunglineResult,
  spectra: readonly PowerSpectrum[],
): StackedSpectra | null {
  const first = spectra[0]?.curves;
  if (first === undefined || first.energy_eV.length === 0) return null;
  const gap = result.series?.gap_eV.value ?? null;
  const energies = result.lines.flatMap(({ energy_eV: { value } }) => (value === null ? [] : [value]));
  const from = energies[Math.floor(FIRST_SHARE * energies.length)] ?? null;
  const next = energies[Math.floor(FIRST_SHARE * energies.length) + 1] ?? null;
  const [start, end] = [first.energy_eV[0]!, first.energy_eV[first.energy_eV.length - 1]!];
  const low = from === null || next === null ? start : Math.max(start, from - 0.4 * (next - from));
  const high = Math.min(end, gap === null || from === null ? Infinity : gap + 0.12 * (gap - from));
  const inside = (energy: number): boolean => energy >= low && energy <= high;
  let [bottom, top] = [Infinity, -Infinity];
  first.energy_eV.forEach((energy, i) => {
    if (!inside(energy) || !Number.isFinite(first.model[i]!)) return;
    bottom = Math.min(bottom, first.model[i]!);
    top = Math.max(top, first.model[i]!);
  });
  if (bottom === Infinity) return null;
  const reach = top > bottom ? top - bottom : 1;
  const rows = spectra.map(({ power_uW, curves }, k) => {
    const lift = k * OFFSET * reach;
    const x: number[] = [];
    const signal: number[] = [];
    const model: number[] = [];
    curves.energy_eV.forEach((energy, i) => {
      if (!inside(energy)) return;
      x.push(energy);
      signal.push(Number.isFinite(curves.residual[i]!) ? curves.signal[i]! + lift : NaN);
      model.push(curves.model[i]! + lift);
    });
    return { power_uW, x, signal, model };
  });
  return {
    low,
    high,
    least: bottom - 0.25 * reach,
    most: top + (spectra.length - 1) * OFFSET * reach + 0.1 * reach,
    rows,
  };
}
