import { assumption, propagate, symmetric, type Note, type Quantity } from "../base/index.ts";
import { backgroundColumns, jointCovariance, SpectrumProblem } from "../fit/index.ts";
import { levelEnergy, LEVEL, levelLaw } from "../laws/index.ts";
import { linePair } from "../lines/index.ts";
import type { Protocol } from "../protocol/index.ts";
import type { FittedMember, FittedSeries } from "./fit-series.ts";
import { placeOf, withPeaks } from "./line-table.ts";
import { LINE_QUANTITIES, type PowerInput, type PowerSpectrum } from "./types.ts";

/** A line counts as seen above this many standard errors of its area. */
const SEEN = 5;

/** Numbers of a joint fit as the judgement of a power series takes them; `factor` makes intervals of standard errors. */
export function powerInput(series: FittedSeries, protocol: Protocol, factor: number): PowerInput {
  const ns = linesOf(series);
  const table = lineTable(series, ns);
  const surrounding = surroundingAt(series.members[0]!, ns, protocol);
  return {
    spectra: series.members.map((one, a) => describeSpectrum(one, a, series, factor)),
    table,
    signalUnit: series.members[0]!.member.spectrum.unit,
    surrounding: surrounding.value,
    surroundingSigma: surrounding.sigma,
    series: levelLawOf(series.members[0]!),
    protocol,
  };
}

/** Lines and powers of a control series. */
export function controlTable(series: FittedSeries): PowerInput["table"] {
  return lineTable(series, linesOf(series));
}

function linesOf({ members }: FittedSeries): number[] {
  return [...new Set(members.flatMap(({ fit }) => [...fit.lines.ns]))].sort((a, b) => a - b);
}

/** Energies, widths, areas and peaks of all lines at all powers with their whole covariance. */
function lineTable(series: FittedSeries, ns: readonly number[]): PowerInput["table"] {
  const { members, joint } = series;
  const powers = members.map(({ member }) => member.power_uW);
  const size = 3 * powers.length * ns.length;
  const values = new Float64Array(size).fill(NaN);
  const covariance = new Float64Array(size * size);
  const frame = { n: ns, power_uW: powers };
  const quantities = [LINE_QUANTITIES.energy, LINE_QUANTITIES.width, LINE_QUANTITIES.area] as const;
  /** Places in the table of [energies, widths, areas] of one spectrum, -1 for asymmetries. */
  const places = members.map(({ fit }, a) =>
    quantities.flatMap((quantity) => fit.lines.ns.map((n) => placeOf(frame, quantity, a, ns.indexOf(n)))),
  );
  members.forEach(({ fit }, a) => {
    const { energy, width, area } = fit.lines;
    const own = [...energy, ...width, ...area];
    places[a]!.forEach((at, i) => (values[at] = own[i]!));
    for (let b = 0; b < members.length; b++) {
      const block = jointCovariance(joint, a, b);
      const across = 4 * members[b]!.fit.lines.ns.length;
      places[a]!.forEach((row, i) =>
        places[b]!.forEach((column, j) => (covariance[row * size + column] = finite(block[i * across + j]!))),
      );
    }
  });
  const first = members[0]!.fit.lines;
  const asymmetry = ns.map((n) => first.asymmetry[first.ns.indexOf(n)] ?? first.asymmetry[0]!);
  return withPeaks(ns, powers, values, covariance, asymmetry);
}

/** What is not determined must not spoil its neighbours: without an error it counts as not measured. */
function finite(value: number): number {
  return Number.isFinite(value) ? value : 0;
}

function describeSpectrum(one: FittedMember, a: number, series: FittedSeries, factor: number): PowerSpectrum {
  const { fit, member } = one;
  const k = fit.lines.ns.length;
  const seen = fit.lines.ns.filter((_, j) => {
    const at = 2 * k + j;
    return fit.lines.area[j]! > SEEN * Math.sqrt(fit.lines.covariance[at * 4 * k + at]!);
  });
  const highest = seen.length === 0 ? null : seen[seen.length - 1]!;
  return {
    label: member.label,
    power_uW: member.power_uW,
    gap_eV: series.gaps === null ? null : symmetric(series.gaps.value[a]!, series.gaps.sigma[a]!, factor),
    apparent_gap_eV: highest === null ? null : apparentGap(one, highest, factor),
    highest_n: highest,
    chi2: fit.solution.chi2,
    points: one.points.energy.length,
  };
}

/** Where the lines that are seen end: the law at highest n + 1/2. */
function apparentGap({ fit }: FittedMember, highest: number, factor: number): Quantity {
  const { problem, solution } = fit;
  const levels = problem.tiedLaw(solution.theta);
  const law = new Float64Array(LEVEL.size);
  levelLaw(highest + 0.5, levels, law);
  const size = solution.theta.length + solution.coefficients.length;
  const gradient = new Float64Array(size);
  for (let p = 0; p < problem.layout.lawCount; p++) gradient[p] = law[1 + p]!;
  return symmetric(law[LEVEL.energy]!, Math.sqrt(propagate(gradient, solution.covariance)), factor);
}

function levelLawOf({ fit }: FittedMember): PowerInput["series"] {
  const { problem, solution } = fit;
  const { gap, rydberg, defect0, defect2 } = problem.tiedLaw(solution.theta);
  const size = solution.theta.length + solution.coefficients.length;
  const covariance = new Float64Array(16);
  const count = problem.layout.lawCount;
  for (let i = 0; i < count; i++)
    for (let j = 0; j < count; j++) covariance[i * 4 + j] = solution.covariance[i * size + j]!;
  return { gap_eV: gap, rydberg_eV: rydberg, defect0, defect2, covariance };
}

/**
 * Absorption of the reference at each line's centre without the line itself. Its error is that of the linear
 * coefficients (background, areas of the others), which is nearly all of it.
 */
function surroundingAt(
  one: FittedMember,
  ns: readonly number[],
  protocol: Protocol,
): { value: Float64Array; sigma: Float64Array } {
  const { fit, points, member } = one;
  const { theta, coefficients, covariance } = fit.solution;
  const { spec } = fit.problem;
  const levels = fit.problem.tiedLaw(theta);
  const centre = (n: number): number => {
    const j = fit.lines.ns.indexOf(n);
    return j >= 0
      ? fit.lines.energy[j]!
      : levelEnergy(n, levels.gap, levels.rydberg, levels.defect0, levels.defect2);
  };
  const order = ns.map((n) => ({ n, energy: centre(n) })).sort((a, b) => a.energy - b.energy);
  const energy = Float64Array.from(order, (line) => line.energy);
  const frame = [points.energy[0]!, points.energy[points.energy.length - 1]!] as const;
  const gap = spec.tail?.levels.gap ?? levels.gap;
  const m = energy.length;
  const problem = new SpectrumProblem(
    { energy, signal: new Float64Array(m), sigma: new Float64Array(m).fill(1) },
    { ...spec, background: backgroundColumns(protocol.background, energy, member.spectrum.unit, gap, frame) },
  );
  const phi = new Float64Array(m * problem.linear);
  problem.columns(theta, phi);
  const even = new Float64Array(m);
  const odd = new Float64Array(m);
  const p = theta.length;
  const size = p + coefficients.length;
  const value = new Float64Array(ns.length).fill(NaN);
  const sigma = new Float64Array(ns.length).fill(NaN);
  order.forEach(({ n }, i) => {
    const gradient = new Float64Array(size);
    for (let c = 0; c < problem.linear; c++) gradient[p + c] = phi[c * m + i]!;
    const j = fit.lines.ns.indexOf(n);
    if (j >= 0) {
      linePair(
        energy,
        i,
        i + 1,
        fit.lines.energy[j]!,
        fit.lines.width[j]!,
        spec.lineStds?.[j] ?? spec.gaussStd,
        even,
        odd,
      );
      gradient[p + j]! -= even[i]! + 2 * fit.lines.asymmetry[j]! * odd[i]!;
    }
    const at = ns.indexOf(n);
    value[at] = coefficients.reduce((sum, c, l) => sum + c * gradient[p + l]!, 0);
    sigma[at] = Math.sqrt(Math.max(0, propagate(gradient, covariance)));
  });
  return { value, sigma };
}

/**
 * The protocol with what only the files say: the spot and the thickness from header lines, where the user has said
 * nothing. The result keeps the protocol as it was given.
 */
export function withHeaderFacts(
  protocol: Protocol,
  members: FittedSeries["members"],
): { protocol: Protocol; notes: Note[] } {
  const notes: Note[] = [];
  const { spectrum } = members[0]!.member;
  let power = protocol.power;
  const spot = spectrum.facts.find((fact) => fact.key === "spot");
  if (power.spot_diameter_um === null && spot?.value !== null && spot?.value !== undefined) {
    const perUm: Readonly<Record<string, number>> = { um: 1, µm: 1, μm: 1, mm: 1e3, nm: 1e-3, cm: 1e4 };
    const factor = perUm[spot.unit ?? "um"];
    const radius = /radius/i.test(spot.label) ? 2 : 1;
    const diameter = factor === undefined ? NaN : radius * factor * spot.value;
    if (diameter > 0) {
      power = { ...power, spot_diameter_um: diameter };
      notes.push(
        assumption(
          "spot-from-header",
          "power.inputs",
          `The spot is ${diameter} um across by the header line "${spot.label}: ${spot.text}" of ${spectrum.file}.`,
          "set power.spot_diameter_um, and what it means with power.spot_profile and power.spot_definition",
        ),
      );
    } else
      notes.push(
        assumption(
          "spot-not-usable",
          "power.inputs",
          `The header line "${spot.label}: ${spot.text}" of ${spectrum.file} gives no diameter above zero: densities and volumes are left open.`,
          "set power.spot_diameter_um",
        ),
      );
  }
  const thickness =
    protocol.signal.thickness_um ?? (spectrum.thickness_cm === null ? null : 1e4 * spectrum.thickness_cm);
  return {
    protocol: { ...protocol, power, signal: { ...protocol.signal, thickness_um: thickness } },
    notes,
  };
}
