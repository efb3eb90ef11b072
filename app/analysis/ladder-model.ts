import {
  backgroundColumns,
  isConstrained,
  levelLink,
  smearedColumns,
  smearedKnots,
  strengthShare,
  widthLink,
  type FitPoints,
  type FitStart,
  type FringeWave,
  type LawLinks,
  type LevelValues,
  type LinkData,
  type ModelSpec,
  type SpectrumFit,
  type TailSpec,
  type WidthValues,
} from "../fit/index.ts";
import { levelEnergy, levelSpacing, WIDTH, widthLaw } from "../laws/index.ts";
import type { BackgroundTerm, Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { constraintSpec, lineRules, speaking, tiedEnergies } from "./constraints.ts";
import { waveAfter } from "./fringes.ts";
import { slitOf } from "./instrument.ts";

/**
 * What is known of the series so far: start values for the next fit, and the errors that weigh the laws the tail is
 * tied to. Arrays run with `ns`.
 */
export interface LadderState {
  readonly ns: readonly number[];
  readonly energy: Float64Array;
  readonly energySigma: Float64Array;
  readonly width: Float64Array;
  readonly widthSigma: Float64Array;
  readonly areaSigma: Float64Array;
  /** Whether the level law speaks for this line. */
  readonly include: readonly boolean[];
  readonly levels: LevelValues;
  readonly widths: WidthValues;
  readonly asymmetry: number;
  readonly factor: number;
  /** Additive fringes, once their period is known. */
  readonly fringes?: FringeWave;
}

export interface ModelChoices {
  readonly background: readonly BackgroundTerm[];
  readonly tail: boolean;
  readonly continuumOdd: boolean;
  readonly asymmetry: Protocol["lines"]["asymmetry"];
  /** What lines have lost is looked for between them (smeared-series.ts), and the continuum with it; false by default. */
  readonly smeared?: boolean;
  /** n whose widths (areas) are the law itself; absent: none. */
  readonly tiedWidths?: readonly number[];
  readonly tiedAreas?: readonly number[];
}

/** Widths of this many spacings make neighbouring lines one smooth band (ripple 2 exp(-3 pi), 2e-4 of its height). */
const BLENDED = 3;
const MOST_TIED_LINES = 60;

/** The model of one spectrum for this state, its laws linked to the free lines. */
export function buildModel(
  points: FitPoints,
  state: LadderState,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
): { spec: ModelSpec; state: LadderState; start: FitStart } {
  const rules = lineRules(state, protocol, choices);
  const speakers = speaking(state.include, rules.energy, false, 2);
  const defectCount = freeDefects(protocol, speakers.filter(Boolean).length);
  const energies: LinkData = {
    ns: state.ns,
    value: state.energy,
    sigma: state.energySigma,
    include: speakers,
  };
  const levels = sensibleLevels(levelLink(energies, state.levels, 2 + defectCount), state);
  const widths = widthLink(
    {
      ns: state.ns,
      value: state.width,
      sigma: state.widthSigma,
      include: speaking(state.include, rules.width, choices.tiedWidths !== undefined, 2),
    },
    {
      ...state.widths,
      base: protocol.width.base,
      floorKind: protocol.width.floor_kind === "gaussian" ? "gaussian" : "lorentzian",
    },
    { floor: protocol.width.floor_kind !== "none", exponent: protocol.width.exponent === "free" },
    levels.values.defect0,
  );
  const updated: LadderState = { ...state, levels: levels.values, widths: widths.values };
  const links: LawLinks = {
    levels: levels.values,
    levelLink: levels.link,
    widths: widths.values,
    widthLink: widths.link,
    strengthShare: strengthShare(
      {
        ns: state.ns,
        value: state.areaSigma,
        sigma: state.areaSigma,
        include: speaking(strengthSpeakers(state, choices), rules.area, choices.tiedAreas !== undefined, 1),
      },
      { law: protocol.strength.law, base: protocol.strength.base },
      levels.values.defect0,
    ),
    strength: { law: protocol.strength.law, base: protocol.strength.base },
  };
  const last = points.energy.length - 1;
  const { constraints, asymmetry } = constraintSpec(updated, protocol, choices, rules, links, [
    points.energy[0]!,
    points.energy[last]!,
  ]);
  const slit = slitOf(protocol);
  const tied = protocol.series.mode === "tied";
  const spec: ModelSpec = {
    ns: state.ns,
    gaussStd: slit.stdAt(levels.values.gap),
    ...(slit.grows ? { lineStds: Float64Array.from(state.energy, (e) => slit.stdAt(e)) } : {}),
    instrumentLorentz: protocol.lines.instrument_lorentz_fwhm_eV,
    asymmetry,
    tiedLevels: tied
      ? { values: levels.values, count: 2 + defectCount, tiedNs: tiedEnergies(state, protocol) }
      : null,
    tail: choices.tail ? describeTail(points, updated, protocol, links, choices) : null,
    background: modelBackground(points.energy, updated, protocol, unit, choices),
    ...(isConstrained(constraints) ? { constraints } : {}),
  };
  // A line that leaves its own place has become another line or part of the background.
  const reach = new Map(
    state.ns.map((n, j) => [
      n,
      Math.min(0.45 * spacing(n, levels.values), 2 * state.width[j]! + 3 * state.energySigma[j]!),
    ]),
  );
  return {
    spec,
    state: updated,
    start: {
      lines: state.ns.map((n, j) => ({ n, energy: state.energy[j]!, width: state.width[j]! })),
      asymmetry: state.asymmetry,
      factor: state.factor,
      reach,
    },
  };
}

/** The background on these energies, and with it what the series has lost from its lines where that is looked for. */
export function modelBackground(
  energy: Float64Array,
  state: LadderState,
  protocol: Protocol,
  unit: Spectrum["unit"],
  choices: ModelChoices,
  frame?: readonly [number, number],
): ReturnType<typeof backgroundColumns> {
  const { gap } = state.levels;
  const columns = backgroundColumns(choices.background, energy, unit, gap, frame, state.fringes ?? null);
  if (choices.smeared !== true || !choices.tail) return columns;
  const smeared = smearedColumns(
    energy,
    {
      levels: state.levels,
      widths: state.widths,
      strength: { law: protocol.strength.law, base: protocol.strength.base },
      envelope: envelopeOf(protocol),
      top: state.ns[state.ns.length - 1]!,
      asymmetry: state.asymmetry,
      lorentz: protocol.lines.instrument_lorentz_fwhm_eV,
    },
    unit,
  );
  return [...columns, ...smeared];
}

/** Lines that have lost strength to their surroundings do not say what the law is. */
function strengthSpeakers(state: LadderState, choices: ModelChoices): readonly boolean[] {
  const whole = smearedKnots(state.ns[state.ns.length - 1]!)[0]!;
  if (choices.smeared !== true || state.ns.filter((n) => n <= whole).length < 2) return state.include;
  return state.ns.map((n) => n <= whole);
}

/** Whether a law fitted anew is still the law of this ladder. */
export function isSensible(levels: LevelValues, state: LadderState): boolean {
  const { rydberg, defect0 } = state.levels;
  return (
    levels.rydberg > 0.2 * rydberg &&
    levels.rydberg < 5 * rydberg &&
    Math.abs(levels.defect0 - defect0) < 0.8 &&
    state.ns[0]! - levels.defect0 > 0.2 &&
    spacing(state.ns[0]!, levels) > 0
  );
}

/** A law that the lines at hand do not support (too few, or one astray) must not carry the tail away. */
function sensibleLevels(
  fitted: ReturnType<typeof levelLink>,
  state: LadderState,
): ReturnType<typeof levelLink> {
  if (isSensible(fitted.values, state)) return fitted;
  return { values: state.levels, link: { ...fitted.link, gain: new Float64Array(fitted.link.gain.length) } };
}

/** Defect parameters that these lines can carry beside gap and Rydberg energy. */
function freeDefects(protocol: Protocol, lines: number): number {
  const wanted = protocol.series.defect === "none" ? 0 : protocol.series.defect === "constant" ? 1 : 2;
  return Math.max(0, Math.min(wanted, lines - 3));
}

function describeTail(
  points: FitPoints,
  state: LadderState,
  protocol: Protocol,
  links: LawLinks,
  choices: ModelChoices,
): TailSpec {
  const fromN = state.ns[state.ns.length - 1]! + 1;
  return {
    fromN,
    toN:
      protocol.tail.cutoff_n === null
        ? lastTiedLine(state, fromN, protocol.lines.instrument_lorentz_fwhm_eV)
        : Math.max(fromN - 1, protocol.tail.cutoff_n),
    band: protocol.tail.cutoff_n === null && choices.smeared !== true,
    ...(choices.smeared === true ? { continuum: false } : {}),
    below: linesBelow(points, state, protocol),
    levels: state.levels,
    levelLink: links.levelLink,
    widths: state.widths,
    widthLink: links.widthLink,
    strengthShare: links.strengthShare,
    strength: links.strength,
    envelope: envelopeOf(protocol),
    continuumOdd: choices.continuumOdd,
    factorFree: true,
    factor: state.factor,
  };
}

function envelopeOf(protocol: Protocol): TailSpec["envelope"] {
  if (protocol.material.dimension < 2.5) return "allowed-2d";
  return protocol.material.envelope === "P" ? "forbidden-3d" : "allowed-3d";
}

/**
 * Lines are summed one by one until they run together, however coarse the points: a few points between lines see a line or
 * miss it, and not the mean.
 */
function lastTiedLine(state: LadderState, fromN: number, lorentz: number): number {
  const out = new Float64Array(WIDTH.size);
  for (let n = fromN; n < fromN + MOST_TIED_LINES; n++) {
    widthLaw(n, state.levels.defect0, state.widths, out);
    if (out[WIDTH.width]! + lorentz >= BLENDED * spacing(n, state.levels)) return n - 1;
  }
  return fromN + MOST_TIED_LINES - 1;
}

/** Lines of the series below the lowest free one, which reach into the window with their wings. */
function linesBelow(points: FitPoints, state: LadderState, protocol: Protocol): number[] {
  const lowest = protocol.material.first_n ?? (protocol.material.envelope === "P" ? 2 : 1);
  const below: number[] = [];
  for (let n = lowest; n < state.ns[0]!; n++) {
    if (n - state.levels.defect0 > 0.3 && energyOf(n, state.levels) < points.energy[0]!) below.push(n);
  }
  return below;
}

/** The state after a fit: values and errors of the lines it fitted. */
export function stateAfter(fit: SpectrumFit, before: LadderState): LadderState {
  const { lines, laws } = fit;
  const k = lines.ns.length;
  const error = (block: number, j: number): number => {
    const i = block * k + j;
    const variance = lines.covariance[i * 4 * k + i]!;
    return variance > 0 ? Math.sqrt(variance) : NaN;
  };
  // A line held at a bound has no error of its own; it must not steer the laws.
  const known = (values: Float64Array): Float64Array =>
    values.map((value) => (Number.isFinite(value) ? value : 1e3));
  return {
    ...before,
    energy: lines.energy,
    width: lines.width,
    energySigma: known(Float64Array.from(lines.ns, (_, j) => error(0, j))),
    widthSigma: known(Float64Array.from(lines.ns, (_, j) => error(1, j))),
    areaSigma: known(Float64Array.from(lines.ns, (_, j) => error(2, j))),
    levels: laws?.levels ?? before.levels,
    widths: laws?.widths ?? before.widths,
    asymmetry: fit.asymmetry.value,
    factor: fit.factor?.value ?? before.factor,
    ...(before.fringes === undefined ? {} : { fringes: waveAfter(fit, before.fringes) }),
  };
}

/** The same state with lines added at the top (from the laws) or taken away. */
export function withLines(state: LadderState, ns: readonly number[]): LadderState {
  const out = new Float64Array(WIDTH.size);
  const pick = (values: Float64Array, otherwise: (n: number) => number): Float64Array =>
    Float64Array.from(ns, (n) => {
      const j = state.ns.indexOf(n);
      return j >= 0 ? values[j]! : otherwise(n);
    });
  const widthAt = (n: number): number => {
    widthLaw(n, state.levels.defect0, state.widths, out);
    return Math.max(out[WIDTH.width]!, 1e-9);
  };
  const last = state.ns.length - 1;
  return {
    ...state,
    ns,
    energy: pick(state.energy, (n) => energyOf(n, state.levels)),
    width: pick(state.width, widthAt),
    energySigma: pick(state.energySigma, (n) => widthAt(n)),
    widthSigma: pick(state.widthSigma, (n) => widthAt(n)),
    areaSigma: pick(state.areaSigma, () => state.areaSigma[last]! * 3),
    include: ns.map((n) => {
      const j = state.ns.indexOf(n);
      return j >= 0 ? state.include[j]! : true;
    }),
  };
}

export function energyOf(n: number, levels: LevelValues): number {
  return levelEnergy(n, levels.gap, levels.rydberg, levels.defect0, levels.defect2);
}

export function spacing(n: number, levels: LevelValues): number {
  return levelSpacing(n, levels.rydberg, levels.defect0, levels.defect2);
}
