import { assumption, doubt, type Note, type Watch } from "../base/index.ts";
import {
  fitTransmittance,
  slitBias,
  type FittedValue,
  type FitPoints,
  type LightParts,
  type MeasuredLight,
} from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { Spectrum } from "../spectrum/index.ts";
import { fitEveryPoint, type FitDomain, type FullFit } from "./fit-full.ts";
import { ADDITIVE_RANGE, fringePhase, plateReflectance, type FringePhase } from "./fringes.ts";
import { interpolateColumn } from "../lines/index.ts";
import { transmittanceFromDepth } from "../units/index.ts";
import { slitOf, withoutSlit } from "./instrument.ts";
import { depthPerSignal } from "./light.ts";
import { modelBackground, type ModelChoices } from "./ladder-model.ts";
import type { SelectedPoints } from "./select-points.ts";

/** The fit in the domain that was chosen, `full.domain`, and its points. */
export interface DomainFit {
  readonly full: FullFit;
  /**
   * In the transmittance domain T <= 0 is among the points, and signal and sigma are those of T linearised about the fit,
   * so that a trial fit of the signal starts from the same place.
   */
  readonly points: SelectedPoints;
}

/** Above this relative noise of T the logarithm is biased by more than half a percent of an optical depth. */
const NOISY = 0.1;
/** A loss of area below this part is not worth a doubt. */
const LEAST_BIAS = 5e-4;
const ABOUT = "fit.domain";

/**
 * What      After the fit of the signal has settled: whether the light itself has to be fitted, and the fit of it. A slit
 *           averages light, not absorption, and the logarithm of noisy light is biased and does not exist at T <= 0.
 * Domain    `auto` takes the transmittance domain where transmittance was read and its noise exceeds a tenth of it somewhere
 *           in the window, and wherever a slit is given and the optical depth is known. Where absorption was read,
 *           T = exp(-optical depth) is the light; its noise follows from that of the depth and the model's T.
 */
export function fitInDomain(
  full: FullFit,
  spectrum: Spectrum,
  points: SelectedPoints,
  protocol: Protocol,
  choices: ModelChoices,
  watch: Watch,
  report: (pass: number) => void,
): DomainFit {
  const instrument = slitOf(protocol);
  const { gap } = full.state.levels;
  const slit = instrument.fwhmAt(gap);
  const depth = depthPerSignal(spectrum);
  const noise = noiseOfLight(spectrum, points);
  const { domain } = protocol.lines;
  const stray = protocol.signal.stray_light;
  const plate = plateFringes(full, spectrum, protocol, depth);
  const needed =
    slit > 0 ||
    (stray !== null && stray !== 0) ||
    plate !== null ||
    (spectrum.transmittance !== null && noise.noisy + noise.dark > 0);
  const asSignal = (notes: readonly Note[]): DomainFit => ({
    full: {
      ...full,
      domain: {
        name: "alpha",
        notes: [...notes, ...(needed ? biasNotes(full, slit, depth, noise, stray) : [])],
        answered: [],
      },
    },
    points,
  });
  if (domain === "alpha" && needed) {
    const masked = withoutDarkness(full, spectrum, points, protocol, choices, watch, report);
    if (masked !== null) return masked;
  }
  if (domain === "alpha" || (domain === "auto" && !needed)) return asSignal([]);
  if (depth === null) return asSignal([noDepthNote()]);

  const selected =
    spectrum.transmittance === null ? points : everyReading(spectrum, points, protocol.mask_eV);
  const light = {
    ...lightOf(spectrum, selected, full, depth, instrument.stdAt(gap)),
    slitReference: instrument.grows ? gap : null,
    stray: stray === null ? null : { value: stray === "free" ? STRAY_START : stray, free: stray === "free" },
    fringes: plate,
  };
  const frame = [light.energy[0]!, light.energy[light.energy.length - 1]!] as const;
  // Fringes of the light itself take the place of those added to the signal.
  const { fringes: _, ...state } = full.state;
  const how: ModelChoices =
    plate === null
      ? choices
      : { ...choices, background: choices.background.filter((term) => term.term !== "fringes") };
  const fitLight = (dispersion: boolean): LightFit => {
    let last = full.fit;
    let linearised: FitPoints = selected;
    let parts: DomainParts = { rows: [], fringes: null, atZero: false };
    const first = plate === null ? light : { ...light, fringes: { ...plate, dispersion } };
    const measured = fitEveryPoint(
      selected,
      plate === null ? full.state : state,
      withoutSlit(protocol),
      spectrum.unit,
      how,
      watch,
      report,
      (model) => {
        const columns = (energy: Float64Array): ReturnType<typeof modelBackground> =>
          modelBackground(energy, model.state, protocol, spectrum.unit, how, frame);
        const started = startFrom(first, parts);
        const done = fitTransmittance(started, model.spec, columns, model.start, last, { watch });
        last = done.fit;
        parts = partsOf(done);
        linearised = done.linearised;
        return done.fit;
      },
    );
    return { measured, linearised, parts, dispersion: plate !== null && dispersion };
  };
  const { measured, linearised, parts, dispersion } =
    plate === null ? fitLight(false) : byPhase(fringePhase(protocol), fitLight);
  if (!measured.fit.solution.converged && domain === "auto" && full.fit.solution.converged)
    return asSignal([failedNote()]);
  return {
    full: {
      ...measured,
      domain: {
        name: "transmittance",
        notes: [
          domainNote(spectrum, protocol, slit, noise, depth, plate !== null),
          ...(parts.atZero ? [strayNote()] : []),
          ...(protocol.lines.instrument_lorentz_fwhm_eV > 0 ? [lorentzNote()] : []),
        ],
        answered: ["saturated-points", "low-transmission"],
        // With the standard errors that the protocol asks for.
        parts: measured.fit.light === undefined ? parts.rows : partsOf(measured.fit.light).rows,
        ...(parts.fringes === null ? {} : { fringes: parts.fringes.period, dispersion }),
      },
    },
    points: { ...linearised, place: selected.place },
  };
}

interface LightFit {
  readonly measured: FullFit;
  readonly linearised: FitPoints;
  readonly parts: DomainParts;
  readonly dispersion: boolean;
}

/** The index that the fringes see: as asked, or the lines' own unless that leaves a misfit and a constant one does not. */
function byPhase(phase: FringePhase, fit: (dispersion: boolean) => LightFit): LightFit {
  const first = fit(phase !== "constant");
  const { chi2, degreesOfFreedom } = first.measured.fit.solution;
  if (phase !== "auto" || chi2 < degreesOfFreedom + MISFIT_DEVIATIONS * Math.sqrt(2 * degreesOfFreedom))
    return first;
  const other = fit(false);
  const { solution } = other.measured.fit;
  return solution.converged && solution.chi2 < chi2 - CLEARLY_LESS ? other : first;
}

/** Chi square beyond its expectation, in its standard deviations. */
const MISFIT_DEVIATIONS = 4;
const CLEARLY_LESS = 10;

/** Beyond this part of the points the light is noisy everywhere, and a mask would leave too little. */
const MOST_MASKED = 0.5;

/**
 * A fit of the absorption that leaves out where the fitted light falls below ten times its noise, whatever single readings
 * say: readings chosen by their own noise bias what is left, and so does the logarithm of noisy light. Null where nothing,
 * or too much, is as dark as that.
 */
function withoutDarkness(
  full: FullFit,
  spectrum: Spectrum,
  points: SelectedPoints,
  protocol: Protocol,
  choices: ModelChoices,
  watch: Watch,
  report: (pass: number) => void,
): DomainFit | null {
  const { transmittance } = spectrum;
  if (transmittance === null || protocol.signal.stray_light !== null) return null;
  const { thickness_cm: depth, reflectance, surface } = transmittance;
  const all = everyReading(spectrum, points, protocol.mask_eV);
  const model = new Float64Array(all.energy.length);
  interpolateColumn(points.energy, full.fit.solution.fitted, all.energy, 0, model.length, model);
  const noise = model.map(
    (signal, i) =>
      transmittance.sigma[all.place[i]!]! / transmittanceFromDepth(depth * signal, reflectance, surface),
  );
  const keep = Array.from(noise, (one) => one < NOISY);
  const masked = keep.filter((one) => !one).length;
  if (masked === 0 || masked > MOST_MASKED * keep.length) return null;
  // Ten standard deviations above zero nothing is without a logarithm by chance.
  const bright = all.signal.map((signal, i) => (keep[i]! && Number.isFinite(signal) ? 1 : 0));
  const pick = (values: Float64Array): Float64Array => values.filter((_, i) => bright[i] === 1);
  const lit: SelectedPoints = {
    place: all.place.filter((_, i) => bright[i] === 1),
    energy: pick(all.energy),
    // The mean of -ln T under noise is too large by half the square of sigma_T/T.
    signal: pick(all.signal.map((signal, i) => signal - (0.5 * noise[i]! * noise[i]!) / depth)),
    sigma: pick(all.sigma),
  };
  const current = fitEveryPoint(lit, full.state, protocol, spectrum.unit, choices, watch, report);
  if (!current.fit.solution.converged) return null;
  const note = assumption(
    "dark-points-masked",
    ABOUT,
    `The absorption was fitted without ${countOf(masked)} where the fitted light is below ten times its noise; single readings did not decide.`,
    "set lines.domain=auto or transmittance, which use these points too",
  );
  return {
    full: {
      ...current,
      domain: { name: "alpha", notes: [note], answered: ["saturated-points", "low-transmission"] },
    },
    points: lit,
  };
}

/** Stray light that is not known starts here. */
const STRAY_START = 1e-3;

type Fringes = NonNullable<MeasuredLight["fringes"]>;

interface DomainParts {
  readonly rows: NonNullable<FitDomain["parts"]>;
  readonly fringes: Fringes["start"] | null;
  readonly stray?: number;
  readonly atZero: boolean;
}

/**
 * Fringes of the light, where they were found, the surfaces are known and the optical depth varies too much for adding
 * them to the signal (or the light is fitted anyway): -ln T is about alpha d - 2 v R x cos phi.
 */
function plateFringes(
  full: FullFit,
  spectrum: Spectrum,
  protocol: Protocol,
  depth: number | null,
): Fringes | null {
  const wave = full.state.fringes;
  const R = plateReflectance(spectrum, protocol);
  if (wave === undefined || R === null || !(R > 0) || depth === null) return null;
  const { fitted } = full.fit.solution;
  const low = Math.min(...fitted) * depth;
  const high = Math.max(...fitted) * depth;
  if (high - low < ADDITIVE_RANGE && protocol.lines.domain !== "transmittance") return null;
  const mean = fitted.reduce((sum, value) => sum + Math.exp(-Math.max(0, depth * value)), 0) / fitted.length;
  const visibility = (depth * Math.hypot(wave.cos, wave.sin)) / (2 * R * mean);
  return {
    reflectance: R,
    reference: wave.reference,
    dispersion: true,
    start: {
      visibility: Math.min(0.95, Math.max(0.02, visibility)),
      period: wave.period,
      phase: Math.atan2(wave.sin, -wave.cos),
    },
  };
}

/** The light with its own parameters where the pass before left them. */
function startFrom(light: MeasuredLight, parts: DomainParts): MeasuredLight {
  const { fringes, stray } = light;
  return {
    ...light,
    fringes:
      fringes === null || fringes === undefined || parts.fringes === null
        ? (fringes ?? null)
        : { ...fringes, start: parts.fringes },
    stray:
      stray?.free === true && parts.stray !== undefined
        ? { value: parts.stray, free: true }
        : (stray ?? null),
  };
}

function partsOf({ fringes, stray }: LightParts): DomainParts {
  const row = (
    term: string,
    name: string,
    unit: string,
    { value, sigma }: FittedValue,
  ): DomainParts["rows"][number] => ({ term, name, unit, value, sigma });
  return {
    rows: [
      ...(fringes === null
        ? []
        : [
            row("fringes", "visibility", "1", fringes.visibility),
            row("fringes", "fringe_period", "eV", fringes.period),
            row("fringes", "phase", "rad", fringes.phase),
          ]),
      ...(stray === null ? [] : [row("stray-light", "stray", "1", stray)]),
    ],
    fringes:
      fringes === null
        ? null
        : {
            visibility: fringes.visibility.value,
            period: fringes.period.value,
            phase: fringes.phase.value,
          },
    ...(stray === null ? {} : { stray: Math.max(stray.value, 1e-6) }),
    atZero: stray?.atZero ?? false,
  };
}

function lorentzNote(): Note {
  return assumption(
    "lorentz-instrument-on-absorption",
    "lines",
    "The Lorentzian width of the instrument is taken off the widths of the absorption, which is exact for weak lines only; where a line takes much of the light it leaves a little of its area out.",
    "keep the peak optical depth below about 0.3, or use a laser line far narrower than the lines",
  );
}

function strayNote(): Note {
  return assumption(
    "stray-light-none",
    ABOUT,
    "Stray light was free and ended at zero: the data show none.",
    "set signal.stray_light=null to leave it out",
  );
}

interface Noise {
  /** Points with sigma_T above a tenth of T, the largest sigma_T/T, and points with T <= 0. */
  readonly noisy: number;
  readonly largest: number;
  readonly dark: number;
}

/** From the smoothed T, as the standard deviation of the signal has it. */
function noiseOfLight(spectrum: Spectrum, points: SelectedPoints): Noise {
  if (spectrum.transmittance === null) return { noisy: 0, largest: 0, dark: 0 };
  const d = spectrum.transmittance.thickness_cm;
  let noisy = 0;
  let largest = 0;
  for (const sigma of points.sigma) {
    if (sigma * d > NOISY) noisy++;
    largest = Math.max(largest, sigma * d);
  }
  const last = points.place.length - 1;
  let dark = 0;
  for (let i = points.place[0]!; i <= points.place[last]!; i++)
    if (spectrum.transmittance.sigma[i]! > 0 && !(spectrum.transmittance.value[i]! > 0)) dark++;
  return { noisy, largest, dark };
}

/** The points of the window with those that have no logarithm. */
function everyReading(
  spectrum: Spectrum,
  points: SelectedPoints,
  masks: Protocol["mask_eV"],
): SelectedPoints {
  const { value, sigma } = spectrum.transmittance!;
  const place: number[] = [];
  for (let i = points.place[0]!; i <= points.place[points.place.length - 1]!; i++) {
    const energy = spectrum.energy_eV[i]!;
    if (!(sigma[i]! > 0) || !Number.isFinite(value[i]!)) continue;
    if (masks.some(([from, to]) => energy >= from && energy <= to)) continue;
    place.push(i);
  }
  const pick = (values: Float64Array): Float64Array => Float64Array.from(place, (i) => values[i]!);
  return {
    place: Int32Array.from(place),
    energy: pick(spectrum.energy_eV),
    signal: pick(spectrum.signal),
    sigma: pick(spectrum.sigma),
    ...(points.pointsAsOne === undefined ? {} : { pointsAsOne: points.pointsAsOne }),
  };
}

function lightOf(
  spectrum: Spectrum,
  points: SelectedPoints,
  full: FullFit,
  depth: number,
  slitStd: number,
): MeasuredLight {
  const { transmittance } = spectrum;
  const common = { energy: points.energy, depthPerSignal: depth, slitStd };
  if (transmittance !== null) {
    const pick = (values: Float64Array): Float64Array => Float64Array.from(points.place, (i) => values[i]!);
    return {
      ...common,
      value: pick(transmittance.value),
      sigma: pick(transmittance.sigma),
      surface: transmittance.surface,
      reflectance: transmittance.reflectance,
    };
  }
  const { fitted } = full.fit.solution;
  return {
    ...common,
    value: points.signal.map((signal) => Math.exp(-depth * signal)),
    // Weights from the model: those of the single reading would follow its noise.
    sigma: points.sigma.map((sigma, i) => depth * sigma * Math.exp(-depth * fitted[i]!)),
    surface: "none",
    reflectance: 0,
  };
}

const percent = (part: number): string => `${(100 * part).toPrecision(2)} %`;
const ueV = (value: number): string => `${Number((1e6 * value).toPrecision(4))} µeV`;
const countOf = (number: number): string => `${number} point${number === 1 ? "" : "s"}`;

function domainNote(
  spectrum: Spectrum,
  protocol: Protocol,
  slit: number,
  noise: Noise,
  depth: number,
  fringes: boolean,
): Note {
  const reasons = [
    ...(protocol.lines.domain === "transmittance" ? ["the protocol asks for it"] : []),
    ...(slit === 0 ? [] : [`the slit of ${ueV(slit)} averages light, not absorption`]),
    ...(fringes ? ["fringes are weaker where the crystal absorbs, which the logarithm cannot have"] : []),
    ...(protocol.signal.stray_light === null ? [] : ["stray light adds to the light, not to its logarithm"]),
    ...(noise.noisy > 0
      ? [
          `the noise exceeds a tenth of the transmitted light at ${countOf(noise.noisy)}, where the logarithm is biased`,
        ]
      : []),
    ...(noise.dark > 0
      ? [`${countOf(noise.dark)} with no light above zero count too, which have no logarithm`]
      : []),
  ];
  const how =
    spectrum.transmittance !== null
      ? ""
      : spectrum.unit === "1"
        ? " The light is exp(-optical depth) of the file."
        : ` The light is exp(-alpha d) of the file with d = ${Number((1e4 * depth).toPrecision(6))} um.`;
  return assumption(
    "transmittance-domain",
    ABOUT,
    `The transmitted light itself is fitted and not its logarithm: ${reasons.join("; ")}.${how}`,
    "set lines.domain=alpha to fit the absorption instead",
  );
}

function biasNotes(
  full: FullFit,
  slit: number,
  depth: number | null,
  noise: Noise,
  stray: Protocol["signal"]["stray_light"],
): Note[] {
  const parts: string[] = [];
  if (stray !== null && stray !== 0)
    parts.push("stray light flattens the strongest lines and was not taken off");
  if (slit > 0 && depth === null)
    parts.push(
      "the slit averages light, not absorption, and without the optical depth the lost area cannot be estimated",
    );
  if (slit > 0 && depth !== null) {
    const { ns, area, width } = full.fit.lines;
    let worst = { n: 0, loss: 0 };
    ns.forEach((n, j) => {
      const peak = (2 * area[j]! * depth) / (Math.PI * width[j]!);
      const loss = slitBias(Math.min(5, peak), Math.min(3, slit / width[j]!)).area;
      if (Math.abs(loss) > Math.abs(worst.loss)) worst = { n, loss };
    });
    if (Math.abs(worst.loss) > LEAST_BIAS)
      parts.push(
        `the slit averages light, not absorption: the area of n = ${worst.n} comes out about ${percent(Math.abs(worst.loss))} too ${worst.loss < 0 ? "small" : "large"}, the others are off by less`,
      );
  }
  if (noise.noisy > 0)
    parts.push(
      `the noise is up to ${percent(noise.largest)} of the transmitted light, which puts the logarithm off by about ${(0.5 * noise.largest ** 2).toPrecision(2)} in optical depth there`,
    );
  if (noise.dark > 0) parts.push(`${countOf(noise.dark)} with no light above zero had to be left out`);
  if (parts.length === 0) return [];
  return [
    doubt(
      "alpha-domain-biased",
      ABOUT,
      `The absorption was fitted, and not the transmitted light: ${parts.join("; ")}.`,
      depth === null
        ? "give the thickness (signal.thickness_um), so that the light can be computed"
        : "set lines.domain=auto or transmittance",
    ),
  ];
}

function noDepthNote(): Note {
  return doubt(
    "transmittance-domain-not-possible",
    ABOUT,
    "The transmitted light cannot be computed from an absorption coefficient without the thickness; the absorption is fitted.",
    "set signal.thickness_um",
  );
}

function failedNote(): Note {
  return doubt(
    "transmittance-fit-failed",
    ABOUT,
    "The fit of the transmitted light did not converge; the fit of the absorption stands.",
    "shorten the window, name the lines (lines.n), or set lines.domain=transmittance to see where it ended",
  );
}
