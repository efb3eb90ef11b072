import { assumption, doubt, type Note } from "../base/index.ts";
import type { FitPoints, FringeWave, SpectrumFit } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { linearLeastSquares } from "../solve/index.ts";
import { HC_EV_NM, reflectance } from "../units/index.ts";
import { spacing, type LadderState } from "./ladder-model.ts";

/** Fringes seen in residuals. */
export interface SeenFringes {
  readonly period_eV: number;
  /** How many of them the window holds. */
  readonly periods: number;
  /** In standard deviations of a point. */
  readonly amplitude: number;
  /** Fall of chi square by a wave of this period over that of an average period. */
  readonly prominence: number;
}

const BINS = 1500;
const FEWEST_PERIODS = 2.5;
const MOST_PERIODS = 350;
const OVERSAMPLING = 3;
/** A wave gains this much chi square at least; noise reaches 2 ln(1000) = 14. */
const LEAST_GAIN = 40;
/** And this many times what waves of any period gain, so that a general misfit is no fringe. */
const LEAST_PROMINENCE = 25;
/** The harmonics and neighbours of a wave are its own. */
const OWN_WIDTH = 2.5;

/**
 * What      The strongest wave in residuals: least squares of a cos + b sin for a ladder of periods, on averages over bins.
 * Shapes    residuals (m) in standard deviations.
 * Units     eV.
 * Domain    2.5 to 350 periods over the window, at least five bins a period; null where nothing stands out.
 * Source    Lomb, Astrophys. Space Sci. 39, 447 (1976); prominence against the median of all periods (a chi square of two
 *           degrees of freedom has the median 2 ln 2).
 */
export function findFringes(energy: Float64Array, residuals: Float64Array): SeenFringes | null {
  const m = energy.length;
  if (m < 50) return null;
  const low = energy[0]!;
  const span = energy[m - 1]! - low;
  const count = Math.min(BINS, m >> 1);
  const sum = new Float64Array(count);
  const weight = new Float64Array(count);
  for (let i = 0; i < m; i++) {
    const at = Math.min(count - 1, Math.floor(((energy[i]! - low) / span) * count));
    sum[at]! += residuals[i]!;
    weight[at]! += 1;
  }
  const gains: number[] = [];
  const amplitudes: number[] = [];
  const step = 1 / OVERSAMPLING;
  const most = Math.min(MOST_PERIODS, count / 5);
  for (let periods = FEWEST_PERIODS; periods <= most; periods += step) {
    let cc = 0;
    let cs = 0;
    let ss = 0;
    let yc = 0;
    let ys = 0;
    // Cosine and sine turn by one bin at a time: 1500 rotations lose a few 1e-13.
    const turn = (2 * Math.PI * periods) / count;
    const turnC = Math.cos(turn);
    const turnS = Math.sin(turn);
    let c = Math.cos(0.5 * turn);
    let s = Math.sin(0.5 * turn);
    for (let i = 0; i < count; i++) {
      const w = weight[i]!;
      cc += w * c * c;
      cs += w * c * s;
      ss += w * s * s;
      yc += sum[i]! * c;
      ys += sum[i]! * s;
      const next = c * turnC - s * turnS;
      s = s * turnC + c * turnS;
      c = next;
    }
    const det = cc * ss - cs * cs;
    const a = (ss * yc - cs * ys) / det;
    const b = (cc * ys - cs * yc) / det;
    gains.push(a * yc + b * ys);
    amplitudes.push(Math.hypot(a, b));
  }
  if (gains.length < 10) return null;
  let best = 0;
  gains.forEach((gain, i) => {
    if (gain > gains[best]!) best = i;
  });
  const others = gains.filter((_, i) => Math.abs(i - best) > OWN_WIDTH * OVERSAMPLING).sort((a, b) => a - b);
  const usual = Math.max(2, others[others.length >> 1]! / Math.LN2);
  const prominence = gains[best]! / usual;
  if (gains[best]! < LEAST_GAIN || prominence < LEAST_PROMINENCE || best === 0) return null;
  // The top of the parabola through the best three.
  const [l, c, r] = [gains[best - 1]!, gains[best]!, gains[best + 1] ?? 0];
  const shift = (0.5 * (l - r)) / (l - 2 * c + r);
  const periods = FEWEST_PERIODS + step * (best + (Math.abs(shift) < 1 ? shift : 0));
  return { period_eV: span / periods, periods, amplitude: amplitudes[best]!, prominence };
}

/** A wave of fewer periods may as well be a background that does not fit. */
const FEWEST_SAID = 4.5;
/** Parts of the window that each have to show the wave. */
const PARTS = 5;
/** A part shows the wave where it has this much of the amplitude of the whole, in phase with it. */
const OWN_SHARE = 0.25;
/** One part may hide it: fringes are weak under strong lines. */
const PARTS_WITH_WAVE = 4;
/** A wave gains this many times what waves of half to twice its period gain, so that a misfit of that size is none. */
const LEAST_CONTRAST = 2.5;

/**
 * What      Whether a wave found in residuals goes through the whole window with one phase and amplitude, as interference in a
 *           plate does. A step, an edge, one line that does not fit or a background that is too stiff make a wave of their own
 *           size at their own place.
 * Shapes    residuals (m) in standard deviations.
 */
export function isSteadyWave(energy: Float64Array, residuals: Float64Array, seen: SeenFringes): boolean {
  if (seen.periods <= FEWEST_SAID) return false;
  const m = energy.length;
  const low = energy[0]!;
  const span = energy[m - 1]! - low;
  const { cos, sin, gain } = waveOf(energy, residuals, seen.periods);
  const top = new Float64Array(PARTS);
  const bottom = new Float64Array(PARTS);
  for (let i = 0; i < m; i++) {
    const at = (energy[i]! - low) / span;
    const part = Math.min(PARTS - 1, Math.floor(PARTS * at));
    const phase = 2 * Math.PI * seen.periods * at;
    const wave = cos * Math.cos(phase) + sin * Math.sin(phase);
    top[part]! += wave * residuals[i]!;
    bottom[part]! += wave * wave;
  }
  const shares = top.map((sum, k) => sum / bottom[k]!);
  const others = [];
  for (let factor = 0.5; factor <= 2.001; factor += 0.05) {
    const periods = factor * seen.periods;
    if (Math.abs(periods - seen.periods) > 1.5) others.push(waveOf(energy, residuals, periods).gain);
  }
  return (
    shares.filter((share) => share > OWN_SHARE).length >= PARTS_WITH_WAVE &&
    gain > LEAST_CONTRAST * Math.max(...others)
  );
}

/** Least squares of a cos + b sin with so many periods over the window, and the fall of chi square by them. */
function waveOf(
  energy: Float64Array,
  residuals: Float64Array,
  periods: number,
): { readonly cos: number; readonly sin: number; readonly gain: number } {
  const m = energy.length;
  const low = energy[0]!;
  const span = energy[m - 1]! - low;
  let [cc, cs, ss, yc, ys] = [0, 0, 0, 0, 0];
  for (let i = 0; i < m; i++) {
    const phase = (2 * Math.PI * periods * (energy[i]! - low)) / span;
    const c = Math.cos(phase);
    const s = Math.sin(phase);
    cc += c * c;
    cs += c * s;
    ss += s * s;
    yc += residuals[i]! * c;
    ys += residuals[i]! * s;
  }
  const det = cc * ss - cs * cs;
  const cos = (ss * yc - cs * ys) / det;
  const sin = (cc * ys - cs * yc) / det;
  return { cos, sin, gain: cos * yc + sin * ys };
}

const ROUNDS = 5;
/** Points this many robust standard deviations off are lines. */
const CLIPPED = 2.5;
const POLYNOMIAL = 3;

/**
 * What      The signal without its fringes, for finding lines that they hide: a cubic with a wave through the points that
 *           are not lines, by least squares in rounds that leave out what stands off.
 * Domain    null where no period is known and none stands out.
 */
export function withoutWave(points: FitPoints, given: number | null): Float64Array | null {
  const { energy, signal } = points;
  const m = energy.length;
  const low = energy[0]!;
  const half = (energy[m - 1]! - low) / 2;
  const count = POLYNOMIAL + 1;
  const columns = new Float64Array(m * (count + 2));
  for (let i = 0; i < m; i++)
    for (let k = 0; k < count; k++) columns[k * m + i] = ((energy[i]! - low) / half - 1) ** k;
  const ones = new Float64Array(m).fill(1);
  const smooth = linearLeastSquares(columns.subarray(0, m * count), m, count, signal, ones).residuals;
  const scale = robustScale(smooth);
  const clipped = smooth.map((value) => Math.max(-CLIPPED, Math.min(CLIPPED, value / scale)));
  const period = given ?? findFringes(energy, clipped)?.period_eV ?? null;
  if (period === null) return null;
  for (let i = 0; i < m; i++) {
    const phase = (2 * Math.PI * (energy[i]! - low)) / period;
    columns[count * m + i] = Math.cos(phase);
    columns[(count + 1) * m + i] = Math.sin(phase);
  }
  let weights = ones;
  let wave = new Float64Array(m);
  for (let round = 0; round < ROUNDS; round++) {
    const { coefficients } = linearLeastSquares(columns, m, count + 2, signal, weights);
    const off = signal.slice();
    wave = new Float64Array(m);
    for (let k = 0; k < count + 2; k++)
      for (let i = 0; i < m; i++) {
        off[i]! -= coefficients[k]! * columns[k * m + i]!;
        if (k >= count) wave[i]! += coefficients[k]! * columns[k * m + i]!;
      }
    const limit = CLIPPED * robustScale(off);
    weights = off.map((value) => (Math.abs(value) < limit ? 1 : 0));
  }
  return signal.map((value, i) => value - wave[i]!);
}

/** Standard deviation from the median of sizes. */
function robustScale(values: Float64Array): number {
  const sizes = values.map(Math.abs).sort();
  return Math.max(sizes[sizes.length >> 1]! / 0.6745, Number.MIN_VALUE);
}

export function asksForFringes(protocol: Protocol): boolean {
  return protocol.background.some((term) => term.term === "fringes");
}

export type FringePhase = Extract<Protocol["background"][number], { term: "fringes" }>["phase"];

/** What turns the phase of fringes of the light beside their period. */
export function fringePhase(protocol: Protocol): FringePhase {
  for (const term of protocol.background) if (term.term === "fringes") return term.phase;
  return "auto";
}

/** The period that the protocol gives, or null. */
export function givenPeriod(protocol: Protocol): number | null {
  for (const term of protocol.background) if (term.term === "fringes") return term.period_eV;
  return null;
}

export function startWave(points: FitPoints, period: number): FringeWave {
  const { energy } = points;
  const last = energy[energy.length - 1]!;
  return { period, reference: (energy[0]! + last) / 2, span: last - energy[0]!, cos: 0, sin: 0 };
}

/** A step of the period is trusted while the phase at the ends of the window moves by less than this (periods). */
const MOST_PHASE = 0.12;

/** The wave after a fit: amplitudes as fitted, the period moved by its own column. */
export function waveAfter(fit: SpectrumFit, before: FringeWave): FringeWave {
  const value = (name: string): number => fit.background.find((one) => one.name === name)?.value ?? 0;
  const reach = (MOST_PHASE * 2 * before.period ** 2) / before.span;
  const shift = Math.max(-reach, Math.min(reach, value(FRINGE_PERIOD)));
  return {
    ...before,
    period: before.period + shift,
    cos: value("fringe_cos"),
    sin: value("fringe_sin"),
  };
}

export const FRINGE_PERIOD = "fringe_period";

/** Whether a pass has left the wave where it was. */
export function sameWave(before: FringeWave | undefined, after: FringeWave | undefined): boolean {
  if (before === undefined || after === undefined) return before === after;
  if (before.cos === 0 && before.sin === 0) return false;
  return (Math.abs(after.period - before.period) * after.span) / after.period ** 2 < STEADY_PHASE;
}

const STEADY_PHASE = 1e-4;

/** Reflectance of one surface for the fringes: what the reading corrects with, else what is known of the index. */
export function plateReflectance(spectrum: Spectrum, protocol: Protocol): number | null {
  const { surface } = protocol.signal;
  if (spectrum.transmittance !== null && spectrum.transmittance.reflectance > 0)
    return spectrum.transmittance.reflectance;
  if (surface.reflectance !== null) return surface.reflectance;
  const index = surface.index ?? protocol.material.index;
  return index === null ? null : reflectance(index, surface.surround_index);
}

const meV = (value: number): string => `${(1e3 * value).toPrecision(4)} meV`;

/** n_g d = hc/(2 period), in words. */
export function opticalThickness(period: number, protocol: Protocol): string {
  const product = HC_EV_NM / (2 * period) / 1e3;
  const index = protocol.signal.surface.index ?? protocol.material.index;
  const thickness =
    index === null ? "" : `, d about ${(product / index).toPrecision(3)} um if the group index is ${index}`;
  return `n_g d = ${product.toPrecision(4)} um${thickness}`;
}

/**
 * Notes on fringes that were fitted, or are seen in the residuals without having been asked for. `swing`: amplitude of the
 * fringes in optical depth, null where it is not known.
 */
export function fringeNotes(
  fitted: {
    readonly period: number;
    readonly how: "additive" | "multiplicative";
    readonly dispersion: boolean;
  } | null,
  wave: SeenFringes | null,
  depthRange: number | null,
  swing: number | null,
  state: LadderState,
  protocol: Protocol,
): Note[] {
  const notes: Note[] = [];
  const period = fitted?.period ?? wave?.period_eV ?? null;
  if (asksForFringes(protocol) && fitted === null)
    notes.push(
      doubt(
        "fringes-not-found",
        "background",
        "Fringes were asked for, but no period stands out in the residuals.",
        "give the period ({term: fringes, period_eV}), or take the term away",
      ),
    );
  if (fitted !== null)
    notes.push(
      assumption(
        "fringes-fitted",
        "background",
        `Interference fringes of period ${meV(fitted.period)} are part of the model (${fitted.how}${fitted.dispersion ? ", their phase turned by the index of the lines" : ""}): ${opticalThickness(fitted.period, protocol)}.`,
        "compare with the thickness of the crystal",
      ),
    );
  if (fitted === null && wave !== null && !asksForFringes(protocol))
    notes.push(
      doubt(
        "fringes-seen",
        "background",
        `The residuals carry a wave of period ${meV(wave.period_eV)} (amplitude ${wave.amplitude.toPrecision(2)} standard deviations of a point) through the whole window, as interference in a plate would leave: if it is that, ${opticalThickness(wave.period_eV, protocol)}.`,
        'add {"term": "fringes"} to the background, give the index (signal.surface.index), and see whether chi square falls',
      ),
    );
  if (fitted?.how === "additive" && depthRange !== null && depthRange > ADDITIVE_RANGE)
    notes.push(
      doubt(
        "fringes-additive",
        "background",
        `The optical depth varies by ${depthRange.toPrecision(2)} over the window, so the fringes are weaker under the lines than between; they were fitted as if they were the same everywhere.`,
        "give thickness and index (signal.thickness_um, signal.surface.index) and lines.domain=auto or transmittance",
      ),
    );
  if (period !== null) {
    const near = state.ns.filter((n, j) => {
      const isNear = (size: number): boolean => period > NEAR[0] * size && period < NEAR[1] * size;
      return isNear(state.width[j]!) || isNear(spacing(n, state.levels));
    });
    if (near.length > 0)
      notes.push(
        doubt(
          "fringes-near-lines",
          `lines[n=${near.join(",")}]`,
          `The period of the fringes, ${meV(period)}, is within 0.3 to 3 times the width or the spacing of n = ${near.join(", ")}: lines and fringes look alike there.`,
          "wedge or roughen the crystal, immerse it, or measure another thickness",
        ),
      );
    if (fitted?.dispersion !== true)
      notes.push(
        doubt(
          "low-n-coherent",
          "lines",
          `${fitted === null ? "If the wave in the residuals is interference, the light keeps" : "Fringes show that the light keeps"} its phase through the crystal, and lines turn that phase by their own index: Beer's law fails for them. ${coherentBias(swing)}`,
          "fit the light with the index of the lines: thickness and index (signal.thickness_um, signal.surface.index), the background term fringes, lines.domain=transmittance",
        ),
      );
  }
  return notes;
}

/**
 * With -ln T = alpha d - a cos(phi + d beta), a = 2 v R x, a line A (L, D) gives a sin(phi) d beta = -a sin(phi) A d D: a
 * false asymmetry q = -(a/2) sin phi, which moves a line fitted with another q by about q times its width.
 */
function coherentBias(swing: number | null): string {
  if (swing === null)
    return "Each line takes a false asymmetry of up to half the amplitude of the fringes in optical depth, and moves by as much of its width.";
  const part = (swing / 2).toPrecision(2);
  return `With fringes of ${swing.toPrecision(2)} in optical depth each line takes a false asymmetry of up to ${part}, and its energy may be off by ${part} of its width.`;
}

/** Fringes may be added to the signal where the optical depth varies by less than this. */
export const ADDITIVE_RANGE = 0.2;
const NEAR = [0.3, 3] as const;
