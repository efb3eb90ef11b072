import { linePair } from "../lines/index.ts";
import { SMEARED } from "../fit/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { FullFit } from "./fit-full.ts";
import type { SelectedPoints } from "./select-points.ts";

/**
 * What a figure of one fitted spectrum needs. Energies in eV, signal in `unit`.
 * Shapes  energy, signal, sigma, used, model, background, tail, residual (m, the same points as the spectrum).
 */
export interface Curves {
  readonly unit: "1/cm" | "1";
  readonly energy_eV: Float64Array;
  readonly signal: Float64Array;
  readonly sigma: Float64Array;
  /** 1 where the point took part in the fit. */
  readonly used: Uint8Array;
  /** NaN outside the fitted window. */
  readonly model: Float64Array;
  readonly background: Float64Array;
  /** Lines above the last resolved one and the continuum; null where the tail was left out. */
  readonly tail: Float64Array | null;
  /** (signal - model)/sigma; NaN where not fitted. */
  readonly residual: Float64Array;
  /** Each line alone on about 300 energies of its own, dense near its centre. */
  readonly lines: readonly {
    readonly n: number;
    readonly energy_eV: Float64Array;
    readonly value: Float64Array;
  }[];
}

const LINE_POINTS = 300;
const FAR_WIDTHS = 60;

/** Curves of a spectrum without a fit. */
export function emptyCurves(spectrum: Spectrum): Curves {
  const nothing = new Float64Array(spectrum.energy_eV.length).fill(NaN);
  return {
    unit: spectrum.unit,
    energy_eV: spectrum.energy_eV,
    signal: spectrum.signal,
    sigma: spectrum.sigma,
    used: new Uint8Array(spectrum.energy_eV.length),
    model: nothing,
    background: nothing,
    tail: null,
    residual: nothing,
    lines: [],
  };
}

export function drawCurves(spectrum: Spectrum, points: SelectedPoints, full: Pick<FullFit, "fit">): Curves {
  const { fit } = full;
  const m = spectrum.energy_eV.length;
  const spread = (values: ArrayLike<number>): Float64Array => {
    const out = new Float64Array(m).fill(NaN);
    points.place.forEach((place, i) => (out[place] = values[i]!));
    return out;
  };
  const background = new Float64Array(points.energy.length);
  const tail = fit.problem.tailCurve(fit.solution.theta, fit.solution.coefficients);
  fit.problem.spec.background.forEach((column, b) => {
    const coefficient = fit.background[b]!.value;
    // What lines have lost to their surroundings belongs to the series.
    const sum = column.term === SMEARED && tail !== null ? tail : background;
    for (let i = 0; i < sum.length; i++) sum[i]! += coefficient * column.values[i]!;
  });
  const used = new Uint8Array(m);
  points.place.forEach((place) => (used[place] = 1));
  return {
    unit: spectrum.unit,
    energy_eV: spectrum.energy_eV,
    signal: spectrum.signal,
    sigma: spectrum.sigma,
    used,
    model: spread(fit.solution.fitted),
    background: spread(background),
    tail: tail === null ? null : spread(tail),
    residual: spread(fit.solution.residuals),
    lines: fit.lines.ns.map((n, j) => drawLine(n, j, full, points)),
  };
}

/** Energies crowd at the centre: E = E_n + (G/2) tan(t), t evenly spaced, within the window. */
function drawLine(
  n: number,
  j: number,
  full: Pick<FullFit, "fit">,
  points: SelectedPoints,
): Curves["lines"][number] {
  const { lines, problem } = full.fit;
  const low = points.energy[0]!;
  const high = points.energy[points.energy.length - 1]!;
  const limit = Math.atan(2 * FAR_WIDTHS);
  const energies: number[] = [];
  for (let i = 0; i < LINE_POINTS; i++) {
    const t = -limit + (2 * limit * i) / (LINE_POINTS - 1);
    const energy = lines.energy[j]! + (lines.width[j]! / 2) * Math.tan(t);
    if (energy >= low && energy <= high) energies.push(energy);
  }
  const energy = Float64Array.from(energies);
  const even = new Float64Array(energy.length);
  const odd = new Float64Array(energy.length);
  const { gaussStd, lineStds, instrumentLorentz } = problem.spec;
  const width = lines.width[j]! + (instrumentLorentz ?? 0);
  linePair(energy, 0, energy.length, lines.energy[j]!, width, lineStds?.[j] ?? gaussStd, even, odd);
  const value = even.map((one, i) => lines.area[j]! * (one + 2 * lines.asymmetry[j]! * odd[i]!));
  return { n, energy_eV: energy, value };
}
