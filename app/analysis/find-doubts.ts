import { assumption, doubt, type Note } from "../base/index.ts";
import { findPreset, type Protocol, type RunglineResult } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { normalCdf } from "../solve/index.ts";
import type { Assignment } from "./assign-n.ts";
import { LEAST_SIGNIFICANCE } from "./climb-ladder.ts";
import type { Peak } from "./find-peaks.ts";
import { pointJitter } from "./axis-jitter.ts";
import { findSteps } from "./find-steps.ts";
import { CORRELATED_ABOVE, type FullFit } from "./fit-full.ts";
import { findFringes, fringeNotes, isSteadyWave, plateReflectance } from "./fringes.ts";
import { energyOf } from "./ladder-model.ts";

import { depthPerSignal } from "./light.ts";
import { atTheEdge, findSatellites } from "./satellites.ts";
import type { SelectedPoints } from "./select-points.ts";
import { smearedShares, type SmearedShare } from "./smeared-shares.ts";

type Fit = NonNullable<RunglineResult["fit"]>;

export interface DoubtInput {
  readonly spectrum: Spectrum;
  readonly protocol: Protocol;
  readonly points: SelectedPoints;
  readonly peaks: readonly Peak[];
  readonly assignment: Assignment;
  readonly full: FullFit;
  readonly fit: Fit;
  readonly lines: RunglineResult["lines"];
  readonly tail: RunglineResult["tail"];
  readonly series: RunglineResult["series"];
}

const meV = (value: number): string => `${(1e3 * value).toPrecision(6)} meV`;
const ueV = (value: number): string => `${(1e6 * value).toPrecision(3)} µeV`;

/** Everything that the fit itself gives reason to doubt; each note names its number and a remedy. */
export function findDoubts(input: DoubtInput): Note[] {
  return [
    ...doubtsOfFit(input),
    ...doubtsOfJitter(input),
    ...doubtsOfLines(input),
    ...doubtsOfTail(input),
    ...doubtsOfSampling(input),
    ...doubtsOfAxisDigits(input),
    ...doubtsOfSteps(input),
    ...doubtsOfUnexplained(input),
    ...doubtsOfFringes(input),
    ...doubtsOfMaterial(input),
    ...presetNotes(input.protocol),
  ];
}

/** A Rydberg energy this many times the material's, or this part of it, belongs to another material or another reading. */
const UNLIKE_MATERIAL = 1.5;

/** A preset gives starting values only; far from them its name and the data contradict each other. */
function doubtsOfMaterial({ full, protocol }: DoubtInput): Note[] {
  const { preset, rydberg_eV } = protocol.material;
  if (preset === null || rydberg_eV === null || full.range === null) return [];
  const found = full.range.fit.estimates.values[1]!;
  const ratio = found / rydberg_eV;
  if (ratio < UNLIKE_MATERIAL && ratio > 1 / UNLIKE_MATERIAL) return [];
  return [
    doubt(
      "rydberg-unlike-material",
      "series.rydberg_eV",
      `The Rydberg energy is ${Number(ratio.toPrecision(3))} times the ${Number((1000 * rydberg_eV).toPrecision(4))} meV of the material that was named. Two series read as one give four times, a series of which every second line is missing a quarter.`,
      "compare the readings of n, name the lines (lines.n) or the lines of another series (series.extra), or name the material that it is",
    ),
  ];
}

export function presetNotes(protocol: Protocol): Note[] {
  const preset = protocol.material.preset === null ? undefined : findPreset(protocol.material.preset);
  if (preset === undefined) return [];
  return [
    assumption(
      "preset-starting-values",
      "protocol.material",
      `The preset ${preset.id} gave starting values and defaults only (${preset.source}).`,
      "override single values with material.* in the protocol",
    ),
  ];
}

function doubtsOfFit({ fit, full, spectrum, points, protocol }: DoubtInput): Note[] {
  const notes: Note[] = [];
  if (!full.fit.solution.converged) {
    notes.push(
      doubt(
        "fit-not-converged",
        "fit.termination",
        `The spectrum fit ended by ${fit.termination} after ${fit.iterations} steps without meeting a convergence criterion.`,
        "shorten the window, lower the background order, or name the lines (lines.n)",
      ),
    );
  }
  if (!full.selfConsistent) {
    notes.push(
      doubt(
        "tail-not-settled",
        "tail.factor",
        "The laws that the tail is tied to and those of the fitted lines had not come to full agreement when the passes ended.",
        "name the lines (lines.n) or the range of n (series.fit_n)",
      ),
    );
  }
  if (full.range === null) {
    notes.push(
      doubt(
        "series-not-determined",
        "series",
        `Of the lines in the fit (n = ${full.state.ns.join(", ")}) fewer than two have a determined energy and lie in the range of the level law: no gap and no Rydberg energy follow.`,
        "name a range with two lines or more (series.fit_n), name more lines (lines.n), or leave both to auto",
      ),
    );
  }
  const held =
    full.fit.solution.activeBounds.filter((bound) => bound !== 0).length +
    (full.fit.constrained?.limited.length ?? 0);
  if (full.fit.solution.rank < fit.parameters - held) {
    notes.push(
      doubt(
        "parameters-degenerate",
        "fit.rank",
        `The data determine ${fit.rank} combinations of ${fit.parameters - held} free parameters.`,
        "lower the background order or leave out a background term",
      ),
    );
  }
  // Chi square is nearly normal for many degrees of freedom (Fisher: sqrt(2 chi2) - sqrt(2 dof - 1)).
  const excess = Math.sqrt(2 * fit.chi2) - Math.sqrt(2 * fit.dof - 1);
  const reduced = fit.chi2 / Math.max(1, fit.dof);
  const lag1 = fit.lag1 ?? 0;
  const independent = fit.effective_points ?? points.energy.length;
  const estimated = spectrum.noise.source === "estimated";
  const limit = estimated ? 1.15 : 1;
  if (reduced > limit && 1 - normalCdf(excess) < 1e-3) {
    notes.push(
      doubt(
        "misfit",
        "fit.reduced_chi2",
        `Reduced chi square is ${reduced.toPrecision(4)} for ${fit.dof} degrees of freedom: the model leaves more than the ${estimated ? "estimated" : "given"} noise${full.correlated || protocol.uncertainty.scale_by_residuals ? "; standard errors follow from the residuals" : ", so standard errors are too small"}.`,
        "look at the residuals; free the asymmetry, change the background, or set uncertainty.scale_by_residuals=true",
      ),
    );
  }
  if (lag1 > CORRELATED_ABOVE) {
    const seen = `Neighbouring residuals correlate by ${lag1.toFixed(2)}: about ${Math.round(independent)} of ${points.energy.length} points are independent`;
    const factor = Math.sqrt(points.energy.length / independent).toFixed(2);
    notes.push(
      doubt(
        "residuals-correlated",
        "fit.lag1",
        full.correlated
          ? `${seen}. All standard errors allow for that and for the size of the residuals; where the model misses something, rather than the noise being correlated, they are a guess.`
          : `${seen}, and standard errors are too small by about ${factor}.`,
        full.correlated
          ? "look at the residuals: a structure that repeats belongs into the model; uncertainty.correlated=note gives the errors of independent noise"
          : "set uncertainty.correlated=auto or allow, which carries the correlation into every standard error; or measure with a step no finer than the instrument resolves",
      ),
    );
  }
  return notes;
}

/** Significance of a jitter of the axis that is said: by chance once in 30,000 spectra, and small ones do no harm. */
const LEAST_JITTER = 4;

function doubtsOfJitter({ points, full }: DoubtInput): Note[] {
  const found = pointJitter(points, full.fit.solution.fitted, full.fit.solution.residuals);
  if (found === null || found.significance < LEAST_JITTER) return [];
  if (found.repeats > CORRELATED_ABOVE) {
    return [
      doubt(
        "line-shape-misfit",
        "lines",
        `Residuals are larger where the curve is steep and keep their sign from point to point there (correlation ${found.repeats.toFixed(2)}): the lines have another shape than the model's, and energies and widths are less certain than their errors say. An axis that jitters would change sign at random.`,
        "a slit or a Gaussian broadening that is not in the protocol (lines.slit_fwhm_eV), asymmetry line by line (lines.asymmetry=free), or lines of another series (series.extra)",
      ),
    ];
  }
  return [
    doubt(
      "axis-jitter-seen",
      "lines",
      `Residuals are larger where the curve is steep, as if the axis jittered by about ${ueV(found.jitter_eV)} from point to point (${found.significance.toFixed(1)} standard errors): energies there are less certain than their errors say.`,
      "read the energy with each point (wavemeter), or set axis.jitter_eV to what a line may be off",
    ),
  ];
}

function doubtsOfLines({ full, lines, protocol, assignment, points, peaks }: DoubtInput): Note[] {
  const notes: Note[] = [];
  const { ns } = full.state;
  for (const n of full.fit.atBound) {
    notes.push(
      doubt(
        "line-at-bound",
        `lines[n=${n}]`,
        `Line n = ${n} ended at a bound of its energy or width; its errors are not determined.`,
        "leave this n out (lines.n) or look for a blend in the residuals",
      ),
    );
  }
  const absent = [];
  for (let n = ns[0]!; n < ns[ns.length - 1]!; n++) if (!ns.includes(n)) absent.push(n);
  if (absent.length > 0) {
    notes.push(
      doubt(
        "line-missing",
        "lines",
        `No significant line at n = ${absent.join(", ")}, although its neighbours are seen.`,
        "look at the spectrum there: a masked stretch, a field effect or a wrong assignment",
      ),
    );
  }
  if (protocol.lines.n !== "auto") {
    const unseen = lines.filter((line) => !(line.significance > LEAST_SIGNIFICANCE)).map((line) => line.n);
    if (unseen.length > 0) {
      notes.push(
        doubt(
          "named-line-not-seen",
          `lines[n=${unseen.join(",")}]`,
          `The lines that were named include n = ${unseen.join(", ")}, which the spectrum does not show (area below ${LEAST_SIGNIFICANCE} standard errors).`,
          "leave them out of lines.n, or set lines.n=auto",
        ),
      );
    }
  }
  const q = full.fit.asymmetry;
  if (protocol.lines.asymmetry === "shared" && !(Math.abs(q.value) > 3 * q.sigma)) {
    notes.push(
      assumption(
        "asymmetry-insignificant",
        "lines.asymmetry",
        `The shared asymmetry is ${q.value.toPrecision(2)} with a standard error of ${q.sigma.toPrecision(2)}: not told from zero.`,
        "keep it free, so that its uncertainty is carried, or set lines.asymmetry=zero",
      ),
    );
  }
  const widest = Math.max(...full.state.width);
  const window = points.energy[points.energy.length - 1]! - points.energy[0]!;
  if (window < 10 * widest) {
    notes.push(
      doubt(
        "window-short",
        "fit.window_eV",
        `The window is ${(window / widest).toFixed(1)} times the widest line; asymmetry and background are told apart only from about 10.`,
        "measure further below the first line, or leave the first line out of the window",
      ),
    );
  }
  const strays = assignment.unmatched
    .map((i) => peaks[i]!)
    .filter((peak) => energyOf(ns[0]!, full.state.levels) < peak.energy_eV);
  for (const peak of strays) {
    if (atTheEdge(peak.energy_eV, peak.width_eV, full.state)) continue;
    const owner = ns.some(
      (_, j) => Math.abs(full.state.energy[j]! - peak.energy_eV) < 1.5 * full.state.width[j]!,
    );
    const explained = full.fit.constrained?.extra.some((series) =>
      series.lines.some(
        ({ energy, width }) =>
          Math.abs(energy.value - peak.energy_eV) < 1.5 * Math.max(width.value, peak.width_eV),
      ),
    );
    // Crests of fringes that are in the model were peaks too.
    const period = full.domain.fringes ?? full.state.fringes?.period ?? Infinity;
    if (owner || explained === true || peak.width_eV > CREST * period) continue;
    notes.push(
      doubt(
        "line-unassigned",
        "lines",
        `A line at ${meV(peak.energy_eV)} (width about ${ueV(peak.width_eV)}) fits no n of the series and is not in the model.`,
        "mask it (mask_eV) if it is of another origin",
      ),
    );
  }
  return notes;
}

/** A crest is at least this part of the period wide. */
const CREST = 0.15;

function doubtsOfTail({ tail, full, protocol }: DoubtInput): Note[] {
  if (tail === null && protocol.tail.model === "law") {
    return [
      doubt(
        "tail-left-out",
        "tail",
        `The lines do not follow a strength law that the tail could be tied to, so the window ends above n = ${full.state.ns[full.state.ns.length - 1]!} and nothing is said of what lies beyond.`,
        "look at the strengths against n; choose another strength law, or set tail.model=none and window_eV yourself",
      ),
    ];
  }
  if (tail === null || full.fit.factor === null) return [];
  const smeared = smearedShares(full.fit);
  if (smeared.length > 0) return [smearedNote(smeared)];
  const { value, sigma, atBound } = full.fit.factor;
  if (atBound && value > 1) {
    return [
      doubt(
        "tail-stronger-than-law",
        "tail.factor",
        "The lines above the last free one want more strength than 1.2 times the law.",
        "look for absorption near the gap that is not of this series; try another background",
      ),
    ];
  }
  if (value + sigma < 0.8 || (atBound && value === 0)) {
    return [
      doubt(
        "tail-weaker-than-law",
        "tail.factor",
        `The lines above n = ${tail.from_n - 1} have ${value.toFixed(2)} times the strength of the law: high lines are lost.`,
        "charged impurities, residual fields or too much light; compare strengths against n",
      ),
    ];
  }
  return [];
}

function smearedNote(shares: readonly SmearedShare[]): Note {
  const told = shares.map(({ at, share }) => `${(100 * share).toFixed(0)} % at ${at}`);
  return doubt(
    "lines-smeared",
    "tail",
    `High lines are weaker than the law, and what they have lost is found between them: of the law's strength ${told.join(", ")} stand as a smooth absorption, which is part of the model. Nothing is assumed about how lines fade; the shape of a smeared line is, so no errors are given for these shares, and the areas of the highest lines lean on it.`,
    "charges, fields, strain or too much light smear high lines; tail.smeared=none shows the fit without it",
  );
}

function doubtsOfSampling({ points, full }: DoubtInput): Note[] {
  const { ns, energy, width } = full.state;
  const coarse = ns.filter((_, j) => {
    const i = points.energy.findIndex((value) => value >= energy[j]!);
    if (i < 1) return false;
    return points.energy[i]! - points.energy[i - 1]! > width[j]! / 3;
  });
  if (coarse.length === 0) return [];
  return [
    doubt(
      "sampling-coarse",
      `lines[n=${coarse.join(",")}]`,
      `The sampling step exceeds a third of the width at n = ${coarse.join(", ")}.`,
      "measure with a finer step there",
    ),
  ];
}

function doubtsOfFringes({ points, full, protocol, spectrum }: DoubtInput): Note[] {
  const { residuals, fitted } = full.fit.solution;
  const wave = full.state.fringes;
  const period = full.domain.fringes ?? wave?.period ?? null;
  const known =
    period === null
      ? null
      : {
          period,
          how: full.domain.fringes === undefined ? ("additive" as const) : ("multiplicative" as const),
          dispersion: full.domain.dispersion === true,
        };
  const found = known === null ? findFringes(points.energy, residuals) : null;
  const seen = found !== null && isSteadyWave(points.energy, residuals, found) ? found : null;
  let low = Infinity;
  let high = -Infinity;
  for (const value of fitted) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  const depth = depthPerSignal(spectrum);
  const range = depth === null ? null : depth * (high - low);
  return fringeNotes(known, seen, range, swingOfFringes(depth), full.state, protocol);

  /** Amplitude of the fringes in optical depth, between the lines. */
  function swingOfFringes(perSignal: number | null): number | null {
    if (perSignal === null) return null;
    if (full.domain.fringes !== undefined) {
      const visibility = full.domain.parts?.find((one) => one.name === "visibility")?.value;
      const R = plateReflectance(spectrum, protocol);
      if (visibility === undefined || R === null) return null;
      return 2 * visibility * R * Math.exp(-Math.max(0, perSignal * low));
    }
    if (wave !== undefined) return perSignal * Math.hypot(wave.cos, wave.sin);
    if (seen === null) return null;
    const sigma = points.sigma.slice().sort()[points.sigma.length >> 1]!;
    return perSignal * seen.amplitude * sigma;
  }
}

/** Part of a line's standard error that the rounding of the axis may have before it is said. */
const ROUNDING_SAID = 0.3;

/** A uniform error of one digit has the standard deviation digit/sqrt(12); a line averages it over the points of its width. */
function doubtsOfAxisDigits({ points, full, spectrum, protocol }: DoubtInput): Note[] {
  const { axisRounding } = spectrum;
  if (axisRounding === undefined) return [];
  const { ns, energy, width } = full.state;
  const { covariance } = full.fit.lines;
  const size = 4 * ns.length;
  const rounded = ns.flatMap((n, j) => {
    const sigma = Math.sqrt(covariance[j * size + j]!);
    if (!(sigma > 0)) return [];
    let count = 0;
    for (const at of points.energy) if (Math.abs(at - energy[j]!) < width[j]! / 2) count++;
    const error = axisRounding.digit_eV / Math.sqrt(12 * Math.max(1, count));
    return error > ROUNDING_SAID * sigma && error > protocol.axis.jitter_eV ? [{ n, error, sigma }] : [];
  });
  if (rounded.length === 0) return [];
  const worst = rounded.reduce((a, b) => (b.error / b.sigma > a.error / a.sigma ? b : a));
  const most = Math.max(...rounded.map(({ error }) => error));
  return [
    doubt(
      "axis-rounded",
      `lines[n=${rounded.map(({ n }) => n).join(",")}]`,
      `The light axis is written to ${axisRounding.digit} of its unit (${ueV(axisRounding.digit_eV)}): rounding alone puts a reading off by ${ueV(axisRounding.digit_eV / Math.sqrt(12))} (one standard deviation), and n = ${worst.n} by ${ueV(worst.error)} averaged over its points, beside a stated ${ueV(worst.sigma)}.`,
      `write the axis with more digits, or set axis.jitter_eV=${most.toPrecision(2)}, which widens every line's energy by that`,
    ),
  ];
}

const LINE_REACH = 0.7;

/** A jump from one reading to the next is no line. */
function doubtsOfSteps({ points, full, spectrum }: DoubtInput): Note[] {
  const { ns, energy, width } = full.state;
  // What a line leaves that does not fit turns over at its centre.
  const inLine = (at: number): boolean =>
    at > energy[ns.length - 1]! || ns.some((_, j) => Math.abs(at - energy[j]!) < LINE_REACH * width[j]!);
  const steps = findSteps(full.fit.solution.residuals, points.pointsAsOne ?? 1).filter(
    ({ place }) => !inLine(points.energy[place]!),
  );
  if (steps.length === 0) return [];
  const depth = depthPerSignal(spectrum);
  const told = steps.map(({ place, height }) => {
    const jump = Math.abs(height) * points.sigma[place]!;
    const size =
      depth === null
        ? `${jump.toPrecision(2)} in the signal`
        : `${(100 * Math.expm1(depth * jump)).toPrecision(2)} % of the transmitted light`;
    const line = spectrum.line?.[points.place[place]!];
    const middle = (points.energy[place - 1]! + points.energy[place]!) / 2;
    return `${middle.toFixed(6)} eV (${size}${line === undefined ? "" : `, line ${line} of the file`})`;
  });
  return [
    doubt(
      "step-seen",
      "fit",
      `The residuals jump from one reading to the next at ${told.join(", ")}: no line and no smooth background does that.`,
      "measure again where the lamp, the gain or the sample moved, or end the window there (window_eV)",
    ),
  ];
}

/** Refractive index where the protocol names neither index nor permittivity; common practice, no source. */
const USUAL_INDEX = 2.5;

function doubtsOfUnexplained({ points, full, fit, spectrum, protocol }: DoubtInput): Note[] {
  const notes: Note[] = [];
  const found = findSatellites(
    points,
    full.fit.solution.residuals,
    full.state,
    (fit.chi2 / Math.max(1, fit.dof)) * (full.correlated ? points.energy.length / fit.effective_points! : 1),
  );
  if (found.length > 0) {
    const worst = [...found].sort((a, b) => Math.abs(b.significance) - Math.abs(a.significance));
    const shown = worst
      .slice(0, 4)
      .map((one) => `${meV(one.energy_eV)} (${one.significance.toFixed(1)} standard errors)`);
    notes.push(
      doubt(
        "satellite",
        "fit",
        `Residuals with the shape of a line stand at ${shown.join(", ")}${worst.length > 4 ? ` and ${worst.length - 4} more places` : ""}: not explained by this series.`,
        "another series (F beside P, S and D with field or strain), a bound exciton, or a background that is too stiff",
      ),
    );
  }
  if (spectrum.unit === "1/cm") {
    // Extinction coefficient k = alpha hbar c/(2 E); hbar c = 1.973269804e-5 eV cm (CODATA 2018).
    const strongest = Math.max(
      ...full.fit.lines.area.map((area, j) => (2 * area) / (Math.PI * full.fit.lines.width[j]!)),
    );
    const index = protocol.material.index ?? Math.sqrt(protocol.material.permittivity ?? USUAL_INDEX ** 2);
    const k = (strongest * 1.973269804e-5) / (2 * full.state.energy[0]!);
    if (k / index > 0.01) {
      notes.push(
        doubt(
          "low-n-coherent",
          "lines",
          `The strongest line changes the refractive index by about ${(k / 2).toPrecision(2)} to either side, and with it the light lost at each surface by ${((100 * 2 * k) / (index * index - 1)).toPrecision(2)} % of itself: Beer's law fails for it.`,
          "leave the lowest lines out of the window, or measure a thinner crystal to see what changes",
        ),
      );
    }
  }
  return notes;
}
