import { makeRandom } from "../base/index.ts";
import { HBAR } from "../laws/index.ts";
import { choleskyFactor, normalQuantile } from "../solve/index.ts";
import {
  blockadeRadius,
  INTERACTIONS,
  slabFactor,
  sphereRadius,
  sphereVolume,
  type Interaction,
} from "./blockade.ts";
import { absorbedFraction, excitonDensity } from "./density.ts";
import type { GivenInputs } from "./inputs.ts";

export interface Spread {
  readonly value: number | null;
  readonly sigma: number | null;
  readonly low: number | null;
  readonly high: number | null;
  readonly factor: number | null;
}
export const NO_SPREAD: Spread = { value: null, sigma: null, low: null, high: null, factor: null };

/** What the spectra say of one line at P -> 0. NaN where not determined. */
export interface LineAtZero {
  readonly n: number;
  /** S that enters the volume, per uW of stated power. */
  readonly saturation: number;
  readonly area: number;
  /** Own width and homogeneous width by the law, eV. */
  readonly width: number;
  readonly lawWidth: number;
  readonly energy_eV: number;
  /** Absorption by everything else at E_n. */
  readonly surrounding: number;
  readonly surroundingSigma: number;
}

/** Relative covariance (4k x 4k, row-major) of saturation, area, width, lawWidth of k lines, in that order. */
export interface FitCovariance {
  readonly lines: number;
  readonly matrix: Float64Array;
}
export const FIT_PARTS = { saturation: 0, area: 1, width: 2, lawWidth: 3 } as const;

export interface LineVolume {
  readonly lineDepth: number;
  readonly totalDepth: number;
  readonly absorbed: number;
  readonly lifetime_ps: number;
  readonly densityPerUw: Spread;
  readonly volume: Spread;
  readonly radius: Spread;
  readonly expected: Readonly<Record<Interaction, ExpectedSpread>>;
  readonly ratio: Spread;
  readonly singleSpot: Spread;
  readonly budget: readonly { readonly input: string; readonly share: number }[];
  /** First-order response of ln V to the relative fit parts of this line (4), for exponents. */
  readonly response: Float64Array;
  /** Volume per unit S without spread: V = S times this. */
  readonly perSaturation: number;
}

export interface ExpectedSpread {
  readonly radius: Spread;
  readonly hard: Spread;
  readonly soft: Spread;
  readonly slab: number;
}

/** One draw of everything: the factors of the common inputs and of the line's own numbers. */
interface Factors {
  readonly power: number;
  readonly transmission: number;
  readonly spot: number;
  readonly thickness: number;
  readonly reflectance: number;
  readonly lifetime: number;
  readonly coefficient: number;
  readonly saturation: number;
  readonly area: number;
  readonly width: number;
  readonly lawWidth: number;
  readonly surrounding: number;
}
type MutableFactors = { -readonly [K in keyof Factors]: Factors[K] };
type CommonFactors = Pick<
  Factors,
  "power" | "transmission" | "spot" | "thickness" | "reflectance" | "lifetime"
>;

function setCommon(out: MutableFactors, from: CommonFactors): void {
  out.power = from.power;
  out.transmission = from.transmission;
  out.spot = from.spot;
  out.thickness = from.thickness;
  out.reflectance = from.reflectance;
  out.lifetime = from.lifetime;
}

const UNCHANGED: Factors = {
  power: 1,
  transmission: 1,
  spot: 1,
  thickness: 1,
  reflectance: 1,
  lifetime: 1,
  coefficient: 1,
  saturation: 1,
  area: 1,
  width: 1,
  lawWidth: 1,
  surrounding: 0,
};

const UM_IN_CM = 1e-4;

/** Optical depth of the line alone and of everything at E_n: A/(pi g) plus what else absorbs there. */
export function depthsAt(
  line: LineAtZero,
  signalUnit: "1/cm" | "1",
  thickness_um: number | null,
  factors: Pick<Factors, "area" | "width" | "surrounding"> = UNCHANGED,
): { line: number; total: number } {
  // A depth was measured as one, so an error of the thickness does not reach it.
  const scale = signalUnit === "1" ? 1 : (thickness_um ?? Number.NaN) * UM_IN_CM;
  const own = (2 * line.area * factors.area * scale) / (Math.PI * line.width * factors.width);
  const around = (line.surrounding + factors.surrounding * line.surroundingSigma) * scale;
  // A background below zero cannot absorb: what is absorbed is at least the line's.
  return { line: own, total: own + Math.max(0, around) };
}

function lifetimeOf(line: LineAtZero, inputs: GivenInputs, factors: Factors): number {
  const given = inputs.lifetime?.(line.n) ?? null;
  return given !== null ? given * factors.lifetime : HBAR / (line.lawWidth * factors.lawWidth);
}

function densityOf(
  line: LineAtZero,
  inputs: GivenInputs,
  signalUnit: "1/cm" | "1",
  factors: Factors,
  part = 1,
): number {
  const { spotArea_um2: area, thickness, reflectance } = inputs;
  if (area === null || thickness === null || reflectance === null) return Number.NaN;
  const depths = depthsAt(line, signalUnit, thickness.value, factors);
  return excitonDensity({
    power_uW: inputs.transmission.value * factors.transmission * factors.power,
    lineDepth: depths.line * part,
    totalDepth: depths.total - depths.line * (1 - part),
    reflectance: Math.min(0.999, reflectance.value * factors.reflectance),
    reflections: inputs.reflections,
    lifetime_ps: lifetimeOf(line, inputs, factors),
    energy_eV: line.energy_eV,
    area_um2: area * factors.spot ** 2,
    thickness_um: thickness.value * factors.thickness,
  });
}

function expectedOf(
  interaction: Interaction,
  line: LineAtZero,
  inputs: GivenInputs,
  factors: Factors,
): { radius: number; hard: number; slab: number } {
  const coefficient = inputs.coefficient[interaction];
  if (coefficient === null) return { radius: Number.NaN, hard: Number.NaN, slab: Number.NaN };
  const radius = blockadeRadius(
    interaction,
    coefficient.value * factors.coefficient,
    line.n,
    line.lawWidth * factors.lawWidth,
    inputs.kappa,
  );
  const thickness = inputs.thickness === null ? null : inputs.thickness.value * factors.thickness;
  const slab = slabFactor(radius, thickness);
  return { radius, hard: sphereVolume(radius) * slab, slab };
}

export interface VolumeInput {
  readonly lines: readonly LineAtZero[];
  readonly covariance: FitCovariance;
  readonly inputs: GivenInputs;
  readonly signalUnit: "1/cm" | "1";
  readonly interaction: Interaction;
  /**
   * Fixed pump: index of its line and the part of that line's peak that its photon energy meets. The excitons that
   * block are then those of this line.
   */
  readonly pump?: { readonly line: number; readonly part: number } | undefined;
  readonly seed: number;
  readonly draws: number;
  readonly level: number;
}

/**
 * What      Densities, measured and expected volumes with their spread: seeded draws of every input, lognormal, the
 *           numbers from the spectra correlated as the fit says; median, interval at the level, multiplicative error. The
 *           budget is to first order: share of each input in the variance of ln V.
 * Units     um, um^3, uW, ps.
 * Accuracy  draws in pairs z, -z, so that the median keeps to the value of the formula.
 */
export function spreadVolumes(input: VolumeInput): LineVolume[] {
  const { lines, inputs, signalUnit, interaction } = input;
  const k = lines.length;
  const factor = drawFactors(input.covariance);
  const random = makeRandom(input.seed);
  const pairs = Math.ceil(input.draws / 2);
  const gather = lines.map(() => ({
    density: new Float64Array(2 * pairs),
    volume: new Float64Array(2 * pairs),
    radius: new Float64Array(2 * pairs),
    ratio: new Float64Array(2 * pairs),
    spot: new Float64Array(2 * pairs),
    expected: {
      "dipole-dipole": { radius: new Float64Array(2 * pairs), hard: new Float64Array(2 * pairs) },
      "van-der-waals": { radius: new Float64Array(2 * pairs), hard: new Float64Array(2 * pairs) },
    },
  }));
  const sigma = {
    power: inputs.powerSigma,
    transmission: inputs.transmission.relativeSigma,
    spot: inputs.spot?.relativeSigma ?? 0,
    thickness: inputs.thickness?.relativeSigma ?? 0,
    reflectance: inputs.reflectance?.relativeSigma ?? 0,
    lifetime: inputs.lifetimeSigma,
  };
  const fitNormals = new Float64Array(4 * k);
  const correlated = new Float64Array(4 * k);
  const surroundings = new Float64Array(k);
  const common = new Float64Array(7);
  // One record for all draws: they are many.
  const factors: MutableFactors = { ...UNCHANGED };
  const pumped: MutableFactors = { ...UNCHANGED };
  const setLine = (out: MutableFactors, line: number, sign: number): void => {
    out.saturation = Math.exp(sign * correlated[line]!);
    out.area = Math.exp(sign * correlated[k + line]!);
    out.width = Math.exp(sign * correlated[2 * k + line]!);
    out.lawWidth = Math.exp(sign * correlated[3 * k + line]!);
    out.surrounding = sign * surroundings[line]!;
  };
  for (let pair = 0; pair < pairs; pair++) {
    for (let i = 0; i < common.length; i++) common[i] = random.normal();
    for (let i = 0; i < 4 * k; i++) fitNormals[i] = random.normal();
    for (let i = 0; i < k; i++) surroundings[i] = random.normal();
    factor(fitNormals, correlated);
    for (const sign of [1, -1]) {
      const at = 2 * pair + (sign > 0 ? 0 : 1);
      const base = {
        power: Math.exp(sign * common[0]! * sigma.power),
        transmission: Math.exp(sign * common[1]! * sigma.transmission),
        spot: Math.exp(sign * common[2]! * sigma.spot),
        thickness: Math.exp(sign * common[3]! * sigma.thickness),
        reflectance: Math.exp(sign * common[4]! * sigma.reflectance),
        lifetime: Math.exp(sign * common[5]! * sigma.lifetime),
      };
      setCommon(factors, base);
      setCommon(pumped, base);
      if (input.pump !== undefined) setLine(pumped, input.pump.line, sign);
      for (let line = 0; line < k; line++) {
        const own = lines[line]!;
        const out = gather[line]!;
        let chosen = Number.NaN;
        setLine(factors, line, sign);
        for (const kind of ["dipole-dipole", "van-der-waals"] as const) {
          const spread = inputs.coefficient[kind]?.relativeSigma ?? 0;
          factors.coefficient = Math.exp(sign * common[6]! * spread);
          const expected = expectedOf(kind, own, inputs, factors);
          out.expected[kind].radius[at] = expected.radius;
          out.expected[kind].hard[at] = expected.hard;
          if (kind === interaction) chosen = expected.hard;
        }
        const density =
          input.pump === undefined
            ? densityOf(own, inputs, signalUnit, factors)
            : densityOf(lines[input.pump.line]!, inputs, signalUnit, pumped, input.pump.part);
        const volume = (own.saturation * factors.saturation) / density;
        out.density[at] = density;
        out.volume[at] = volume;
        out.radius[at] = sphereRadius(volume);
        out.ratio[at] = volume / chosen;
        const block = Number.isFinite(volume) ? volume : chosen;
        const thickness = inputs.thickness === null ? Number.NaN : inputs.thickness.value * base.thickness;
        out.spot[at] = Math.sqrt((4 * block) / (Math.PI * thickness));
      }
    }
  }
  const summary = (values: Float64Array): Spread => summarise(values, input.level);
  return lines.map((line, i) => {
    const out = gather[i]!;
    const depths = depthsAt(line, signalUnit, inputs.thickness?.value ?? null);
    const expected = (kind: Interaction): ExpectedSpread => {
      const { radius, hard } = out.expected[kind];
      const { soft } = INTERACTIONS[kind];
      return {
        radius: summary(radius),
        hard: summary(hard),
        soft: summary(hard.map((v) => v * soft)),
        slab: expectedOf(kind, line, inputs, UNCHANGED).slab,
      };
    };
    const sensitivity = sensitivities(input, i);
    return {
      lineDepth: depths.line,
      totalDepth: depths.total,
      absorbed:
        inputs.reflectance === null
          ? Number.NaN
          : absorbedFraction(depths.total, inputs.reflectance.value, inputs.reflections),
      lifetime_ps: lifetimeOf(line, inputs, UNCHANGED),
      densityPerUw: summary(out.density),
      volume: summary(out.volume),
      radius: summary(out.radius),
      expected: { "dipole-dipole": expected("dipole-dipole"), "van-der-waals": expected("van-der-waals") },
      ratio: summary(out.ratio),
      singleSpot: summary(out.spot),
      budget: sensitivity.budget,
      response: sensitivity.response,
      perSaturation: 1 / sensitivity.density,
    };
  });
}

/** d ln V by each input times its error, squared; and the response to the line's own fitted numbers. */
function sensitivities(
  input: VolumeInput,
  i: number,
): { budget: { input: string; share: number }[]; response: Float64Array; density: number } {
  const { lines, inputs, signalUnit, covariance } = input;
  const source = input.pump === undefined ? i : input.pump.line;
  const densityWith = (changed: Partial<Factors>): number =>
    densityOf(lines[source]!, inputs, signalUnit, { ...UNCHANGED, ...changed }, input.pump?.part ?? 1);
  const density = densityWith({});
  const step = 1e-4;
  const slope = (name: keyof Factors): number =>
    name === "surrounding"
      ? -(Math.log(densityWith({ surrounding: 0.01 })) - Math.log(densityWith({ surrounding: -0.01 }))) / 0.02
      : -(Math.log(densityWith({ [name]: 1 + step })) - Math.log(densityWith({ [name]: 1 - step }))) /
        (2 * step);
  const size = 4 * covariance.lines;
  const relative = (part: number, line: number): number => {
    const at = part * covariance.lines + line;
    return covariance.matrix[at * size + at]!;
  };
  const response = Float64Array.of(1, slope("area"), slope("width"), slope("lawWidth"));
  const a = FIT_PARTS.area * covariance.lines + source;
  const w = FIT_PARTS.width * covariance.lines + source;
  const lineAbsorption =
    response[1]! ** 2 * relative(FIT_PARTS.area, source) +
    response[2]! ** 2 * relative(FIT_PARTS.width, source) +
    2 * response[1]! * response[2]! * covariance.matrix[a * size + w]!;
  const lifetimeGiven = (inputs.lifetime?.(lines[source]!.n) ?? null) !== null;
  const parts: [string, number][] = [
    ["saturation", relative(FIT_PARTS.saturation, i)],
    ["absorption of the line", Math.max(0, lineAbsorption)],
    ["absorption beside the line", slope("surrounding") ** 2],
    [
      "lifetime",
      lifetimeGiven ? inputs.lifetimeSigma ** 2 : response[3]! ** 2 * relative(FIT_PARTS.lawWidth, source),
    ],
    ["power", inputs.powerSigma ** 2],
    ["transmission to sample", inputs.transmission.relativeSigma ** 2],
    ["spot diameter", (2 * (inputs.spot?.relativeSigma ?? 0)) ** 2],
    ["thickness", (slope("thickness") * (inputs.thickness?.relativeSigma ?? 0)) ** 2],
    ["reflectance", (slope("reflectance") * (inputs.reflectance?.relativeSigma ?? 0)) ** 2],
  ];
  const total = parts.reduce((sum, [, v]) => sum + v, 0);
  const budget =
    Number.isFinite(total) && total > 0 && Number.isFinite(density)
      ? parts.map(([name, v]) => ({ input: name, share: v / total })).sort((x, y) => y.share - x.share)
      : [];
  return { budget, response, density };
}

/** Multiplies normals by a factor of the covariance; parts without variance stay at 0. */
function drawFactors(covariance: FitCovariance): (normals: Float64Array, out: Float64Array) => void {
  const size = 4 * covariance.lines;
  const places: number[] = [];
  for (let i = 0; i < size; i++) {
    const variance = covariance.matrix[i * size + i]!;
    if (variance > 0 && variance < Infinity) places.push(i);
  }
  const r = places.length;
  const scale = places.map((i) => Math.sqrt(covariance.matrix[i * size + i]!));
  let factor: Float64Array | null = null;
  for (let ridge = 1e-10; factor === null && r > 0; ridge *= 100) {
    const matrix = new Float64Array(r * r);
    for (let i = 0; i < r; i++)
      for (let j = 0; j < r; j++)
        matrix[i * r + j] =
          covariance.matrix[places[i]! * size + places[j]!]! / (scale[i]! * scale[j]!) +
          (i === j ? ridge : 0);
    factor = choleskyFactor(matrix, r);
  }
  return (normals, out) => {
    out.fill(0);
    for (let i = 0; i < r; i++) {
      let sum = 0;
      for (let j = 0; j <= i; j++) sum += factor![i * r + j]! * normals[j]!;
      out[places[i]!] = scale[i]! * sum;
    }
  };
}

function summarise(values: Float64Array, level: number): Spread {
  if (values.some((v) => !Number.isFinite(v))) return NO_SPREAD;
  const sorted = Float64Array.from(values).sort();
  const at = (p: number): number => {
    const x = p * (sorted.length - 1);
    const i = Math.floor(x);
    return sorted[i]! + (x - i) * ((sorted[i + 1] ?? sorted[i]!) - sorted[i]!);
  };
  const value = at(0.5);
  const one = normalQuantile(0.5 + 0.6827 / 2);
  const spread = Math.log(at(0.5 + 0.6827 / 2) / at(0.5 - 0.6827 / 2)) / (2 * one);
  return {
    value,
    sigma: value * spread,
    low: at(0.5 - level / 2),
    high: at(0.5 + level / 2),
    factor: Math.exp(spread),
  };
}
