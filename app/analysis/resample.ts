import { doubt, makeRandom, stopIfCancelled, type Note, type Random, type Watch } from "../base/index.ts";
import { fitSpectrum, type FitPoints, type SpectrumFit } from "../fit/index.ts";
import type { Protocol, Resampling } from "../protocol/index.ts";
import { fitLevels, fitWidths, type LevelFit } from "../series/index.ts";
import { autoregression, correlationTime } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { drawNoise, type NoiseSource } from "./drawn-noise.ts";
import type { FullFit } from "./fit-full.ts";
import { buildModel, type LadderState, type ModelChoices } from "./ladder-model.ts";
import { covarianceBlock, determinedPlaces, tiedLevels } from "./level-range.ts";

const FIT = { maxIterations: 40, gradientTolerance: 1e-5, costTolerance: 1e-8 };
/** Intervals that differ by more than this part ask for a note. */
const DIFFERS = 0.25;

/** Everything that draws need: plain data, the same for all of them, to be handed to a thread. */
export interface ResamplingPlan {
  readonly points: FitPoints;
  readonly state: LadderState;
  readonly protocol: Protocol;
  readonly unit: Spectrum["unit"];
  readonly choices: ModelChoices;
  /** The curve (m) that noise is added to. */
  readonly fitted: Float64Array;
  readonly noise: NoiseSource;
  readonly ns: readonly number[];
  readonly law: {
    readonly n: readonly number[];
    readonly defect: LevelFit["defect"];
    readonly held: number;
    /** d parameters/d energies (5 x lines). */
    readonly gain: Float64Array;
    /** Standard errors of gap, Rydberg energy and defect that the intervals are compared with. */
    readonly sigma: readonly number[];
  };
  /** Covariances where they allow for correlated noise; null: those of each draw. */
  readonly weights: {
    /** Of the energies of `law.n`. */
    readonly energy: Float64Array;
    /** Of the widths of the lines at these places of `ns`. */
    readonly width: Float64Array;
    readonly widthPlaces: readonly number[];
  } | null;
}

/** What one drawn spectrum gave; lines run with `ns` of the plan. */
export interface ResampledDraw {
  readonly gap: number;
  readonly rydberg: number;
  readonly defect0: number;
  readonly exponent: number | null;
  readonly energy: Float64Array;
  readonly width: Float64Array;
  readonly area: Float64Array;
}

/**
 * What      What `uncertainty.resample` asks for: fitted curve plus noise, drawn anew and fitted again, lines, laws and all, from
 *           the fit as its start and with its ties and constraints. `parametric`: normal noise of the given sigma; where the
 *           protocol allows for correlated noise, of the residuals' size and with their autocorrelation. `residual`: the fit's
 *           own residuals drawn with replacement, enlarged by sqrt(m/(m - p)) and, where neighbours correlate, in blocks of
 *           neighbours three correlation times long. Null where nothing is asked for, or there is no level law.
 * Units     as in the result.
 * Domain    n and the range of the level law stay those of the fit. Where the light was fitted, the draws are of the light
 *           linearised about its fit.
 * Accuracy  the 68 % interval of N draws has a relative error of about 1/sqrt(N); tests/app/analysis/resample.test.ts.
 * Source    Efron and Tibshirani, An Introduction to the Bootstrap (1993), 9.4 and 13.3; blocks: Kunsch, Ann. Stat. 17, 1217
 *           (1989); autoregression: Buhlmann, Bernoulli 3, 123 (1997).
 */
export function planResampling(
  points: FitPoints,
  full: FullFit,
  protocol: Protocol,
  unit: Spectrum["unit"],
  watch: Watch,
): ResamplingPlan | null {
  const { resample: kind } = protocol.uncertainty;
  const law = full.range?.fit ?? null;
  if (kind === "none" || law === null) return null;
  const { energy, signal, sigma } = points;
  const allowed = full.correlated;
  const common = {
    points: { energy, signal, sigma },
    state: full.state,
    protocol: {
      ...protocol,
      uncertainty: { ...protocol.uncertainty, correlated: "note", scale_by_residuals: false } as const,
    },
    unit,
    choices: full.choices,
  };
  const base = fitOnce(common, signal, watch);
  const { fitted, residuals, chi2, degreesOfFreedom } = base.solution;
  const size = law.estimates.values.length;
  const widthPlaces = determinedPlaces(full.fit, 1);
  return {
    ...common,
    fitted,
    noise:
      kind === "residual"
        ? ownNoise(residuals, degreesOfFreedom)
        : allowed
          ? {
              kind: "gaussian",
              scale: Math.sqrt(chi2 / Math.max(1, degreesOfFreedom)),
              process: autoregression(residuals),
            }
          : { kind: "gaussian", scale: 1, process: null },
    ns: base.lines.ns,
    law: {
      n: law.n,
      defect: law.defect,
      held: law.estimates.values[2]!,
      gain: law.gain,
      sigma: [0, 1, 2].map((i) => Math.sqrt(law.estimates.covariance[i * (size + 1)]!)),
    },
    weights: allowed
      ? {
          energy: covarianceBlock(full.fit, 0, determinedLawPlaces(full.fit, law.n)),
          width: covarianceBlock(full.fit, 1, widthPlaces),
          widthPlaces,
        }
      : null,
  };
}

/** Draws `from` to `to - 1` of a plan; null for one whose fit does not converge, or whose law cannot be fitted. */
export function drawSpectra(
  plan: ResamplingPlan,
  from: number,
  to: number,
  watch: Watch,
  report: (index: number) => void = () => undefined,
): (ResampledDraw | null)[] {
  const { points, fitted, noise, protocol } = plan;
  const { seed } = protocol.uncertainty;
  const out: (ResampledDraw | null)[] = [];
  for (let index = from; index < to; index++) {
    stopIfCancelled(watch);
    report(index);
    // A stream of random numbers of its own: draws may be made in any order and on any thread.
    const random = makeRandom(seed, index + 1);
    const drawn = drawNoise(noise, random, fitted.length);
    const signal = Float64Array.from(fitted, (value, j) => value + points.sigma[j]! * drawn[j]!);
    const fit = fitOnce(plan, signal, watch);
    stopIfCancelled(watch);
    out.push(fit.solution.converged && fit.atBound.length === 0 ? lawsOf(fit, plan, random) : null);
  }
  return out;
}

/** Medians and intervals of all draws of a plan, whoever made them; what to say about them. */
export function summariseDraws(
  plan: ResamplingPlan,
  all: readonly (ResampledDraw | null)[],
): { readonly resampled: Resampling; readonly notes: readonly Note[] } {
  const { protocol, law, noise } = plan;
  const { level, seed, resample } = protocol.uncertainty;
  const draws = all.filter((draw) => draw !== null);
  const over = (pick: (draw: ResampledDraw) => number | null): Resampling["gap_eV"] =>
    summary(
      draws.map(pick).filter((value): value is number => value !== null && Number.isFinite(value)),
      level,
    );
  const defectFree = law.defect !== "none";
  const exponentFree = protocol.width.exponent === "free";
  const nothing = { median: null, low: null, high: null };
  const resampled: Resampling = {
    kind: resample === "residual" ? "residual" : "parametric",
    count: all.length,
    failed: all.length - draws.length,
    seed,
    block_points: noise.kind === "own" ? noise.block : 1,
    ...(noise.kind === "gaussian" && noise.process !== null
      ? { autoregression: [...noise.process.stages[noise.process.stages.length - 1]!.coefficients] }
      : {}),
    gap_eV: over((draw) => draw.gap),
    rydberg_eV: over((draw) => draw.rydberg),
    defect0: defectFree ? over((draw) => draw.defect0) : nothing,
    width_exponent: exponentFree ? over((draw) => draw.exponent) : nothing,
    draws: keptDraws(draws.slice(0, MOST_KEPT), defectFree, exponentFree),
    lines: plan.ns.map((n, j) => ({
      n,
      energy_eV: over((draw) => draw.energy[j]!),
      width_eV: over((draw) => draw.width[j]!),
      area: over((draw) => draw.area[j]!),
    })),
  };
  return { resampled, notes: resamplingNotes(resampled, law.sigma, level) };
}

/** Draws whose numbers the result keeps: enough to draw a distribution. */
const MOST_KEPT = 2000;

function keptDraws(
  draws: readonly ResampledDraw[],
  defectFree: boolean,
  exponentFree: boolean,
): NonNullable<Resampling["draws"]> {
  return {
    gap_eV: draws.map((draw) => draw.gap),
    rydberg_eV: draws.map((draw) => draw.rydberg),
    ...(defectFree && { defect0: draws.map((draw) => draw.defect0) }),
    ...(exponentFree && {
      width_exponent: draws.flatMap(({ exponent }) =>
        exponent !== null && Number.isFinite(exponent) ? [exponent] : [],
      ),
    }),
  };
}

/** The main job takes about as long as this many draws. */
const DRAWS_A_FIT = 25;

/** The part of the whole work that is done before the first spectrum is drawn. */
export function shareBeforeDraws({ resample, resamples }: Protocol["uncertainty"]): number {
  return resample === "none" ? 1 : DRAWS_A_FIT / (DRAWS_A_FIT + resamples);
}

/** How far the whole work is, and in words, when draw number `done` (0, 1, ...) is begun. */
export function drawingProgress(done: number, uncertainty: Protocol["uncertainty"]): [number, string] {
  const { resamples } = uncertainty;
  const share = shareBeforeDraws(uncertainty);
  return [share + ((1 - share) * done) / resamples, `drawing spectra anew, ${done} of ${resamples}`];
}

/** Correlation times up to this are what white noise shows by chance and the fit's own parameters make. */
const NEARLY_WHITE = 1.3;

function fitOnce(
  {
    points,
    state,
    protocol,
    unit,
    choices,
  }: Omit<ResamplingPlan, "fitted" | "noise" | "ns" | "law" | "weights">,
  signal: Float64Array,
  watch: Watch,
): SpectrumFit {
  const drawn = { ...points, signal };
  const model = buildModel(drawn, state, protocol, unit, choices);
  return fitSpectrum(drawn, model.spec, model.start, { ...FIT, watch });
}

/** Standardised residuals about their mean, enlarged for the parameters that were fitted to them. */
function ownNoise(residuals: Float64Array, degreesOfFreedom: number): NoiseSource {
  const m = residuals.length;
  const { time } = correlationTime(residuals);
  const mean = residuals.reduce((sum, value) => sum + value, 0) / m;
  const scale = Math.sqrt(m / Math.max(1, degreesOfFreedom));
  return {
    kind: "own",
    pool: residuals.map((value) => scale * (value - mean)),
    block: time > NEARLY_WHITE ? Math.max(1, Math.min(Math.ceil(3 * time), m >> 3)) : 1,
  };
}

/** Lines of the law whose energies were free and determined. */
function determinedLawPlaces(fit: SpectrumFit, ns: readonly number[]): number[] {
  return determinedPlaces(fit, 0).filter((j) => ns.includes(fit.lines.ns[j]!));
}

function lawsOf(fit: SpectrumFit, plan: ResamplingPlan, random: Random): ResampledDraw | null {
  const { law, protocol, weights } = plan;
  const { lines } = fit;
  const jitter = protocol.axis.jitter_eV;
  const shifts = Float64Array.from(law.n, () => (jitter > 0 ? jitter * random.normal() : 0));
  let values: Float64Array;
  const energy = lines.energy.slice();
  const tied = tiedLevels(fit);
  if (tied !== null) {
    values = Float64Array.of(tied.gap, tied.rydberg, tied.defect0);
    for (let i = 0; i < values.length; i++)
      for (let l = 0; l < shifts.length; l++) values[i]! += law.gain[i * shifts.length + l]! * shifts[l]!;
  } else {
    const places = determinedLawPlaces(fit, law.n);
    if (places.length !== law.n.length) return null;
    places.forEach((j, l) => (energy[j]! += shifts[l]!));
    const covariance = weights?.energy ?? covarianceBlock(fit, 0, places);
    if (weights === null)
      for (let j = 0; j < places.length; j++) covariance[j * (places.length + 1)]! += jitter * jitter;
    const levels = fitLevels({
      n: law.n,
      energy_eV: Float64Array.from(places, (j) => energy[j]!),
      covariance,
      defect: law.defect,
      heldDefect: law.held,
      how: "newton",
    });
    if (!levels.ok || !levels.value.converged) return null;
    values = levels.value.estimates.values;
  }
  return {
    gap: values[0]!,
    rydberg: values[1]!,
    defect0: values[2]!,
    exponent: exponentOf(fit, plan, values[2]!),
    energy,
    width: lines.width,
    area: lines.area,
  };
}

function exponentOf(fit: SpectrumFit, { protocol, weights }: ResamplingPlan, defect0: number): number | null {
  const tied = fit.constrained?.widthLaw ?? null;
  if (tied !== null) return tied.values[2]!;
  const places = determinedPlaces(fit, 1);
  // Weights of other lines would be another law.
  if (weights !== null && places.join() !== weights.widthPlaces.join()) return null;
  const widths = fitWidths({
    n: places.map((j) => fit.lines.ns[j]!),
    width_eV: Float64Array.from(places, (j) => fit.lines.width[j]!),
    covariance: weights?.width ?? covarianceBlock(fit, 1, places),
    exponent: protocol.width.exponent,
    base: protocol.width.base,
    floorKind: protocol.width.floor_kind,
    defect0,
    testExponent: false,
    how: "newton",
  });
  return widths.ok ? widths.value.estimates.values[2]! : null;
}

function summary(values: number[], level: number): Resampling["gap_eV"] {
  if (values.length < 2) return { median: null, low: null, high: null };
  const sorted = Float64Array.from(values).sort();
  const at = (probability: number): number => {
    const place = Math.min(sorted.length - 1, Math.max(0, probability * sorted.length - 0.5));
    const low = Math.floor(place);
    const high = Math.min(sorted.length - 1, low + 1);
    return sorted[low]! + (place - low) * (sorted[high]! - sorted[low]!);
  };
  return { median: at(0.5), low: at(0.5 - level / 2), high: at(0.5 + level / 2) };
}

function resamplingNotes(resampled: Resampling, sigmas: readonly number[], level: number): Note[] {
  const notes: Note[] = [];
  const { failed, count } = resampled;
  if (failed > 0.05 * count)
    notes.push(
      doubt(
        "resamples-failed",
        "resampled",
        `${failed} of ${count} drawn spectra could not be fitted and are left out of the intervals, which are then too narrow.`,
        "look for a line that is hardly seen (lines.n, lines.max_n)",
      ),
    );
  const names = ["gap_eV", "rydberg_eV", "defect0"] as const;
  const differing = names.filter((name, i) => {
    const { low, high } = resampled[name];
    const sigma = sigmas[i]!;
    if (low === null || high === null || !(sigma > 0) || level < 0.6 || level > 0.75) return false;
    const ratio = (high - low) / (2 * sigma);
    // And three standard errors of an interval from so many draws.
    return Math.abs(ratio - 1) > DIFFERS + 3 / Math.sqrt(count - failed);
  });
  if (differing.length > 0)
    notes.push(
      doubt(
        "resampling-differs",
        differing.map((name) => `series.${name}`).join(", "),
        `Intervals from ${count} drawn spectra differ from the standard errors by more than a quarter: ${differing
          .map((name) => {
            const i = names.indexOf(name);
            return `${name} ${((resampled[name].high! - resampled[name].low!) / (2 * sigmas[i]!)).toFixed(2)} times`;
          })
          .join(", ")}.`,
        "quote the resampled intervals; the model is not linear over one standard error, or the noise is not what the errors assume",
      ),
    );
  return notes;
}
