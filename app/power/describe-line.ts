import { NOT_DETERMINED, symmetric, type Quantity } from "../base/index.ts";
import { bohrRadiusFromMass, bohrRadiusFromRydberg, meanRadiusInDimension } from "../laws/index.ts";
import type { PowerLineResult } from "../protocol/index.ts";
import { shrinkage, shrinkageExponent } from "./blockade.ts";
import type { Flow, LineFinding } from "./flow.ts";
import { formCovariance, seriesOf } from "./line-table.ts";
import { isPumped, nominalDensity, finite, fromAlone } from "./nominal.ts";
import { ONE_SIDED } from "./other-effects.ts";
import type { Saturation } from "./saturation.ts";
import { LINE_QUANTITIES, type PowerInput } from "./types.ts";
import { FIT_PARTS, NO_SPREAD } from "./volumes.ts";
import { broadeningAt } from "./widths.ts";

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

export function describeLine(flow: Flow, i: number): PowerLineResult {
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
