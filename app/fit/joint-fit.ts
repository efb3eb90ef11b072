import { NO_WATCH } from "../base/index.ts";
import { solveShared, type SharedSolution } from "../solve/index.ts";
import {
  describeFit,
  lineRows,
  parameterBounds,
  type FitControl,
  type FitStart,
  type SpectrumFit,
} from "./fit-spectrum.ts";
import type { FitPoints, ModelSpec } from "./model-spec.ts";
import { SpectrumProblem } from "./spectrum-problem.ts";

/** One spectrum of a joint fit; its levels are tied to the law. */
export interface JointMember {
  readonly points: FitPoints;
  readonly spec: ModelSpec;
  readonly start: FitStart;
  /** Lines whose width is held at its start: too weak here to have one of their own. */
  readonly heldWidths?: readonly number[] | undefined;
  /** Intervals that widths may move in, by n; closer than those of a fit on its own. */
  readonly widthRange?: ReadonlyMap<number, readonly [number, number]> | undefined;
}

/** Which parameters of the level law, and whether the asymmetry, every spectrum has for itself. */
export interface JointChoices {
  readonly gap: boolean;
  readonly rydberg: boolean;
  readonly defect: boolean;
  readonly asymmetry?: boolean | undefined;
}

export const LAW_NAMES = ["gap", "rydberg", "defect0", "defect2"] as const;
export type SharedName = (typeof LAW_NAMES)[number] | "asymmetry";

export interface JointFit {
  /** One a spectrum, in the order given; errors are those of the joint fit. */
  readonly fits: readonly SpectrumFit[];
  readonly solution: SharedSolution;
  /** What the shared parameters are, in the order of `solution.shared`. */
  readonly names: readonly SharedName[];
  /** What own parameters have in common with shared ones beside T C, where noise is correlated (joint-correlated.ts; n x q). */
  readonly mixed?: readonly Float64Array[];
}

/**
 * What      Several spectra in one least-squares fit: gap, Rydberg energy and defect of the level law (each may be freed)
 *           and the asymmetry are common to all; areas, widths, energies of lines off the law, tail factor and background
 *           belong to each spectrum. Every spectrum has its own grid.
 * Shapes    members (N); all have the same number of law parameters.
 * Units     eV, as spectrum-problem.ts.
 * Domain    a parameter that a spectrum lacks (no asymmetry, say) is shared by the others.
 * Accuracy  tests/app/fit/joint-fit.test.ts: one dense fit of all points, and the tied fit where there is one spectrum.
 * Source    solveShared.ts for the elimination.
 */
export function fitJointly(
  members: readonly JointMember[],
  free: JointChoices,
  control: FitControl & { readonly answer?: "exact" | "condensed" } = {},
): JointFit {
  const first = members[0];
  if (first === undefined) throw new Error("a joint fit needs a spectrum");
  const problems = members.map(({ points, spec }) => {
    if (spec.tiedLevels === null) throw new Error("the levels of a joint fit are tied to their law");
    return new SpectrumProblem(points, spec);
  });
  const lawCount = problems[0]!.layout.lawCount;
  if (problems.some(({ layout }) => layout.lawCount !== lawCount))
    throw new Error("all spectra of a joint fit have the same level law");
  const ownLaw = [free.gap, free.rydberg, free.defect, free.defect];
  const names: SharedName[] = LAW_NAMES.filter((_, p) => p < lawCount && !ownLaw[p]!);
  if (free.asymmetry !== true && problems.some(({ layout }) => layout.asymmetryAt >= 0))
    names.push("asymmetry");
  const placeOf = (problem: SpectrumProblem, name: SharedName): number =>
    name === "asymmetry" ? problem.layout.asymmetryAt : LAW_NAMES.indexOf(name);

  const starts = members.map(({ start }, a) =>
    problems[a]!.startFrom(start.lines, start.asymmetry, start.factor),
  );
  const bounds = members.map(({ start }, a) => parameterBounds(problems[a]!, start, starts[a]!));
  members.forEach(({ heldWidths, widthRange, spec }, a) => {
    spec.ns.forEach((n, j) => {
      const range = widthRange?.get(n);
      if (range === undefined) return;
      const at = problems[a]!.layout.widthAt[j]!;
      [bounds[a]!.lower[at], bounds[a]!.upper[at]] = range;
      starts[a]![at] = Math.min(range[1], Math.max(range[0], starts[a]![at]!));
    });
    for (const n of heldWidths ?? []) {
      const at = problems[a]!.layout.widthAt[spec.ns.indexOf(n)];
      if (at === undefined) throw new Error(`no line n = ${n} in this spectrum`);
      bounds[a]!.lower[at] = starts[a]![at]!;
      bounds[a]!.upper[at] = starts[a]![at]!;
    }
  });
  const lower = new Float64Array(names.length).fill(-Infinity);
  const upper = new Float64Array(names.length).fill(Infinity);
  const start = new Float64Array(names.length);
  names.forEach((name, g) => {
    const a = problems.findIndex((problem) => placeOf(problem, name) >= 0);
    const at = placeOf(problems[a]!, name);
    start[g] = starts[a]![at]!;
    lower[g] = bounds[a]!.lower[at]!;
    upper[g] = bounds[a]!.upper[at]!;
  });
  const solution = solveShared(
    problems.map((problem, a) => ({
      problem,
      start: starts[a]!,
      lower: bounds[a]!.lower,
      upper: bounds[a]!.upper,
      sharedAt: Int32Array.from(names, (name) => placeOf(problem, name)),
    })),
    start,
    {
      lower,
      upper,
      maxIterations: control.maxIterations ?? 100,
      gradientTolerance: control.gradientTolerance ?? 1e-7,
      costTolerance: control.costTolerance ?? 1e-11,
      answer: control.answer,
      // Whoever asks for the fit reports where the whole job is; the solver only hears whether to stop.
      watch: { ...(control.watch ?? NO_WATCH), report: () => undefined },
    },
  );
  const fits = problems.map((problem, a): SpectrumFit => {
    const fit = describeFit(problem, solution.members[a]!);
    // A width that was held from the start says nothing about the line.
    const held = members[a]!.heldWidths ?? [];
    return { ...fit, atBound: fit.atBound.filter((n) => !held.includes(n)) };
  });
  return { fits, solution, names };
}

/**
 * Covariance of [energies, widths, areas, asymmetries] of spectrum a (rows) with those of spectrum b (columns): its own
 * where a = b, else through the shared parameters. 4 k_a x 4 k_b, row-major.
 */
export function jointCovariance(joint: JointFit, a: number, b: number): Float64Array {
  const first = joint.fits[a]!;
  if (a === b) return first.lines.covariance;
  const rows = toShared(joint, a, joint.solution.sensitivity[a]!);
  const columns = toShared(joint, b, joint.solution.sensitivity[b]!);
  const q = joint.names.length;
  const height = 4 * first.lines.ns.length;
  const width = 4 * joint.fits[b]!.lines.ns.length;
  const { sharedCovariance } = joint.solution;
  const out = new Float64Array(height * width);
  const product = new Float64Array(q);
  for (let i = 0; i < height; i++) {
    for (let g = 0; g < q; g++) {
      let sum = 0;
      for (let h = 0; h < q; h++) sum += rows[i * q + h]! * sharedCovariance[h * q + g]!;
      product[g] = sum;
    }
    for (let j = 0; j < width; j++) {
      let sum = 0;
      for (let g = 0; g < q; g++) sum += product[g]! * columns[j * q + g]!;
      out[i * width + j] = sum;
    }
  }
  if (joint.mixed === undefined) return out;
  const rowsMixed = toShared(joint, a, joint.mixed[a]!);
  const columnsMixed = toShared(joint, b, joint.mixed[b]!);
  for (let i = 0; i < height; i++)
    for (let j = 0; j < width; j++)
      for (let g = 0; g < q; g++)
        out[i * width + j]! +=
          rowsMixed[i * q + g]! * columns[j * q + g]! + rows[i * q + g]! * columnsMixed[j * q + g]!;
  return out;
}

/**
 * From (theta, c) of spectrum a to its energies, widths, areas and asymmetries: with its sensitivity, their derivatives by the
 * shared parameters, everything else refitted (4k x q, row-major).
 */
function toShared(joint: JointFit, a: number, sensitivity: Float64Array): Float64Array {
  const { problem, solution } = joint.fits[a]!;
  const q = joint.names.length;
  const rows = lineRows(problem, solution.theta, solution.coefficients);
  const out = new Float64Array(rows.length * q);
  rows.forEach((row, i) => {
    for (const [place, factor] of row)
      for (let g = 0; g < q; g++) out[i * q + g]! += factor * sensitivity[place * q + g]!;
  });
  return out;
}
