import { doubt, assumption, stopIfCancelled, type Note, type Watch } from "../base/index.ts";
import {
  buildModel,
  energyOf,
  leastSignificance,
  linesForThinning,
  selectPoints,
  significances,
  stateAfter,
  thinPoints,
  withLines,
  type LadderState,
  type ModelChoices,
  type SelectedPoints,
} from "../analysis/index.ts";
import {
  fitJointly,
  strengthShare,
  type FitPoints,
  type JointChoices,
  type JointFit,
  type JointMember,
  type SpectrumFit,
} from "../fit/index.ts";
import { strength } from "../laws/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { chiSquareSurvival } from "../solve/index.ts";
import type { SeriesMember } from "./read-series.ts";
import { referenceState, type ReferenceResult } from "./reference-state.ts";
import { allowSharedNoise } from "./shared-noise.ts";
import type { PowerSeriesIssue } from "./series-issue.ts";

/** One spectrum of the series in the joint fit. */
export interface FittedMember {
  readonly member: SeriesMember;
  readonly points: SelectedPoints;
  readonly fit: SpectrumFit;
  /** Lines whose width could not be told from this spectrum. */
  readonly heldWidths: readonly number[];
}

export interface FittedSeries {
  readonly members: readonly FittedMember[];
  readonly joint: JointFit;
  /** Series limit of each spectrum where each may have its own; null where that fit did not converge. */
  readonly gaps: { readonly value: Float64Array; readonly sigma: Float64Array } | null;
  readonly failed: readonly { readonly label: string; readonly issues: readonly PowerSeriesIssue[] }[];
  readonly notes: readonly Note[];
}

/** Below this many standard errors of its area a line has no width of its own. */
const WEAK = 3;
/** Passes of the joint fit before the last: the tail's laws follow the lines of the pass before. */
const MOST_PASSES = 3;
/** A line with less than this part of what it has in the reference counts as bleached: it must not pull the continuum. */
const UNBLEACHED = 0.995;
/** The same for the reference, against the strength law of its lowest line. */
const ON_STRENGTH_LAW = 0.97;
/** Width laws that agree to this part have settled. */
const SETTLED = 3e-3;
const FEWEST_LINES = 3;
/** Below this probability a common gap is given up. */
const REJECTED = 0.01;
/** Fits that only prepare the next one. */
const ROUGH = {
  maxIterations: 60,
  gradientTolerance: 1e-5,
  costTolerance: 1e-9,
  answer: "condensed",
} as const;
/** Fall of chi square that one more assumption has to bring. */
const CLEARLY = 10;
/** From one power to the next a width changes by this factor at most: a line that swallows its neighbours is none. */
const WIDTH_CHANGE = 1.8;

/** State and points of one spectrum on its way. */
interface Work {
  readonly member: SeriesMember;
  readonly points: SelectedPoints;
  readonly thin: FitPoints;
  state: LadderState;
  /** Areas of the last fit, in the order of the state's lines. */
  area: Float64Array;
  /** Areas of the reference, by n. */
  readonly reference: ReadonlyMap<number, number>;
  /** Areas by n that bleaching has taken from; null for the reference, whose own follow from the strength law. */
  readonly whole: ReadonlyMap<number, number> | null;
  /** By n, from the width at the power before. */
  readonly widthRange: ReadonlyMap<number, readonly [number, number]>;
  /** Whether the tail of tied lines bleaches on as n^10 or is all of one factor. */
  rolls: boolean;
  held: readonly number[];
  /** By n: how far the area moves, in standard errors, with the other tail (one factor, or bleaching on as n^10). */
  leans: ReadonlyMap<number, number>;
}

/**
 * What      All spectra of a series in one fit, from the ladder of the reference: warm starts from the lowest power up on
 *           thinned points with the law held, then the joint fit on thinned points, then on all.
 * Domain    every spectrum has the lines of the reference that lie within it; one with fewer than three on the level law is
 *           left out and named. A line below three standard errors keeps the width it had at the power before, so
 *           that its area is still measured.
 * Null      where the reference shows no series.
 */
export function fitPowerSeries(
  series: readonly SeriesMember[],
  reference: ReferenceResult,
  protocol: Protocol,
  watch: Watch,
): FittedSeries | null {
  const start = referenceState(reference);
  if (start === null || reference.fit === null) return null;
  const tied: Protocol = { ...protocol, series: { ...protocol.series, mode: "tied" } };
  const choices: ModelChoices = {
    background: protocol.background,
    tail: reference.tail !== null,
    continuumOdd: true,
    asymmetry: protocol.lines.asymmetry,
  };
  const unit = series[0]!.spectrum.unit;
  const free: JointChoices = protocol.power.free;
  const settings: Settings = { protocol: tied, unit, choices, free, watch };
  const failed: { label: string; issues: readonly PowerSeriesIssue[] }[] = [];
  const notes: Note[] = [];
  const works: Work[] = [];
  let before = start;
  const seen = new Map(reference.lines.map((line) => [line.n, line.area.value ?? 0]));
  const areas = new Map(seen);
  let whole: ReadonlyMap<number, number> | null = null;
  for (const [i, member] of series.entries()) {
    stopIfCancelled(watch);
    watch.report(0.3 * (i / series.length), `starting at ${member.power_uW} uW`);
    let work = prepare(member, before, start, areas, { seen, whole }, reference.fit.window_eV, tied);
    if (typeof work === "number") {
      failed.push({
        label: member.label,
        issues: [{ code: "power-series/no-lines", facts: { file: member.label, found: work } }],
      });
      continue;
    }
    warmUp(work, settings);
    if (whole === null) {
      const { ns } = work.state;
      if (work.rolls) {
        work = climbBleached(work, settings);
        notes.push(bleachedReference(work, ns[ns.length - 1]!, tied));
        before = withLines(
          before,
          [...new Set([...before.ns, ...work.state.ns])].sort((a, b) => a - b),
        );
      }
      whole = work.rolls ? wholeByLaw(work, tied).areas : seen;
    }
    // What the next power starts from; lines outside this spectrum keep what they had.
    before = mergeStates(before, work.state);
    work.state.ns.forEach((n, j) => areas.set(n, work.area[j]!));
    works.push(work);
  }
  if (works.length === 0) return null;

  const report = (pass: number): void =>
    watch.report(0.3 + 0.12 * pass, `fitting ${works.length} spectra together, pass ${pass + 1}`);
  const prepared = prepareJoint(works, settings, report);
  let gaps: FittedSeries["gaps"] = null;
  let asked = settings;
  if (!free.gap) {
    const test = gapTest(works, settings, prepared);
    gaps = test.gaps;
    if (test.p < REJECTED) {
      notes.push(gapMoves(test));
      asked = { ...settings, free: { ...free, gap: true } };
      prepareJoint(works, asked, () => watch.report(0.8, "a gap for every power"));
    }
  }
  watch.report(0.85, `fitting ${works.length} spectra together, every point`);
  const { joint: fit, ...shared } = allowSharedNoise(
    finishJoint(works, asked),
    works.map(({ member }) => member.power_uW),
    protocol,
  );
  notes.push(...shared.notes);
  if (asked.free.gap) gaps = gapsOf(fit);
  else if (gaps !== null)
    gaps = { ...gaps, sigma: gaps.sigma.map((sigma, a) => sigma * shared.widening[a]!) };
  if (!fit.solution.converged)
    notes.push(
      doubt(
        "power-fit-not-converged",
        "power.fit",
        `The joint fit of ${works.length} spectra did not converge (${fit.solution.termination}).`,
        "leave out the spectra that look different, name the lines (lines.n), or shorten the window",
      ),
    );
  notes.push(...leaningNotes(works));
  const weak = works.filter((work) => work.held.length > 0);
  if (weak.length > 0)
    notes.push(
      assumption(
        "width-held-at-power",
        "power.lines",
        `Too weak for a width of their own, held at that of the power before: ${weak.map((work) => `n = ${work.held.join(", ")} at ${work.member.power_uW} uW`).join("; ")}.`,
        "accumulate longer at these powers",
      ),
    );
  return {
    members: works.map((work, a): FittedMember => ({
      member: work.member,
      points: work.points,
      fit: fit.fits[a]!,
      heldWidths: work.held,
    })),
    joint: fit,
    gaps,
    failed,
    notes,
  };
}

/** Points and lines of one spectrum, or how many lines of the level law lie within it where they are too few. */
function prepare(
  member: SeriesMember,
  before: LadderState,
  start: LadderState,
  beforeArea: ReadonlyMap<number, number>,
  { seen, whole }: { readonly seen: Work["reference"]; readonly whole: Work["whole"] },
  window: readonly [number, number],
  protocol: Protocol,
): Work | number {
  const points = selectPoints(member.spectrum, protocol.mask_eV, window[0], window[1]);
  const m = points.energy.length;
  const low = points.energy[0] ?? Infinity;
  const high = points.energy[m - 1] ?? -Infinity;
  const inside = before.ns.filter((n, j) => {
    const energy = before.include[j]! ? energyOf(n, start.levels) : before.energy[j]!;
    return energy - before.width[j]! / 2 > low && energy + before.width[j]! / 2 < high;
  });
  const state = withLines(before, inside);
  const onLaw = state.include.filter(Boolean).length;
  const area = Float64Array.from(inside, (n) => beforeArea.get(n) ?? 0);
  if (onLaw < FEWEST_LINES) return onLaw;
  return {
    member,
    points,
    thin: thinPoints(points, linesForThinning(state, protocol)),
    state,
    area,
    reference: seen,
    whole,
    widthRange: widthRange(state),
    rolls: false,
    held: [],
    leans: new Map(),
  };
}

function widthRange(state: LadderState): Work["widthRange"] {
  return new Map(
    state.ns.map((n, j) => [n, [state.width[j]! / WIDTH_CHANGE, state.width[j]! * WIDTH_CHANGE]]),
  );
}

/**
 * Widths, areas and tail of this power with the level law held where the reference has it; with the tail all of one
 * factor, and with one that bleaches on as n^10: the better one is kept.
 */
function warmUp(work: Work, settings: Settings): void {
  const { protocol, unit, choices, watch } = settings;
  let best: { fit: SpectrumFit; state: LadderState; rolls: boolean } | null = null;
  const trials: SpectrumFit[] = [];
  for (const rolls of choices.tail ? [false, true] : [false]) {
    work.rolls = rolls;
    const model = withBleachedTail(
      buildModel(work.thin, work.state, protocol, unit, choices),
      work,
      protocol,
    );
    if (rolls && model.spec.tail?.rollOff === undefined) continue;
    const fit = fitOnLaw(work, model, watch);
    trials.push(fit);
    // Areas tell how far bleaching has gone before the second trial asks for it.
    if (!rolls) adopt(work, fit, model.state);
    if (best === null || fit.solution.chi2 < best.fit.solution.chi2 - CLEARLY)
      best = { fit, state: model.state, rolls };
  }
  if (best === null) return;
  if (trials.length === 2) work.leans = leansOf(trials[0]!, trials[1]!);
  work.rolls = best.rolls;
  adopt(work, best.fit, best.state);
}

/** One spectrum on thinned points, its lines where the reference has them: no parameter of the level law. */
function fitOnLaw(work: Work, model: Model, watch: Watch): SpectrumFit {
  const { fits } = fitJointly(
    [
      {
        points: work.thin,
        spec: { ...model.spec, tiedLevels: { ...model.spec.tiedLevels!, count: 0 } },
        start: model.start,
        widthRange: work.widthRange,
      },
    ],
    { gap: true, rydberg: true, defect: true, asymmetry: true },
    { watch, maxIterations: 30, gradientTolerance: 1e-4, costTolerance: 1e-6, answer: "condensed" },
  );
  stopIfCancelled(watch);
  return fits[0]!;
}

/** Change of each area from one fit to the other in standard errors of the larger one. */
function leansOf(a: SpectrumFit, b: SpectrumFit): Map<number, number> {
  const k = a.lines.ns.length;
  const sigma = ({ lines }: SpectrumFit, j: number): number =>
    Math.sqrt(lines.covariance[(2 * k + j) * 4 * k + 2 * k + j]!);
  return new Map(
    a.lines.ns.map((n, j) => {
      const change = Math.abs(a.lines.area[j]! - b.lines.area[j]!) / Math.max(sigma(a, j), sigma(b, j));
      return [n, Number.isFinite(change) ? change : 0];
    }),
  );
}

/** Lines whose area hangs on how the tail above them is thought to bleach. */
function leaningNotes(works: readonly Work[]): Note[] {
  const worst = new Map<number, { by: number; at: number }>();
  for (const { leans, member } of works)
    for (const [n, by] of leans)
      if (by > LEANS && by > (worst.get(n)?.by ?? 0)) worst.set(n, { by, at: member.power_uW });
  if (worst.size === 0) return [];
  const told = [...worst]
    .sort(([a], [b]) => a - b)
    .map(([n, { by, at }]) => `n = ${n} by ${by.toFixed(1)} at ${at} uW`);
  return [
    doubt(
      "lines-lean-on-tail",
      "power.lines",
      `Areas of the highest lines hang on how the tail above them bleaches: a tail of one factor and one that bleaches on as n^10 put them apart, in standard errors: ${told.join("; ")}. The better one is taken; what it could be otherwise is not in the errors.`,
      "take saturation and exponent from the lines below, or resolve more lines (less power, narrower lines)",
    ),
  ];
}

/** Standard errors that count as leaning. */
const LEANS = 1;

/** The state of a spectrum after a fit; weak lines keep the width they had, errors of energies those of the reference. */
function adopt(work: Work, fit: SpectrumFit, before: LadderState): void {
  const after = stateAfter(fit, before);
  const { ns, area } = fit.lines;
  work.area = area;
  work.held = ns.filter((_, j) => !(Math.abs(area[j]!) > WEAK * after.areaSigma[j]!));
  const width = after.width.map((value, j) => {
    const n = ns[j]!;
    return work.held.includes(n) || fit.atBound.includes(n) ? before.width[j]! : value;
  });
  const energy = after.energy.map((value, j) => (work.held.includes(ns[j]!) ? before.energy[j]! : value));
  work.state = {
    ...after,
    width,
    energy,
    energySigma: before.energySigma,
    // A held width has no error of its own and does not speak for the width law.
    widthSigma: after.widthSigma.map((sigma, j) =>
      work.held.includes(ns[j]!) || !(sigma > 0) ? 1e3 : sigma,
    ),
  };
}

/** Lines of the later state with those that it lacks as they were. */
function mergeStates(before: LadderState, after: LadderState): LadderState {
  const pick = (of: (state: LadderState) => Float64Array): Float64Array =>
    Float64Array.from(before.ns, (n, j) => {
      const at = after.ns.indexOf(n);
      return at >= 0 ? of(after)[at]! : of(before)[j]!;
    });
  return {
    ...before,
    energy: pick((state) => state.energy),
    width: pick((state) => state.width),
    widthSigma: before.widthSigma,
    areaSigma: before.areaSigma,
    widths: after.widths,
    factor: after.factor,
  };
}

interface Settings {
  readonly protocol: Protocol;
  readonly unit: "1/cm" | "1";
  readonly choices: ModelChoices;
  readonly free: JointChoices;
  readonly watch: Watch;
}

/** Joint fits until the width laws that the tails follow stand still. */
function prepareJoint(works: readonly Work[], settings: Settings, report: (pass: number) => void): JointFit {
  const { free, watch } = settings;
  let last: JointFit | null = null;
  for (let pass = 0, settled = false; pass < MOST_PASSES && !settled; pass++) {
    report(pass);
    const models = modelsOf(works, settings);
    const fit = fitJointly(membersOf(works, models), free, { watch, ...ROUGH });
    stopIfCancelled(watch);
    settled = true;
    works.forEach((work, a) => {
      const { held } = work;
      const { state } = models[a]!;
      adopt(work, fit.fits[a]!, state);
      // Lines that are weak once stay so, or they would come and go.
      if (last !== null) work.held = held;
      else settled &&= held.join() === work.held.join();
      const width = fit.fits[a]!.laws?.widths.coefficient ?? state.widths.coefficient;
      settled &&= Math.abs(width - state.widths.coefficient) <= SETTLED * Math.abs(width);
    });
    last = fit;
  }
  if (last === null) throw new Error("no pass was made");
  return last;
}

/** The last fit, which ends on every point. */
function finishJoint(works: readonly Work[], settings: Settings): JointFit {
  const { free, watch } = settings;
  const fit = fitJointly(membersOf(works, modelsOf(works, settings)), free, { watch, maxIterations: 60 });
  stopIfCancelled(watch);
  return fit;
}

type Model = ReturnType<typeof buildModel>;

function modelsOf(works: readonly Work[], { protocol, unit, choices }: Settings): Model[] {
  return works.map((work) =>
    withBleachedTail(buildModel(work.points, work.state, protocol, unit, choices), work, protocol),
  );
}

/** Above the last line that can be told apart bleaching goes on as it began: S_n ~ n^10 (ideal blockade). */
const BLEACHING_EXPONENT = 10;

/** n at which 1/(1 + (n/h)^10) of the whole areas is left, by least squares over the lines; null where none bleaches. */
function halfBleachedN(work: Work, protocol: Protocol): number | null {
  const { whole } = work;
  if (whole === null) return wholeByLaw(work, protocol).halfN;
  const { best, unbleached, halfN } = leastHalf(work.state.ns, (half) =>
    overLines(work, (n) => (whole.get(n) ?? 0) / (1 + (n / half) ** BLEACHING_EXPONENT)),
  );
  // Two standard errors: below that the tail of the reference stands.
  return unbleached - best > 4 ? halfN : null;
}

/** Sum over the lines on the law of (area - model)^2/sigma^2; a model of zero is none. */
function overLines({ state, area }: Work, model: (n: number) => number): number {
  let sum = 0;
  state.ns.forEach((n, j) => {
    const value = model(n);
    if (value > 0 && state.include[j]!) sum += ((area[j]! - value) / state.areaSigma[j]!) ** 2;
  });
  return sum;
}

function leastHalf(
  ns: readonly number[],
  cost: (half: number) => number,
): { best: number; unbleached: number; halfN: number } {
  let halfN = 4 * ns[ns.length - 1]!;
  const unbleached = cost(halfN);
  let best = unbleached;
  for (let half = halfN; half > ns[0]!; half *= 0.99) {
    const here = cost(half);
    if (here < best) [best, halfN] = [here, half];
  }
  return { best, unbleached, halfN };
}

/**
 * What the lines of the reference would have if its own power took nothing from them: the strength law times
 * 1/(1 + (n/h)^10), by least squares over the lines, each good to a part of its area that the law itself may be off by.
 */
function wholeByLaw(
  work: Work,
  protocol: Protocol,
): { areas: ReadonlyMap<number, number>; halfN: number | null } {
  const { state, area } = work;
  const { law, base } = protocol.strength;
  const lines = state.ns.flatMap((n, j) =>
    state.include[j]!
      ? [
          {
            n,
            area: area[j]!,
            law: strength(n, state.levels.defect0, law, base),
            weight: 1 / (state.areaSigma[j]! ** 2 + (LAW_OFF * area[j]!) ** 2),
          },
        ]
      : [],
  );
  const height = (half: number): number => {
    let [up, down] = [0, 0];
    for (const line of lines) {
      const left = line.law / (1 + (line.n / half) ** BLEACHING_EXPONENT);
      up += line.weight * line.area * left;
      down += line.weight * left * left;
    }
    return up / down;
  };
  const { best, unbleached, halfN } = leastHalf(state.ns, (half) => {
    const c = height(half);
    return lines.reduce(
      (sum, line) =>
        sum + line.weight * (line.area - (c * line.law) / (1 + (line.n / half) ** BLEACHING_EXPONENT)) ** 2,
      0,
    );
  });
  const c = height(halfN);
  return {
    areas: new Map(state.ns.map((n) => [n, c * strength(n, state.levels.defect0, law, base)])),
    halfN: unbleached - best > 4 ? halfN : null,
  };
}

/** Part of its area by which a line may be off the strength law. */
const LAW_OFF = 0.02;

/**
 * The main job ties the lines above the last one with one factor. Where the lowest power bleaches them as n^10 already,
 * that tail is wrong right above the last line and hides the next ones: with the tail that bleaches on they are added as
 * long as each is seen.
 */
function climbBleached(reference: Work, settings: Settings): Work {
  const { protocol, unit, choices, watch } = settings;
  const { energy } = reference.points;
  const end = energy[energy.length - 1]!;
  let work = reference;
  while (protocol.lines.n === "auto") {
    const { ns, levels } = work.state;
    const next = ns[ns.length - 1]! + 1;
    if (next > protocol.lines.max_n || !(energyOf(next, levels) < end)) break;
    const state = withLines(work.state, [...ns, next]);
    const { areas, halfN } = wholeByLaw(work, protocol);
    const left = 1 / (1 + (next / (halfN ?? Infinity)) ** BLEACHING_EXPONENT);
    const lowest = ns[0]!;
    const law = strength(next, levels.defect0, protocol.strength.law, protocol.strength.base);
    const first = strength(lowest, levels.defect0, protocol.strength.law, protocol.strength.base);
    const trial: Work = {
      ...work,
      thin: thinPoints(work.points, linesForThinning(state, protocol)),
      state,
      area: Float64Array.from([...work.area, (areas.get(lowest)! * left * law) / first]),
      widthRange: widthRange(state),
    };
    const model = withBleachedTail(buildModel(trial.thin, state, protocol, unit, choices), trial, protocol);
    const fit = fitOnLaw(trial, model, watch);
    if (!(significances(fit)[ns.length]! > leastSignificance(energy.length))) break;
    adopt(trial, fit, model.state);
    work = trial;
  }
  return work;
}

/** What the lowest power takes already, in words. */
function bleachedReference(work: Work, before: number, protocol: Protocol): Note {
  const { ns } = work.state;
  const { areas } = wholeByLaw(work, protocol);
  const weak = ns.filter((n, j) => work.area[j]! < HALF * areas.get(n)!);
  const top = ns[ns.length - 1]!;
  const left = Math.max(0, work.area[ns.length - 1]! / areas.get(top)!);
  const added =
    top === before
      ? ""
      : ` With a tail that bleaches on, n = ${top === before + 1 ? top : `${before + 1} to ${top}`} could be told beside those of the lowest spectrum on its own.`;
  const saturated =
    weak.length === 0 ? "" : ` S of n = ${weak.join(", ")} rests on little of the line and is loose.`;
  return doubt(
    "reference-bleached",
    "power.spectra",
    `The lowest power, ${work.member.power_uW} uW, bleaches the highest lines already: n = ${top} has ${left.toFixed(2)} of what the strength law of the lower lines gives it.${saturated}${added} Lines above n = ${top} may be hidden by that light.`,
    "add a spectrum at a much lower power",
  );
}

/** Less than this part of a line is too little to say how much there was. */
const HALF = 0.5;

/** Tail and continuum where light has bleached the highest lines. */
function withBleachedTail(model: Model, work: Work, protocol: Protocol): Model {
  const { tail } = model.spec;
  const halfN = work.rolls ? halfBleachedN(work, protocol) : null;
  if (tail === null || halfN === null) return withUnbleachedStrength(model, work);
  const rollOff = { halfN, exponent: BLEACHING_EXPONENT };
  return withUnbleachedStrength({ ...model, spec: { ...model.spec, tail: { ...tail, rollOff } } }, work);
}

/**
 * The strength law that continuum and tail follow is that of the lines which have not bleached: the lowest ones, up to
 * the first that has lost more than a part of what the law gives it. Light that blocks an exciton does not block the
 * continuum.
 */
function withUnbleachedStrength(model: Model, work: Work): Model {
  const { tail, ns } = model.spec;
  if (tail === null) return model;
  const { area, reference } = work;
  const onLaw = ns.map((_, j) => j).filter((j) => model.state.include[j]!);
  const { law, base } = tail.strength;
  const ratio = (j: number): number => area[j]! / strength(ns[j]!, tail.levels.defect0, law, base);
  const first = onLaw[0]!;
  const keeps = (j: number): boolean => {
    const before = reference.get(ns[j]!);
    const kept = before === undefined || area[j]! > UNBLEACHED * before;
    return kept && ratio(j) > ON_STRENGTH_LAW * ratio(first);
  };
  const end = onLaw.findIndex((j) => !keeps(j));
  // The lowest line alone where even that has bleached: no other is nearer to the truth.
  const whole = new Set(end < 0 ? onLaw : onLaw.slice(0, Math.max(1, end)));
  const share = strengthShare(
    {
      ns,
      value: model.state.areaSigma,
      sigma: model.state.areaSigma,
      include: ns.map((_, j) => whole.has(j)),
    },
    tail.strength,
    tail.levels.defect0,
  );
  return { ...model, spec: { ...model.spec, tail: { ...tail, strengthShare: share } } };
}

function membersOf(works: readonly Work[], models: readonly Model[]): JointMember[] {
  const count = models[0]!.spec.tiedLevels!.count;
  const values = models[0]!.spec.tiedLevels!.values;
  return works.map((work, a): JointMember => {
    const { spec, start } = models[a]!;
    const reach = new Map(start.reach);
    // The energy of a line off the law that is hardly seen stays where it was.
    for (const n of work.held) reach.set(n, 0);
    return {
      points: work.points,
      spec: { ...spec, tiedLevels: { ...spec.tiedLevels!, values, count } },
      start: { ...start, reach },
      heldWidths: work.held,
      widthRange: new Map([...work.widthRange].filter(([n]) => !work.held.includes(n))),
    };
  });
}

interface GapTest {
  readonly gaps: FittedSeries["gaps"];
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly p: number;
}

/** Does each spectrum want a gap of its own? On the same models as the shared one, from where it ended. */
function gapTest(works: readonly Work[], settings: Settings, shared: JointFit): GapTest {
  const { free, watch } = settings;
  watch.report(0.7, "a gap for every power");
  const own = fitJointly(
    membersOf(works, modelsOf(works, settings)),
    { ...free, gap: true },
    { watch, ...ROUGH },
  );
  stopIfCancelled(watch);
  const degreesOfFreedom = works.length - 1;
  // Noise that neighbours share makes differences of chi square larger than those of white noise.
  const asOne = works.reduce((sum, { points }) => sum + (points.pointsAsOne ?? 1), 0) / works.length;
  const chi2 = Math.max(0, shared.solution.chi2 - own.solution.chi2) / asOne;
  const decided = own.solution.converged && shared.solution.converged && degreesOfFreedom > 0;
  return {
    gaps: own.solution.converged ? gapsOf(own) : null,
    chi2,
    degreesOfFreedom,
    p: decided ? chiSquareSurvival(chi2, degreesOfFreedom) : 1,
  };
}

function gapsOf(fit: JointFit): NonNullable<FittedSeries["gaps"]> {
  return {
    value: Float64Array.from(fit.fits, ({ solution }) => solution.theta[0]!),
    sigma: Float64Array.from(fit.fits, ({ solution }) => Math.sqrt(solution.covariance[0]!)),
  };
}

function gapMoves({ chi2, degreesOfFreedom, p }: GapTest): Note {
  return doubt(
    "gap-moves-with-power",
    "power.other.gap_shift_eV",
    `A gap of its own for every power lowers chi square by ${chi2.toPrecision(3)} for ${degreesOfFreedom} degrees of freedom (p = ${p.toExponential(1)}): no common gap holds, and each spectrum was given its own.`,
    "look at the gap against power: heating and a drift of the light axis move it, blockade does not",
  );
}
