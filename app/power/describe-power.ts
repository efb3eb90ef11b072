import { NOT_DETERMINED, symmetric, type Quantity } from "../base/index.ts";
import {
  bohrRadiusFromMass,
  bohrRadiusFromRydberg,
  HBAR,
  levelSpacing,
  meanRadiusInDimension,
} from "../laws/index.ts";
import type { PowerLineResult, PowerResult, UsefulnessResult } from "../protocol/index.ts";
import { bleaching, unbleach, type BleachingLaw } from "./bleaching-law.ts";
import { INTERACTIONS, shrinkage, shrinkageExponent, type Interaction } from "./blockade.ts";
import { fitCurve } from "./fit-curve.ts";
import type { Flow, LineFinding } from "./flow.ts";
import { formCovariance, placeOf, seriesOf } from "./line-table.ts";
import { broadeningTrends, gapShift, heating, highestSeen, ONE_SIDED } from "./other-effects.ts";
import { fitSaturation, saturationOf, weightedSlope, type Saturation } from "./saturation.ts";
import { LINE_QUANTITIES, type PowerInput } from "./types.ts";
import { FIT_PARTS, NO_SPREAD, type LineVolume } from "./volumes.ts";
import { broadeningAt } from "./widths.ts";

/** The part `power` of a result, from what was found. */
export function describePower(flow: Flow): PowerResult {
  const { input, beam, inputs, lines, volumes, factor, fitted, joint } = flow;
  const { table } = input;
  const shift = gapShift(table, input.spectra, factor);
  const warm = heating(
    table,
    lines.map((line) => line.broadening),
    factor,
  );
  const results = lines.map((_, i) => describeLine(flow, i));
  const exponent = describeExponent(flow);
  const volumeExponent = describeVolumeExponent(flow, results);
  const other: PowerResult["other"] = {
    gap_shift_eV: shift,
    broadening: broadeningTrends(
      table,
      lines.map((line) => line.broadening),
      factor,
    ),
    heating: warm,
    highest_n: highestSeen(input.spectra),
    plasma: [],
  };
  const k = fitted.length;
  return {
    excitation: beam.excitation,
    law: beam.areaLaw,
    law_comparison: compareLaws(flow),
    repeat_factor: flow.repeatFactor,
    spectra: input.spectra.map((one) => ({
      label: one.label,
      power_uW: one.power_uW,
      gap_eV: one.gap_eV ?? NOT_DETERMINED,
      apparent_gap_eV: one.apparent_gap_eV ?? NOT_DETERMINED,
      highest_n: one.highest_n,
      chi2: one.chi2,
      points: one.points,
    })),
    lines: results,
    exponent,
    volume_exponent: volumeExponent,
    correlation: {
      n: fitted.map((line) => table.n[line]!),
      matrix:
        joint === null
          ? []
          : fitted.map((_, a) =>
              fitted.map((__, b) => {
                const at = (i: number, j: number): number => joint.covariance[(k + i) * 2 * k + k + j]!;
                const root = Math.sqrt(at(a, a) * at(b, b));
                return root > 0 ? at(a, b) / root : a === b ? 1 : 0;
              }),
            ),
    },
    inter_state: describeInterState(flow),
    inputs: [...inputs.rows],
    budget: meanBudget(results),
    other: { ...other, plasma: plasmaEvidence(flow, results, exponent, other) },
    crystal: describeCrystal(flow, results),
    curves: describeCurves(flow, volumes),
  };
}

/** A slope limit of a positive quantity's low end must not cross zero. */
function inverseOf(quantity: Quantity, scale: number): Quantity {
  const { value, sigma, low, high } = quantity;
  if (value === null || !(value > 0)) return NOT_DETERMINED;
  return {
    value: 1 / (scale * value),
    sigma: sigma === null ? null : sigma / (scale * value * value),
    low: high !== null ? 1 / (scale * high) : null,
    high: low !== null && low > 0 ? 1 / (scale * low) : null,
  };
}

function describeLine(flow: Flow, i: number): PowerLineResult {
  const { input, beam, inputs, lines, volumes, widths, factor, atZero } = flow;
  const { table, protocol } = input;
  const line = lines[i]!;
  const volume = volumes[i]!;
  const zero = atZero[i]!;
  const highest = Math.max(...table.power_uW);
  const bleaches = line.reading === "bleaches";
  const { value: s, sigma } = line.saturation;
  const limit =
    line.reading === "not-seen" && s !== null && sigma !== null ? Math.max(0, s) + ONE_SIDED * sigma : null;
  const effective = bleaches ? s! * beam.areaToVolume : null;
  const direct = flow.pump === null;
  const measured = bleaches && beam.excitation !== "broadband" && flow.pump !== "off";
  const ownVolume = measured && (direct || isPumped(flow, i));
  const nominal = nominalDensity(flow, i);
  const lawForm = widths.forms[i] ?? null;
  const lawSigma = lawForm === null ? null : Math.sqrt(formCovariance(table, lawForm, lawForm));
  const lifetimeGiven = inputs.lifetime?.(line.n) ?? null;
  const tau = volume.lifetime_ps;
  const energies = seriesOf(table, LINE_QUANTITIES.energy, i);
  const lowest = energies.power.indexOf(Math.min(...energies.power));
  const energySigma =
    energies.values.length > 0
      ? Math.sqrt(energies.covariance[lowest * energies.values.length + lowest]!)
      : null;
  const depthRelative = depthSigma(flow, i);
  const interaction = protocol.power.interaction;
  const broad = line.broadening;
  const grown = broad === null ? 1 : broadeningAt(broad, highest);
  const orbit = orbitRadius(input, line.n, factor);
  const thickness = inputs.thickness?.value ?? null;
  const radius = ownVolume ? volume.radius.value : volume.expected[interaction].radius.value;
  const unbounded = line.tests?.unbounded ?? null;
  const exponent = line.tests?.exponent ?? null;
  return {
    n: line.n,
    reading: line.reading,
    area0: line.zero,
    saturation_per_uW: line.saturation,
    saturation_limit_per_uW: limit,
    half_power_uW: bleaches ? inverseOf(line.saturation, beam.areaToVolume) : NOT_DETERMINED,
    area: describeFit(line.area, factor, line),
    peak: describeFit(line.peak, factor, null),
    area_peak_difference: line.difference,
    bleaching_test: { gain: line.tests?.bleaching.gain ?? null, p: line.tests?.bleaching.p ?? null },
    unbounded_test: {
      saturation_per_uW:
        unbounded === null ? NOT_DETERMINED : symmetric(unbounded.saturation, unbounded.sigma, factor),
      curvature_per_uW2:
        unbounded === null
          ? NOT_DETERMINED
          : symmetric(unbounded.curvature, unbounded.curvatureSigma, factor),
      gain: unbounded === null ? null : finite(unbounded.gain),
    },
    exponent_test: {
      exponent: exponent === null ? NOT_DETERMINED : symmetric(exponent.value, exponent.sigma, factor),
      gain: exponent?.gain ?? null,
      p: exponent?.p ?? null,
    },
    energy_eV: symmetric(zero.energy_eV, energySigma, factor),
    width0_eV:
      broad === null
        ? NOT_DETERMINED
        : symmetric(broad.zero, Math.sqrt(formCovariance(table, broad.zeroForm, broad.zeroForm)), factor),
    homogeneous_width_eV: symmetric(widths.width[i]!, lawSigma, factor),
    lifetime_ps: !Number.isFinite(tau)
      ? NOT_DETERMINED
      : symmetric(
          tau,
          lifetimeGiven !== null
            ? tau * inputs.lifetimeSigma
            : lawSigma === null
              ? null
              : (tau * lawSigma) / widths.width[i]!,
          factor,
        ),
    lifetime_from: lifetimeGiven !== null ? "given" : widths.from[i]!,
    line_depth: symmetric(volume.lineDepth, volume.lineDepth * depthRelative, factor),
    total_depth: symmetric(volume.totalDepth, totalDepthSigma(flow, i), factor),
    absorbed_fraction: finite(volume.absorbed),
    density_per_uW: volume.densityPerUw,
    density_at_highest_um3: nominal === null ? null : (nominal * highest) / (1 + (effective ?? 0) * highest),
    blocked_fraction_at_highest:
      effective === null ? null : (effective * highest) / (1 + effective * highest),
    blockade_volume_um3: ownVolume ? volume.volume : NO_SPREAD,
    blockade_radius_um: ownVolume ? volume.radius : NO_SPREAD,
    blockade_volume_limit_um3:
      limit === null || nominal === null || !direct || beam.excitation === "broadband"
        ? null
        : (limit * beam.areaToVolume) / nominal,
    expected: (["dipole-dipole", "van-der-waals"] as const).map((kind) => {
      const coefficient = inputs.coefficient[kind];
      return {
        interaction: kind,
        coefficient_from:
          coefficient === null ? "not determined" : coefficient.from === "default" ? "default" : "given",
        radius_um: volume.expected[kind].radius,
        hard_um3: volume.expected[kind].hard,
        soft_um3: volume.expected[kind].soft,
        slab_factor: finite(volume.expected[kind].slab),
      };
    }),
    expected_volume_um3: volume.expected[interaction].hard,
    measured_over_expected: ownVolume ? volume.ratio : NO_SPREAD,
    orbit_radius_um: orbit,
    radius_over_orbit: radius !== null && orbit.value !== null ? radius / orbit.value : null,
    radius_over_thickness: radius !== null && thickness !== null ? radius / thickness : null,
    shrinkage: {
      exponent: shrinkageExponent(interaction),
      at_highest: broad === null ? null : shrinkage(interaction, grown * grown - 1),
    },
    budget: ownVolume ? [...volume.budget] : [],
  };
}

function describeFit(
  one: Saturation | null,
  factor: number,
  together: LineFinding | null,
): PowerLineResult["area"] {
  if (one === null) return null;
  return {
    zero: together === null ? fromAlone(one, 0, factor) : together.zero,
    saturation_per_uW: together === null ? fromAlone(one, 1, factor) : together.saturation,
    chi2: one.fit.chi2,
    dof: one.fit.degreesOfFreedom,
    p: one.fit.p,
  };
}

function isPumped(flow: Flow, i: number): boolean {
  return flow.pump !== null && flow.pump !== "off" && flow.pump.line === i;
}

/** Density per uW by the formula, without spread; of the pumped line where a fixed pump makes the excitons. */
function nominalDensity(flow: Flow, i: number): number | null {
  return finite(1 / flow.volumes[i]!.perSaturation);
}

function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function depthSigma(flow: Flow, i: number): number {
  const k = flow.lines.length;
  const a = FIT_PARTS.area * k + i;
  const w = FIT_PARTS.width * k + i;
  const at = (x: number, y: number): number => flow.covariance[x * 4 * k + y]!;
  return Math.sqrt(Math.max(0, at(a, a) + at(w, w) - 2 * at(a, w)));
}

function totalDepthSigma(flow: Flow, i: number): number | null {
  const volume = flow.volumes[i]!;
  if (!Number.isFinite(volume.totalDepth)) return null;
  const scale = flow.input.signalUnit === "1" ? 1 : (flow.inputs.thickness?.value ?? Number.NaN) * 1e-4;
  return Math.hypot(volume.lineDepth * depthSigma(flow, i), (flow.input.surroundingSigma[i] ?? 0) * scale);
}

function orbitRadius(input: PowerInput, n: number, factor: number): Quantity {
  const { material } = input.protocol;
  const { series } = input;
  let bohr = material.bohr_radius_nm;
  let relative = 0;
  if (bohr === null && material.permittivity !== null && material.reduced_mass !== null) {
    bohr = bohrRadiusFromMass(material.reduced_mass, material.permittivity);
  } else if (bohr === null && material.permittivity !== null && series !== null && series.rydberg_eV > 0) {
    bohr = bohrRadiusFromRydberg(series.rydberg_eV, material.permittivity);
    relative = Math.sqrt(series.covariance[5]!) / series.rydberg_eV;
  }
  if (bohr === null) return NOT_DETERMINED;
  const l = material.envelope === "P" ? 1 : 0;
  const radius = meanRadiusInDimension(n, l, material.dimension, bohr) / 1000;
  return symmetric(radius, radius * relative, factor);
}

/** Logarithm of what the sample's widths and areas predict for S_n up to a constant, and its gradient. */
function predictedLogs(
  flow: Flow,
  i: number,
  interaction: Interaction,
): {
  saturation: number;
  volume: number;
  byArea: number;
  byWidth: number;
  byLaw: number;
  volumeByLaw: number;
} {
  const { power, growth } = INTERACTIONS[interaction];
  const zero = flow.atZero[i]!;
  const volumeByLaw = -3 / power;
  const volume = ((3 * growth) / power) * Math.log(zero.n) + volumeByLaw * Math.log(zero.lawWidth);
  const given = flow.inputs.lifetime?.(zero.n) ?? null;
  const lifetime = given !== null ? Math.log(given) : Math.log(HBAR / zero.lawWidth);
  return {
    volume,
    saturation: volume + lifetime + Math.log(zero.area) - Math.log(zero.width),
    byArea: 1,
    byWidth: -1,
    byLaw: volumeByLaw - (given === null ? 1 : 0),
    volumeByLaw,
  };
}

function describeExponent(flow: Flow): PowerResult["exponent"] {
  const { scaling, lines, joint, fitted, input, factor } = flow;
  if (scaling === null || joint === null) return null;
  const interaction = input.protocol.power.interaction;
  const k = lines.length;
  const inRange = lines
    .map((line, i) => ({ line, i }))
    .filter(
      ({ line, i }) =>
        line.n >= scaling.fit_n[0] &&
        line.n <= scaling.fit_n[1] &&
        (line.reading === "bleaches" || line.reading === "not-seen") &&
        Number.isFinite(predictedLogs(flow, i, interaction).saturation),
    );
  const ideal = flow.pump === null ? 10 : null;
  const base = {
    exponent: symmetric(scaling.exponent, scaling.sigma, factor),
    ideal,
    fit_n: [scaling.fit_n[0], scaling.fit_n[1]] as [number, number],
    chi2: scaling.chi2,
    dof: scaling.degreesOfFreedom,
    p: scaling.p,
  };
  if (inRange.length < 2 || flow.pump !== null) return { ...base, predicted: NOT_DETERMINED };
  // The same weights as the measured slope has: each line by S over its error.
  const reference = inRange[inRange.length - 1]!;
  const anchor = Math.abs(reference.line.saturation.value ?? 1);
  const weights = inRange.map(({ line, i }) => {
    const at = fitted.indexOf(i);
    const sigma = Math.sqrt(joint.covariance[(fitted.length + at) * 2 * fitted.length + fitted.length + at]!);
    const s = anchor * Math.pow(line.n / reference.line.n, scaling.exponent);
    return (s / sigma) ** 2;
  });
  const logs = inRange.map(({ i }) => predictedLogs(flow, i, interaction));
  const slope = weightedSlope(
    inRange.map(({ line }) => Math.log(line.n)),
    logs.map((one) => one.saturation),
    weights,
  );
  const gradient = new Float64Array(4 * k);
  inRange.forEach(({ i }, at) => {
    gradient[FIT_PARTS.area * k + i] = slope.gain[at]! * logs[at]!.byArea;
    gradient[FIT_PARTS.width * k + i] = slope.gain[at]! * logs[at]!.byWidth;
    gradient[FIT_PARTS.lawWidth * k + i] = slope.gain[at]! * logs[at]!.byLaw;
  });
  return { ...base, predicted: symmetric(slope.slope, spreadOf(gradient, flow.covariance), factor) };
}

function spreadOf(gradient: Float64Array, covariance: Float64Array): number {
  const size = gradient.length;
  let sum = 0;
  for (let i = 0; i < size; i++) {
    if (gradient[i] === 0) continue;
    for (let j = 0; j < size; j++) sum += gradient[i]! * covariance[i * size + j]! * gradient[j]!;
  }
  return Math.sqrt(Math.max(0, sum));
}

/** ln V against ln n by generalised least squares; common inputs shift all lines alike and drop out. */
function describeVolumeExponent(
  flow: Flow,
  results: readonly PowerLineResult[],
): PowerResult["volume_exponent"] {
  const { lines, volumes, beam, pump, covariance, factor } = flow;
  if (beam.excitation === "broadband" || pump === "off") return null;
  const k = lines.length;
  const used = results.flatMap((line, i) => {
    const v = flow.atZero[i]!.saturation * volumes[i]!.perSaturation;
    const range = flow.scaling?.fit_n;
    const inside = range === undefined || (line.n >= range[0] && line.n <= range[1]);
    return line.reading === "bleaches" && v > 0 && inside ? [{ i, n: line.n, log: Math.log(v) }] : [];
  });
  if (used.length < 3) return null;
  const r = used.length;
  const gradients = used.map(({ i }) => {
    const gradient = new Float64Array(4 * k);
    for (let part = 0; part < 4; part++) {
      const own = part === FIT_PARTS.saturation || pump === null;
      const given = part === FIT_PARTS.lawWidth && (flow.inputs.lifetime?.(lines[i]!.n) ?? null) !== null;
      if (own && !given) gradient[part * k + i] = volumes[i]!.response[part]!;
    }
    return gradient;
  });
  const matrix = new Float64Array(r * r);
  const size = 4 * k;
  for (let a = 0; a < r; a++) {
    for (let b = 0; b < r; b++) {
      let sum = 0;
      for (let x = 0; x < size; x++) {
        const g = gradients[a]![x]!;
        if (g === 0) continue;
        for (let y = 0; y < size; y++) sum += g * covariance[x * size + y]! * gradients[b]![y]!;
      }
      matrix[a * r + b] = sum;
    }
  }
  const fit = fitCurve({
    data: Float64Array.from(used, ({ log }) => log),
    covariance: matrix,
    parameters: 2,
    at: (theta, at, out) => {
      out[0] = 1;
      out[1] = Math.log(used[at]!.n);
      return theta[0]! + theta[1]! * out[1]!;
    },
    start: Float64Array.of(used[0]!.log - 7 * Math.log(used[0]!.n), 7),
  });
  if (fit === null) return null;
  const interaction = flow.input.protocol.power.interaction;
  const logs = used.map(({ i }) => predictedLogs(flow, i, interaction));
  const slope = weightedSlope(
    used.map(({ n }) => Math.log(n)),
    logs.map((one) => one.volume),
    used.map((_, a) => 1 / matrix[a * r + a]!),
  );
  const gradient = new Float64Array(4 * k);
  used.forEach(({ i }, at) => {
    gradient[FIT_PARTS.lawWidth * k + i] = slope.gain[at]! * logs[at]!.volumeByLaw;
  });
  return {
    exponent: symmetric(fit.values[1]!, Math.sqrt(fit.covariance[3]!), factor),
    predicted:
      pump === null ? symmetric(slope.slope, spreadOf(gradient, covariance), factor) : NOT_DETERMINED,
    ideal: pump === null ? 7 : null,
    fit_n: [used[0]!.n, used[r - 1]!.n],
    chi2: fit.chi2,
    dof: fit.degreesOfFreedom,
    p: fit.p,
  };
}

function describeInterState(flow: Flow): PowerResult["inter_state"] {
  const energy = flow.input.protocol.power.pump_energy_eV;
  if (energy === null) return null;
  const pump = flow.pump;
  if (pump === null || pump === "off") return { pump_n: null, pump_energy_eV: energy, volumes: [] };
  return {
    pump_n: flow.lines[pump.line]!.n,
    pump_energy_eV: energy,
    volumes: flow.lines.map((line, i) => ({
      n: line.n,
      volume_um3: line.reading === "bleaches" ? flow.volumes[i]!.volume : NO_SPREAD,
    })),
  };
}

/** Shares by input, mean over the lines that have a measured volume. */
function meanBudget(results: readonly PowerLineResult[]): PowerResult["budget"] {
  const sums = new Map<string, number>();
  let count = 0;
  for (const line of results) {
    if (line.budget.length === 0) continue;
    count++;
    for (const { input, share } of line.budget) sums.set(input, (sums.get(input) ?? 0) + share);
  }
  return [...sums].map(([input, sum]) => ({ input, share: sum / count })).sort((a, b) => b.share - a.share);
}

/** The same areas under the laws of the other ways to take a series, and how S would differ. */
function compareLaws(flow: Flow): PowerResult["law_comparison"] {
  const { beam } = flow;
  const seen = flow.lines.filter((line) => line.reading === "bleaches" && line.area !== null);
  if (seen.length === 0) return [];
  const candidates: BleachingLaw[] = ["separate-pump", "scanned-probe", "gaussian-self", "gaussian-scanned"];
  if (!candidates.includes(beam.areaLaw)) candidates.push(beam.areaLaw);
  return candidates
    .map((law) => {
      const fits = seen.map((line) => saturationOf(line.area!.series, { law, ratio: beam.ratio }));
      const scanned = law === "scanned-probe" || law === "gaussian-scanned";
      const toVolume = (scanned ? 2 : 1) / beam.areaToVolume;
      let top = 0;
      let bottom = 0;
      fits.forEach((fit, i) => {
        const chosen = seen[i]!.area!;
        if (fit === null || !(fit.saturation > 0) || !(chosen.saturation > 0)) return;
        const weight = (chosen.saturation / chosen.sigma) ** 2;
        top += weight * Math.log((toVolume * fit.saturation) / chosen.saturation);
        bottom += weight;
      });
      return {
        law,
        chi2: fits.reduce((sum, fit) => sum + (fit?.fit.chi2 ?? Infinity), 0),
        dof: fits.reduce((sum, fit) => sum + (fit?.fit.degreesOfFreedom ?? 0), 0),
        chosen: law === beam.areaLaw,
        saturation_ratio: bottom > 0 ? Math.exp(top / bottom) : null,
      };
    })
    .filter((one) => Number.isFinite(one.chi2))
    .sort((a, b) => a.chi2 - b.chi2);
}

function plasmaEvidence(
  flow: Flow,
  results: readonly PowerLineResult[],
  exponent: PowerResult["exponent"],
  other: PowerResult["other"],
): PowerResult["other"]["plasma"] {
  const out: PowerResult["other"]["plasma"][number][] = [];
  const { lost } = other.highest_n;
  if (lost !== null) {
    out.push({
      evidence: "lines lost at the top of the ladder from the lowest to the highest power",
      value: lost,
      speaks: lost > 0 ? "a plasma takes the highest lines first; so does blockade" : "against a plasma",
    });
  }
  const byPower = flow.input.spectra
    .filter((one) => (one.apparent_gap_eV?.value ?? null) !== null)
    .sort((a, b) => a.power_uW - b.power_uW);
  if (byPower.length >= 2) {
    const change = byPower[byPower.length - 1]!.apparent_gap_eV!.value! - byPower[0]!.apparent_gap_eV!.value!;
    out.push({
      evidence: "change of the apparent gap, eV",
      value: change,
      speaks: change < 0 ? "a plasma lowers the apparent gap" : "against a plasma",
    });
  }
  const ratios = results.flatMap((line) => line.measured_over_expected.value ?? []).sort((a, b) => a - b);
  if (ratios.length > 0) {
    const middle = ratios[Math.floor(ratios.length / 2)]!;
    out.push({
      evidence: "measured over expected blockade volume, middle line",
      value: middle,
      speaks:
        middle > 10
          ? "more bleaching than this interaction explains: plasma, a longer lifetime or another coefficient"
          : "no more bleaching than the interaction explains within a factor 10",
    });
  }
  if (other.heating.significance !== null) {
    out.push({
      evidence: "growth of the lowest lines' width, standard errors",
      value: other.heating.significance,
      speaks: other.heating.significance > 3 ? "the crystal warms or its lines dephase" : "no warming seen",
    });
  }
  if (other.gap_shift_eV.significance !== null) {
    out.push({
      evidence: "common shift of the lines, standard errors",
      value: other.gap_shift_eV.significance,
      speaks:
        Math.abs(other.gap_shift_eV.significance) > 3
          ? "the lines move: heating or a shift of the gap"
          : "the lines stay, as under a thin plasma and under blockade",
    });
  }
  if (exponent !== null && exponent.predicted.value !== null && exponent.exponent.value !== null) {
    const sigma = Math.hypot(exponent.exponent.sigma ?? 0, exponent.predicted.sigma ?? 0);
    const away = (exponent.exponent.value - exponent.predicted.value) / sigma;
    out.push({
      evidence: "exponent of S minus the predicted one, standard errors",
      value: finite(away),
      speaks: Math.abs(away) < 3 ? "grows as blockade does" : "does not grow as this blockade does",
    });
  }
  const control = controlRatio(flow);
  if (control !== null) {
    out.push({
      evidence: "bleaching in the control series over that in the series, mean of the lines",
      value: control,
      speaks:
        control > 0.5
          ? "pairs without such excitons bleach nearly as much: plasma or heating"
          : "most of the bleaching needs excitons of these lines",
    });
  }
  return out;
}

/** Weighted mean of the control's S over the series' S. */
function controlRatio(flow: Flow): number | null {
  const control = flow.input.control;
  if (control === undefined) return null;
  let top = 0;
  let bottom = 0;
  flow.lines.forEach((line) => {
    const at = control.n.indexOf(line.n);
    if (line.reading !== "bleaches" || at < 0) return;
    const one = fitSaturation(control, LINE_QUANTITIES.area, at, {
      law: flow.beam.areaLaw,
      ratio: flow.beam.ratio,
    });
    if (one === null) return;
    const weight = (line.saturation.value! / Math.hypot(one.sigma, line.saturation.sigma ?? 0)) ** 2;
    top += (weight * one.saturation) / line.saturation.value!;
    bottom += weight;
  });
  return bottom > 0 ? top / bottom : null;
}

function describeCrystal(flow: Flow, results: readonly PowerLineResult[]): UsefulnessResult[] {
  const { input, volumes, factor } = flow;
  const interaction = input.protocol.power.interaction;
  return results.map((line, i) => {
    const spacing = nearestSpacing(input, line.n, factor);
    const width = line.width0_eV;
    const ratio =
      spacing.value !== null && width.value !== null && width.value > 0
        ? symmetric(
            spacing.value / width.value,
            (spacing.value / width.value) *
              Math.hypot((spacing.sigma ?? 0) / spacing.value, (width.sigma ?? 0) / width.value),
            factor,
          )
        : NOT_DETERMINED;
    const measured = line.blockade_volume_um3.value !== null;
    const expected = volumes[i]!.expected[interaction];
    return {
      n: line.n,
      spacing_eV: spacing,
      width_eV: width,
      addressability: ratio,
      addressable: ratio.value === null ? null : ratio.value > 1,
      lifetime_ps: line.lifetime_ps,
      orbit_radius_um: line.orbit_radius_um,
      blockade_radius_um: measured ? line.blockade_radius_um : expected.radius,
      blockade_from: measured ? "measured" : expected.radius.value !== null ? "expected" : "not determined",
      single_spot_um: volumes[i]!.singleSpot,
    };
  });
}

/** Distance to the nearer neighbour by the level law, with its error from the law's covariance. */
function nearestSpacing(input: PowerInput, n: number, factor: number): Quantity {
  const { series } = input;
  if (series === null) return NOT_DETERMINED;
  const firstN = input.protocol.material.first_n ?? 1;
  const at = (rydberg: number, defect0: number, defect2: number): number => {
    const up = levelSpacing(n, rydberg, defect0, defect2);
    const down = n - 1 >= firstN ? levelSpacing(n - 1, rydberg, defect0, defect2) : Infinity;
    return Math.min(up, down);
  };
  const { rydberg_eV: ry, defect0, defect2, covariance } = series;
  const value = at(ry, defect0, defect2);
  const step = 1e-5;
  const gradient = Float64Array.of(
    0,
    (at(ry * (1 + step), defect0, defect2) - at(ry * (1 - step), defect0, defect2)) / (2 * ry * step),
    (at(ry, defect0 + step, defect2) - at(ry, defect0 - step, defect2)) / (2 * step),
    (at(ry, defect0, defect2 + step) - at(ry, defect0, defect2 - step)) / (2 * step),
  );
  return symmetric(value, spreadOf(gradient, covariance), factor);
}

const GRID_POINTS = 61;

function describeCurves(flow: Flow, volumes: readonly LineVolume[]): PowerResult["curves"] {
  const { input, lines, beam } = flow;
  const { table, protocol } = input;
  const positive = table.power_uW.filter((p) => p > 0);
  const from = Math.log(Math.min(...positive) / 2);
  const to = Math.log(Math.max(...positive) * 2);
  const grid = Array.from({ length: GRID_POINTS }, (_, i) =>
    Math.exp(from + ((to - from) * i) / (GRID_POINTS - 1)),
  );
  const interaction = protocol.power.interaction;
  return {
    power_uW: grid,
    lines: lines.map((line, i) => {
      const volume = volumes[i]!;
      const density = nominalDensity(flow, i);
      const s = line.saturation.value;
      const effective = line.reading === "bleaches" && s !== null ? s * beam.areaToVolume : null;
      const value = flow.atZero[i]!.saturation * volume.perSaturation;
      const own = flow.pump === null || isPumped(flow, i);
      const expected = volume.expected[interaction].hard.value;
      const lawOf = (one: Saturation | null, zero: number | null, rate: number | null, law: BleachingLaw) =>
        grid.map((p) =>
          one === null || zero === null || rate === null
            ? null
            : finite(zero * bleaching(law, rate * p, beam.ratio).factor),
        );
      return {
        n: line.n,
        area: lawOf(line.area, line.zero.value, s, beam.areaLaw),
        peak: lawOf(line.peak, line.peak?.zero ?? null, line.peak?.saturation ?? null, beam.peakLaw),
        density_um3: grid.map((p) => (density === null ? null : (density * p) / (1 + (effective ?? 0) * p))),
        blocked_fraction: grid.map((p) =>
          effective === null ? null : (effective * p) / (1 + effective * p),
        ),
        measured_volume_um3: grid.map(() => (own ? finite(value) : null)),
        expected_volume_um3: grid.map((p) => {
          if (expected === null) return null;
          const grown = line.broadening === null ? 1 : broadeningAt(line.broadening, p);
          return expected * shrinkage(interaction, grown * grown - 1);
        }),
        data: table.power_uW.map((power, j) => dataPoint(flow, i, j, power, own ? density : null)),
      };
    }),
  };
}

function dataPoint(
  flow: Flow,
  i: number,
  j: number,
  power: number,
  density: number | null,
): PowerResult["curves"]["lines"][number]["data"][number] {
  const { table } = flow.input;
  const { beam } = flow;
  const size = table.values.length;
  const value = (quantity: 0 | 1 | 2 | 3): number | null =>
    finite(table.values[placeOf(table, quantity, j, i)]!);
  const sigma = (quantity: 0 | 1 | 2 | 3): number | null => {
    const at = placeOf(table, quantity, j, i);
    return value(quantity) === null ? null : Math.sqrt(Math.max(0, table.covariance[at * size + at]!));
  };
  const area = value(LINE_QUANTITIES.area);
  const areaSigma = sigma(LINE_QUANTITIES.area);
  const zero = flow.lines[i]!.zero.value;
  let volume: number | null = null;
  let volumeSigma: number | null = null;
  if (area !== null && zero !== null && zero > 0 && density !== null && power > 0) {
    if (flow.lines[i]!.reading === "bleaches" && beam.excitation !== "broadband") {
      const u = unbleach(beam.areaLaw, area / zero, beam.ratio);
      const slope = Math.abs(bleaching(beam.areaLaw, u, beam.ratio).slope);
      volume = finite((u * beam.areaToVolume) / (power * density));
      volumeSigma =
        areaSigma === null
          ? null
          : finite(((areaSigma / zero / slope) * beam.areaToVolume) / (power * density));
    }
  }
  return {
    power_uW: power,
    area,
    area_sigma: areaSigma,
    peak: value(LINE_QUANTITIES.peak),
    peak_sigma: sigma(LINE_QUANTITIES.peak),
    width_eV: value(LINE_QUANTITIES.width),
    width_sigma_eV: sigma(LINE_QUANTITIES.width),
    energy_eV: value(LINE_QUANTITIES.energy),
    energy_sigma_eV: sigma(LINE_QUANTITIES.energy),
    volume_um3: volume,
    volume_sigma_um3: volumeSigma,
  };
}

export function fromAlone(area: Saturation | null, part: 0 | 1, factor: number): Quantity {
  if (area === null) return NOT_DETERMINED;
  return symmetric(area.fit.values[part]!, Math.sqrt(area.fit.covariance[part * 3]!), factor);
}
