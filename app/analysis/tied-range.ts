import { doubt, type Estimates } from "../base/index.ts";
import { levelLink, type SpectrumFit } from "../fit/index.ts";
import { LEVEL_NAMES, REJECTED_BELOW, type LevelFit, type RangeChoice } from "../series/index.ts";
import { chiSquareSurvival } from "../solve/index.ts";

const SIZE = LEVEL_NAMES.length;

/**
 * What      The level law of a fit whose line energies are the law itself: its parameters and covariance come from the
 *           spectrum fit. What the law costs is the rise of chi square against the fit with free energies, one degree of
 *           freedom for every line beyond the parameters (likelihood ratio).
 * Shapes    gain (5 x lines): d parameters/d energies along the law, so that covariances of lines and law agree.
 */
export function tiedRange(tied: SpectrumFit, free: SpectrumFit, range: RangeChoice, jitter = 0): RangeChoice {
  const { spec, layout } = tied.problem;
  const { theta, covariance } = tied.solution;
  if (spec.tiedLevels === null) return range;
  const count = layout.lawCount;
  const size = layout.count + tied.problem.linear;
  const values = new Float64Array(SIZE);
  const start = spec.tiedLevels.values;
  values.set([start.gap, start.rydberg, start.defect0, start.defect2]);
  values.set(theta.subarray(0, count));
  const c = new Float64Array(SIZE * SIZE);
  for (let i = 0; i < count; i++) for (let j = 0; j < count; j++) c[i * SIZE + j] = covariance[i * size + j]!;
  const ns = spec.tiedLevels.tiedNs;
  const places = ns.map((n) => tied.lines.ns.indexOf(n));
  const energy = Float64Array.from(places, (j) => tied.lines.energy[j]!);
  const { link } = levelLink(
    { ns, value: energy, sigma: new Float64Array(ns.length).fill(1e-6), include: ns.map(() => true) },
    { gap: values[0]!, rydberg: values[1]!, defect0: values[2]!, defect2: values[3]! },
    count,
  );
  const gain = new Float64Array(SIZE * ns.length);
  gain.set(link.gain);
  // Each line stands off the law by its own error of the axis.
  for (let i = 0; i < SIZE; i++)
    for (let j = 0; j < SIZE; j++)
      for (let l = 0; l < ns.length; l++)
        c[i * SIZE + j]! += jitter * jitter * gain[i * ns.length + l]! * gain[j * ns.length + l]!;
  const estimates: Estimates = { ...range.fit.estimates, values, covariance: c };
  const degreesOfFreedom = ns.length - count;
  const chi2 = Math.max(0, tied.solution.chi2 - free.solution.chi2);
  const p = degreesOfFreedom > 0 ? chiSquareSurvival(chi2, degreesOfFreedom) : 1;
  const rejected = degreesOfFreedom > 0 && p < REJECTED_BELOW;
  const errorScale = rejected ? Math.sqrt(chi2 / degreesOfFreedom) : null;
  const fit: LevelFit = {
    ...range.fit,
    n: ns,
    estimates,
    chi2,
    degreesOfFreedom,
    p,
    offset_eV: new Float64Array(ns.length),
    offsetSigma_eV: new Float64Array(ns.length),
    converged: tied.solution.converged,
    gain,
    errorScale,
  };
  const notes = range.notes.filter((note) => note.code !== "law-rejected");
  if (rejected) {
    notes.push(
      doubt(
        "law-rejected",
        "series",
        `Tying the lines to the level law raises chi square by ${chi2.toPrecision(4)} for ${degreesOfFreedom} degrees of freedom (p = ${p.toExponential(1)}). Standard errors times ${errorScale!.toPrecision(3)} are given beside the plain ones.`,
        "free the levels (series.mode=free) and look at their offsets from the law",
      ),
    );
  }
  return {
    fit,
    fit_n: [ns[0]!, ns[ns.length - 1]!],
    ranges: range.ranges,
    passedOver: range.passedOver,
    notes,
  };
}
