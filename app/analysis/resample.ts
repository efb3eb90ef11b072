import { doubt, makeRandom, stopIfCancelled, type Note, type Random, type Watch } from "../base/index.ts";
import { fitSpectrum, type FitPoints, type SpectrumFit } from "../fit/index.ts";
import type { Protocol, Resampling } from "../protocol/index.ts";
import { fitLevels, fitWidths, type LevelFit } from "../series/index.ts";
import { correlationTime } from "../solve/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import type { FullFit } from "./fit-full.ts";
import { buildModel, type ModelChoices } from "./ladder-model.ts";
import { covarianceBlock, determinedPlaces } from "./level-range.ts";

/** A line whose energy leaves its place by more than this part of its width and its errors is another line. */
const FIT = { maxIterations: 40, gradientTolerance: 1e-5, costTolerance: 1e-8 };
/** Intervals that differ by more than this part ask for a note. */
const DIFFERS = 0.25;

interface Draw {
  readonly gap: number;
  readonly rydberg: number;
  readonly defect0: number;
  readonly exponent: number | null;
  readonly energy: Float64Array;
  readonly width: Float64Array;
  readonly area: Float64Array;
}

/**
 * What      The spectrum drawn anew and fitted again, lines, laws and all, from the fit as its start: fitted curve plus noise
 *           of the given sigma (`parametric`), or plus the fit's own residuals drawn with replacement (`residual`), enlarged by
 *           sqrt(m/(m - p)) and, where neighbours correlate, in blocks of neighbours three correlation times long.
 * Units     as in the result.
 * Domain    n and the range of the level law stay those of the fit. A draw whose fit does not converge, or whose law cannot be
 *           fitted, is counted as failed and left out.
 * Accuracy  the 68 % interval of N draws has a relative error of about 1.2/sqrt(N); tests/app/analysis/resample.test.ts.
 * Source    Efron and Tibshirani, An Introduction to the Bootstrap (1993), 9.4 and 13.3; blocks: Kunsch, Ann. Stat. 17, 1217
 *           (1989).
 */
export function resampleSpectrum(
  points: FitPoints,
  full: FullFit,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
  report: (done: number, of: number) => void,
): { readonly resampled: Resampling; readonly notes: readonly Note[] } | null {
  const { resample: kind, resamples: count, seed } = protocol.uncertainty;
  const law = full.range?.fit ?? null;
  if (kind === "none" || law === null) return null;
  const plain: Protocol = {
    ...protocol,
    uncertainty: { ...protocol.uncertainty, correlated: "note", scale_by_residuals: false },
  };
  const base = fitOnce(points, full, plain, unit, choices, watch);
  const { fitted, residuals } = base.solution;
  const m = points.energy.length;
  const { time } = correlationTime(residuals);
  const block = kind === "residual" && time > NEARLY_WHITE ? Math.min(Math.ceil(3 * time), m >> 3) : 1;
  const random = makeRandom(seed);
  const noise = kind === "parametric" ? normalNoise(random, m) : ownNoise(random, base, block);
  const draws: Draw[] = [];
  let failed = 0;
  for (let i = 0; i < count; i++) {
    stopIfCancelled(watch);
    report(i, count);
    const drawn = noise();
    const signal = Float64Array.from(fitted, (value, j) => value + points.sigma[j]! * drawn[j]!);
    const fit = fitOnce({ ...points, signal }, full, plain, unit, choices, watch);
    stopIfCancelled(watch);
    const draw = fit.solution.converged && fit.atBound.length === 0 ? lawsOf(fit, law, protocol) : null;
    if (draw === null) failed++;
    else draws.push(draw);
  }
  const level = protocol.uncertainty.level;
  const over = (pick: (draw: Draw) => number | null): Resampling["gap_eV"] =>
    summary(
      draws.map(pick).filter((value): value is number => value !== null && Number.isFinite(value)),
      level,
    );
  const defectFree = law.defect !== "none";
  const exponentFree = protocol.width.exponent === "free";
  const nothing = { median: null, low: null, high: null };
  const resampled: Resampling = {
    kind,
    count,
    failed,
    seed,
    block_points: block,
    gap_eV: over((draw) => draw.gap),
    rydberg_eV: over((draw) => draw.rydberg),
    defect0: defectFree ? over((draw) => draw.defect0) : nothing,
    width_exponent: exponentFree ? over((draw) => draw.exponent) : nothing,
    lines: base.lines.ns.map((n, j) => ({
      n,
      energy_eV: over((draw) => draw.energy[j]!),
      width_eV: over((draw) => draw.width[j]!),
      area: over((draw) => draw.area[j]!),
    })),
  };
  return { resampled, notes: resamplingNotes(resampled, law, level) };
}

/** Correlation times up to this are what white noise shows by chance and the fit's own parameters make. */
const NEARLY_WHITE = 1.3;

function fitOnce(
  points: FitPoints,
  full: FullFit,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  watch: Watch,
): SpectrumFit {
  const model = buildModel(points, full.state, protocol, unit, choices);
  return fitSpectrum(points, model.spec, model.start, { ...FIT, watch });
}

function normalNoise(random: Random, m: number): () => Float64Array {
  const out = new Float64Array(m);
  return () => {
    for (let i = 0; i < m; i++) out[i] = random.normal();
    return out;
  };
}

/** Standardised residuals about their mean, enlarged for the parameters that were fitted to them. */
function ownNoise(random: Random, base: SpectrumFit, block: number): () => Float64Array {
  const { residuals, degreesOfFreedom } = base.solution;
  const m = residuals.length;
  const mean = residuals.reduce((sum, value) => sum + value, 0) / m;
  const scale = Math.sqrt(m / Math.max(1, degreesOfFreedom));
  const pool = residuals.map((value) => scale * (value - mean));
  const out = new Float64Array(m);
  return () => {
    for (let i = 0; i < m; i += block) {
      const from = Math.floor(random.uniform() * (m - block + 1));
      for (let j = 0; j < block && i + j < m; j++) out[i + j] = pool[from + j]!;
    }
    return out;
  };
}

function lawsOf(fit: SpectrumFit, law: LevelFit, protocol: Protocol): Draw | null {
  const places = determinedPlaces(fit, 0).filter((j) => law.n.includes(fit.lines.ns[j]!));
  if (places.length !== law.n.length) return null;
  const tied = protocol.series.mode === "tied";
  const { lines } = fit;
  let values: Float64Array;
  if (tied) {
    const levels = fit.laws?.levels;
    if (levels === undefined) return null;
    values = Float64Array.of(levels.gap, levels.rydberg, levels.defect0);
  } else {
    const covariance = covarianceBlock(fit, 0, places);
    const jitter = protocol.axis.jitter_eV ** 2;
    for (let j = 0; j < places.length; j++) covariance[j * (places.length + 1)]! += jitter;
    const levels = fitLevels({
      n: law.n,
      energy_eV: Float64Array.from(places, (j) => lines.energy[j]!),
      covariance,
      defect: law.defect,
      heldDefect: law.estimates.values[2],
      how: "newton",
    });
    if (!levels.ok || !levels.value.converged) return null;
    values = levels.value.estimates.values;
  }
  const widthPlaces = determinedPlaces(fit, 1);
  const widths = fitWidths({
    n: widthPlaces.map((j) => lines.ns[j]!),
    width_eV: Float64Array.from(widthPlaces, (j) => lines.width[j]!),
    covariance: covarianceBlock(fit, 1, widthPlaces),
    exponent: protocol.width.exponent,
    base: protocol.width.base,
    floorKind: protocol.width.floor_kind,
    defect0: values[2]!,
    testExponent: false,
    how: "newton",
  });
  return {
    gap: values[0]!,
    rydberg: values[1]!,
    defect0: values[2]!,
    exponent: widths.ok ? widths.value.estimates.values[2]! : null,
    energy: lines.energy,
    width: lines.width,
    area: lines.area,
  };
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

function resamplingNotes(resampled: Resampling, law: LevelFit, level: number): Note[] {
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
  const size = law.estimates.values.length;
  const names = ["gap_eV", "rydberg_eV", "defect0"] as const;
  const differing = names.filter((name, i) => {
    const { low, high } = resampled[name];
    const sigma = Math.sqrt(law.estimates.covariance[i * (size + 1)]!);
    if (low === null || high === null || !(sigma > 0) || level < 0.6 || level > 0.75) return false;
    const ratio = (high - low) / (2 * sigma);
    return Math.abs(ratio - 1) > DIFFERS + 4 / Math.sqrt(2 * (count - failed));
  });
  if (differing.length > 0)
    notes.push(
      doubt(
        "resampling-differs",
        differing.map((name) => `series.${name}`).join(", "),
        `Intervals from ${count} drawn spectra differ from the standard errors by more than a quarter: ${differing
          .map((name) => {
            const i = names.indexOf(name);
            const sigma = Math.sqrt(law.estimates.covariance[i * (size + 1)]!);
            return `${name} ${((resampled[name].high! - resampled[name].low!) / (2 * sigma)).toFixed(2)} times`;
          })
          .join(", ")}.`,
        "quote the resampled intervals; the model is not linear over one standard error, or the noise is not what the errors assume",
      ),
    );
  return notes;
}
