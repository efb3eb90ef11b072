import {
  failure,
  NO_WATCH,
  stopIfCancelled,
  success,
  symmetric,
  type Quantity,
  type Result,
  type Watch,
} from "../base/index.ts";
import type { PowerLineResult } from "../protocol/index.ts";
import { normalQuantile } from "../solve/index.ts";
import { describeBeam, type Beam } from "./beam.ts";
import { describePower } from "./describe-power.ts";
import { fromAlone } from "./nominal.ts";
import type { Flow, LineFinding, Pump } from "./flow.ts";
import { gatherInputs } from "./inputs.ts";
import { formCovariance, formsCovariance, placeOf, seriesOf, type LinearForm } from "./line-table.ts";
import { describeNotes } from "./notes.ts";
import {
  distinct,
  fitSaturation,
  fitTogether,
  repeatScatter,
  testLine,
  type JointSaturation,
  type LawChoice,
  type LineTests,
  type Saturation,
} from "./saturation.ts";
import { fitScaling, type Scaling } from "./scaling.ts";
import { LINE_QUANTITIES, type LineTable, type PowerInput, type PowerJudgement } from "./types.ts";
import { FIT_PARTS, spreadVolumes, type LineAtZero } from "./volumes.ts";
import { fitBroadening, widthsByLaw, type WidthsAtZero } from "./widths.ts";
import type { JudgeIssue } from "./judge-issue.ts";

/** Bleaching counts as seen above this many standard errors of S. */
const SEEN = 2;
/** Fall of chi square above which it is seen even where S is loose, since the lowest power already saturates. */
const SURELY = 9;
/** Energies of a pump within this part of a line's full width count as on the line. */
const ON_LINE = 1;

/**
 * What      From line parameters against power to saturation, density, blockade volume and what the crystal is good
 *           for (design notes of this project on the physics, section 9), with standard errors from the covariance of the joint fit and seeded draws of the rest.
 * Units     uW, um, ps, eV.
 * Domain    two or more different powers; everything that a missing input leaves open is not determined, not guessed.
 * Accuracy  tests/app/power, tests/bench/power-coverage.bench.ts.
 */
export function judgePower(given: PowerInput, watch: Watch = NO_WATCH): Result<PowerJudgement, JudgeIssue> {
  const issues = refuse(given);
  if (issues.length > 0) return failure(...issues);
  const { protocol } = given;
  const factor = normalQuantile(0.5 + protocol.uncertainty.level / 2);
  const beam = describeBeam(protocol.power);
  const inputs = gatherInputs(protocol, beam.ratio);
  const scatter = repeatScatter(given.table, LINE_QUANTITIES.area);
  const table = scatter.factor > 1 ? widen(given.table, scatter.factor) : given.table;
  const input: PowerInput = { ...given, table };
  const areaChoice: LawChoice = { law: beam.areaLaw, ratio: beam.ratio };
  const peakChoice: LawChoice = { law: beam.peakLaw, ratio: beam.ratio };

  watch.report(0.1, "saturation of each line");
  const alone = table.n.map((_, line) => {
    stopIfCancelled(watch);
    const area = fitSaturation(table, LINE_QUANTITIES.area, line, areaChoice);
    return {
      area,
      peak: fitSaturation(table, LINE_QUANTITIES.peak, line, peakChoice),
      tests: area === null ? null : testLine(area, areaChoice),
    };
  });
  const fitted = alone.flatMap(({ area }, line) => (area === null ? [] : [{ line, found: area }]));
  watch.report(0.4, "all lines together");
  const joint = fitted.length === 0 ? null : fitTogether(table, LINE_QUANTITIES.area, fitted, areaChoice);
  stopIfCancelled(watch);
  const lines = table.n.map((n, line): LineFinding => {
    const { area, peak, tests } = alone[line]!;
    const at = fitted.findIndex((one) => one.line === line);
    const k = fitted.length;
    // Held by its bound a number has no error of its own.
    const sigmaOf = (i: number): number | null =>
      joint!.fit.activeBounds[i] !== 0 ? null : Math.sqrt(joint!.covariance[i * 2 * k + i]!);
    const together = joint !== null && at >= 0;
    const zero = together ? symmetric(joint.zero[at]!, sigmaOf(at), factor) : fromAlone(area, 0, factor);
    const saturation = together
      ? symmetric(joint.saturation[at]!, sigmaOf(k + at), factor)
      : fromAlone(area, 1, factor);
    const sweep =
      beam.excitation === "scanned-probe" && area !== null
        ? { value: area.saturation, sigma: area.sigma, form: saturationForm(table, line, area) }
        : null;
    return {
      n,
      area,
      peak,
      tests,
      zero,
      saturation,
      reading: readingOf(area, saturation, tests),
      difference: differenceOf(table, line, area, peak, beam),
      broadening: fitBroadening(table, line, sweep),
    };
  });

  watch.report(0.6, "scaling with n");
  const scaling = chooseScaling(table, lines, areaChoice, joint);
  const series = input.series;
  const widths = widthsByLaw(
    table,
    lines.map((line) => line.broadening),
    protocol,
    series?.defect0 ?? 0,
    series?.defect2 ?? 0,
  );
  const atZero = lines.map((line, i) => lineAtZero(input, beam, line, widths, i));
  const covariance = relativeCovariance(table, lines, fitted, joint, widths);
  stopIfCancelled(watch);
  watch.report(0.7, "volumes and their spread");
  const pump = findPump(input, lines, atZero);
  const volumes =
    beam.excitation === "broadband" || pump === "off"
      ? null
      : spreadVolumes({
          lines: atZero,
          covariance: { lines: table.n.length, matrix: covariance },
          inputs,
          signalUnit: input.signalUnit,
          interaction: protocol.power.interaction,
          pump: pump ?? undefined,
          seed: protocol.uncertainty.seed,
          draws: protocol.power.draws,
          level: protocol.uncertainty.level,
        });
  // Expected volumes, lifetimes and the crystal's table do not need a measured volume.
  const shown =
    volumes ??
    spreadVolumes({
      lines: atZero.map((line) => ({ ...line, saturation: Number.NaN })),
      covariance: { lines: table.n.length, matrix: covariance },
      inputs,
      signalUnit: input.signalUnit,
      interaction: protocol.power.interaction,
      seed: protocol.uncertainty.seed,
      draws: protocol.power.draws,
      level: protocol.uncertainty.level,
    });
  stopIfCancelled(watch);
  watch.report(0.9, "what else the power does");
  const flow: Flow = {
    input,
    beam,
    inputs,
    lines,
    fitted: fitted.map((one) => one.line),
    joint,
    widths,
    atZero,
    volumes: shown,
    covariance,
    pump,
    scaling,
    factor,
    repeatFactor: scatter.factor,
  };
  const power = describePower(flow);
  return success({ power, notes: describeNotes({ input, beam, inputs, lines, scaling, widths, power }) });
}

function refuse(input: PowerInput): JudgeIssue[] {
  const issues: JudgeIssue[] = [];
  for (const spectrum of input.spectra) {
    if (!(spectrum.power_uW >= 0 && spectrum.power_uW < Infinity))
      issues.push({
        code: "power/bad-power",
        facts: { spectrum: spectrum.label, found: spectrum.power_uW },
      });
  }
  const powers = distinct(input.table.power_uW);
  if (powers < 2) issues.push({ code: "power/one-power", facts: { found: powers, needed: 2 } });
  if (input.table.n.length === 0)
    issues.push({ code: "power/no-common-line", facts: { spectra: input.spectra.length } });
  return issues;
}

function widen(table: LineTable, factor: number): LineTable {
  return { ...table, covariance: table.covariance.map((v) => v * factor * factor) };
}

function readingOf(
  area: Saturation | null,
  saturation: Quantity,
  tests: LineTests | null,
): PowerLineResult["reading"] {
  if (area === null || tests === null || saturation.value === null) return "not-determined";
  const sigma = saturation.sigma ?? area.sigma;
  const held = area.fit.activeBounds[1] !== 0;
  if (held || saturation.value < -SEEN * sigma) return "rises";
  const unbounded = tests.unbounded;
  // A rise before a fall: the law cannot show it, the free parabola can, if the law is not simply right.
  if (
    unbounded !== null &&
    unbounded.saturation < -SEEN * unbounded.sigma &&
    ((area.fit.p ?? 1) < 0.05 || unbounded.gain > 4)
  ) {
    return "rises";
  }
  const seen = saturation.value > SEEN * sigma || tests.bleaching.gain > SURELY;
  return saturation.value > 0 && seen ? "bleaches" : "not-seen";
}

/** S of one line's areas as a form of the table. */
function saturationForm(table: LineTable, line: number, one: Saturation): LinearForm {
  return {
    places: one.series.spectra.map((j) => placeOf(table, LINE_QUANTITIES.area, j, line)),
    weights: one.fit.gain.slice(one.series.spectra.length),
  };
}

/** Area against peak, both turned into the S that enters the volume, in standard errors of the difference. */
function differenceOf(
  table: LineTable,
  line: number,
  area: Saturation | null,
  peak: Saturation | null,
  beam: Beam,
): number | null {
  if (area === null || peak === null) return null;
  const formOf = (one: Saturation, quantity: 2 | 3, factor: number): LinearForm => {
    const r = one.series.spectra.length;
    return {
      places: one.series.spectra.map((j) => placeOf(table, quantity, j, line)),
      weights: one.fit.gain.slice(r).map((g) => g * factor),
    };
  };
  const a = formOf(area, LINE_QUANTITIES.area, beam.areaToVolume);
  const b = formOf(peak, LINE_QUANTITIES.peak, beam.peakToVolume);
  const variance =
    formCovariance(table, a, a) + formCovariance(table, b, b) - 2 * formCovariance(table, a, b);
  const difference = area.saturation * beam.areaToVolume - peak.saturation * beam.peakToVolume;
  return variance > 0 ? difference / Math.sqrt(variance) : null;
}

/** The power law over all lines that do not rise; where it fails, over the upper ones that it describes. */
function chooseScaling(
  table: LineTable,
  lines: readonly LineFinding[],
  choice: LawChoice,
  together: JointSaturation | null,
): Scaling | null {
  const usable = lines.flatMap((one, line) =>
    one.area !== null && (one.reading === "bleaches" || one.reading === "not-seen")
      ? [{ line, found: one.area }]
      : [],
  );
  if (usable.filter(({ line }) => lines[line]!.reading === "bleaches").length < 3) return null;
  let whole: Scaling | null = null;
  for (let from = 0; usable.length - from >= (from === 0 ? 3 : 4); from++) {
    const part = usable.slice(from);
    const joint =
      part.length === lines.length && together !== null
        ? together
        : fitTogether(table, LINE_QUANTITIES.area, part, choice);
    const one =
      joint === null
        ? null
        : fitScaling(
            joint,
            part.map(({ line }) => table.n[line]!),
            choice,
          );
    if (from === 0) {
      whole = one;
      if (one !== null && one.p >= 0.01) return one;
    } else if (one !== null && one.p > 0.05) return one;
  }
  return whole;
}

function lineAtZero(
  input: PowerInput,
  beam: Beam,
  line: LineFinding,
  widths: WidthsAtZero,
  i: number,
): LineAtZero {
  const energies = seriesOf(input.table, LINE_QUANTITIES.energy, i);
  const lowest = energies.power.indexOf(Math.min(...energies.power));
  const held = input.table.values[placeOf(input.table, LINE_QUANTITIES.energy, 0, i)]!;
  return {
    n: line.n,
    saturation: line.reading === "bleaches" ? line.saturation.value! * beam.areaToVolume : Number.NaN,
    area: line.zero.value ?? Number.NaN,
    width: line.broadening?.zero ?? Number.NaN,
    lawWidth: widths.width[i]!,
    energy_eV: energies.values.length > 0 ? energies.values[lowest]! : held,
    surrounding: input.surrounding[i] ?? 0,
    surroundingSigma: input.surroundingSigma[i] ?? 0,
  };
}

/** Relative covariance of S, area, own width and law width of all lines (4k x 4k), from the one spectrum fit. */
function relativeCovariance(
  table: LineTable,
  lines: readonly LineFinding[],
  fitted: readonly { readonly line: number }[],
  joint: JointSaturation | null,
  widths: WidthsAtZero,
): Float64Array {
  const k = lines.length;
  const none: LinearForm = { places: [], weights: [] };
  const forms: LinearForm[] = new Array<LinearForm>(4 * k).fill(none);
  const scaled = (form: LinearForm, value: number): LinearForm =>
    Math.abs(value) > 0 ? { places: form.places, weights: Array.from(form.weights, (w) => w / value) } : none;
  lines.forEach((line, i) => {
    const at = fitted.findIndex((one) => one.line === i);
    if (joint !== null && at >= 0) {
      const r = joint.joined.places.length;
      const row = (parameter: number): LinearForm => ({
        places: joint.joined.places,
        weights: joint.fit.gain.subarray(parameter * r, (parameter + 1) * r),
      });
      if (line.reading === "bleaches")
        forms[FIT_PARTS.saturation * k + i] = scaled(row(fitted.length + at), line.saturation.value!);
      forms[FIT_PARTS.area * k + i] = scaled(row(at), line.zero.value!);
    } else if (line.area !== null) {
      const { places, weights } = saturationForm(table, i, line.area);
      const zero = line.area.fit.gain.slice(0, places.length);
      if (line.reading === "bleaches")
        forms[FIT_PARTS.saturation * k + i] = scaled({ places, weights }, line.saturation.value!);
      forms[FIT_PARTS.area * k + i] = scaled({ places, weights: zero }, line.zero.value!);
    }
    if (line.broadening !== null)
      forms[FIT_PARTS.width * k + i] = scaled(line.broadening.zeroForm, line.broadening.zero);
    const law = widths.forms[i];
    if (law !== null && law !== undefined) forms[FIT_PARTS.lawWidth * k + i] = scaled(law, widths.width[i]!);
  });
  return formsCovariance(table, forms);
}

function findPump(input: PowerInput, lines: readonly LineFinding[], atZero: readonly LineAtZero[]): Pump {
  const energy = input.protocol.power.pump_energy_eV;
  if (energy === null) return null;
  let best: Pump = "off";
  let nearest = Infinity;
  atZero.forEach((line, i) => {
    const away = Math.abs(line.energy_eV - energy);
    if (!(away < nearest) || !(line.width > 0)) return;
    nearest = away;
    const half = line.width / 2;
    const on = away <= ON_LINE * line.width && lines[i]!.zero.value !== null;
    best = on ? { line: i, part: (half * half) / (half * half + away * away) } : "off";
  });
  return best;
}
