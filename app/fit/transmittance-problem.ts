import { interpolateColumn } from "../lines/index.ts";
import type { GeneralProblem, SeparableProblem } from "../solve/index.ts";
import { transmittanceFromDepth, transmittanceSlope, type SurfaceModel } from "../units/index.ts";
import { applySlit, type SlitGrid } from "./transmittance-grid.ts";

/**
 * Transmitted light as it was measured, and how it comes about.
 * Shapes  energy (ascending), value, sigma (m). Units: energy eV; value and sigma as fractions.
 */
export interface MeasuredLight {
  readonly energy: Float64Array;
  readonly value: Float64Array;
  readonly sigma: Float64Array;
  readonly surface: SurfaceModel;
  readonly reflectance: number;
  /** Natural optical depth of one unit of the signal: the thickness in cm where the signal is alpha, else 1. */
  readonly depthPerSignal: number;
  /** Standard deviation of the Gaussian slit in eV; 0 for none. */
  readonly slitStd: number;
  /** Energy (eV) at which `slitStd` holds, where the slit is constant in wavelength; null: the same everywhere. */
  readonly slitReference?: number | null;
  /** Fringes of a coherent plate; none by default. `reflectance` is that of one surface, also where none is corrected for. */
  readonly fringes?: {
    readonly reflectance: number;
    /** Energy at which the phase is counted. */
    readonly reference: number;
    /** Whether lines change the phase by their own index (`AbsorptionModel` of the turned pair is asked for). */
    readonly dispersion: boolean;
    readonly start: { readonly visibility: number; readonly period: number; readonly phase: number };
  } | null;
  /** Stray light as a part of the incident light: held at a value, or free from a start. */
  readonly stray?: { readonly value: number; readonly free: boolean } | null;
}

/** The absorption as the plate needs it: what SpectrumProblem and ConstrainedProblem offer. */
export type AbsorptionModel = Pick<
  SeparableProblem,
  "nonlinear" | "linear" | "columns" | "derivatives" | "offset"
>;

/**
 * What      One spectrum in the measured domain, T_i = ([K t(d alpha(E; theta, c), E)]_i + s)/(1 + s): alpha is the model of
 *           SpectrumProblem on the nodes of the slit, without instrument; t the plate with its surfaces (transmission.ts), or
 *           with fringes t = (1-R)^2 x/(1 + R^2 x^2 - 2 v R x cos phi), phi = 2 pi (E - E_ref)/period + phi0 ((1-R)^2 taken
 *           as 1 where surfaces are not corrected for). With 'dispersion' the lines' change of the index turns the phase too,
 *           phi = ... + d beta(E; theta, c), beta the other half of the lines' response (turnPair) in the unit of alpha:
 *           2 dn E/(hbar c) = beta. The index of the surfaces stays: dR/R = 4 dn/(n^2 - 1) is left out. K the mean over the slit (transmittance-grid.ts); s stray light.
 *           dT/d(theta, c) = K {diag(d t') [D | Phi] + diag(d dt/dphi) [D_beta | Phi_beta]}/(1 + s).
 * Shapes    parameters theta (p), then c (k), then visibility, period, phase with fringes, then s where it is free; model
 *           (m); Jacobian column-major.
 * Units     T as a fraction; period in eV; other parameters as in SpectrumProblem.
 * Domain    alpha of either sign; where exp(-alpha d) overflows the model is not finite and the solver turns back.
 * Accuracy  derivatives are those of the discretised model to rounding: tests/app/fit/transmittance-problem.test.ts.
 * Source    the slit averages light, not absorption; fringes: Airy's sum with partial coherence v; the phase of a line is
 *           tied to its absorption by the Kramers-Kronig relations: tests/app/analysis/coherent-plate.test.ts.
 */
export class TransmittanceProblem implements GeneralProblem {
  readonly rows: number;
  readonly parameters: number;
  readonly data: Float64Array;
  readonly weights: Float64Array;
  /** Place of visibility (period and phase follow), and of s; -1 where they are not parameters. */
  readonly fringesAt: number;
  readonly strayAt: number;
  private readonly light: MeasuredLight;
  private readonly inner: AbsorptionModel;
  private readonly grid: SlitGrid;
  private readonly phi: Float64Array;
  private readonly held: Float64Array;
  private readonly derivative: Float64Array;
  private readonly depth: Float64Array;
  private readonly value: Float64Array;
  private readonly at: Float64Array;
  private readonly partner: Partner | null;

  /** `inner`: the absorption on the grid's nodes; `partner`: the same model of the index, where the phase needs it. */
  constructor(
    light: MeasuredLight,
    inner: AbsorptionModel,
    grid: SlitGrid,
    partner: AbsorptionModel | null = null,
  ) {
    const nodes = grid.nodes.length;
    this.rows = light.energy.length;
    let count = inner.nonlinear + inner.linear;
    this.fringesAt = (light.fringes ?? null) === null ? -1 : count;
    if (this.fringesAt >= 0) count += 3;
    this.strayAt = light.stray?.free === true ? count++ : -1;
    this.parameters = count;
    this.data = light.value;
    this.weights = Float64Array.from(light.sigma, (sigma) => 1 / sigma);
    this.light = light;
    this.inner = inner;
    this.grid = grid;
    this.phi = new Float64Array(nodes * inner.linear);
    this.held = new Float64Array(inner.offset === undefined ? 0 : nodes);
    this.derivative = new Float64Array(nodes * inner.nonlinear);
    this.depth = new Float64Array(nodes);
    this.value = new Float64Array(nodes);
    this.at = new Float64Array(this.parameters).fill(NaN);
    this.partner =
      partner === null
        ? null
        : {
            model: partner,
            phi: new Float64Array(nodes * inner.linear),
            held: new Float64Array(inner.offset === undefined ? 0 : nodes),
            derivative: new Float64Array(nodes * inner.nonlinear),
            phase: new Float64Array(nodes),
          };
  }

  model(parameters: Float64Array, out: Float64Array): void {
    this.absorb(parameters);
    const { value, grid } = this;
    const plate = this.plateAt(parameters);
    this.transmit(plate, value);
    applySlit(grid, value, 0, out, 0);
    const stray = this.strayOf(parameters);
    if (stray !== 0) for (let i = 0; i < this.rows; i++) out[i] = (out[i]! + stray) / (1 + stray);
  }

  jacobian(parameters: Float64Array, out: Float64Array): void {
    if (this.at.some((one, i) => one !== parameters[i])) this.absorb(parameters);
    const { inner, depth, value, derivative, phi, light, rows, grid, partner } = this;
    const nodes = depth.length;
    const p = inner.nonlinear;
    const count = p + inner.linear;
    inner.derivatives(parameters.subarray(0, p), parameters.subarray(p, count), derivative);
    const plate = this.plateAt(parameters);
    const share = 1 / (1 + this.strayOf(parameters));
    const turned = new Float64Array(plate === null || partner === null ? 0 : nodes);
    if (plate !== null && partner !== null) {
      partner.model.derivatives(parameters.subarray(0, p), parameters.subarray(p, count), partner.derivative);
      for (let i = 0; i < nodes; i++)
        turned[i] =
          share * light.depthPerSignal * phaseSlope(depth[i]!, this.phaseAt(i, plate), light, plate);
    }
    for (let i = 0; i < nodes; i++)
      value[i] =
        share * light.depthPerSignal * transmittedSlope(depth[i]!, this.phaseAt(i, plate), light, plate);
    const column = new Float64Array(nodes);
    for (let j = 0; j < count; j++) {
      const source = j < p ? derivative : phi;
      const from = (j < p ? j : j - p) * nodes;
      for (let i = 0; i < nodes; i++) column[i] = value[i]! * source[from + i]!;
      if (turned.length > 0) {
        const beta = j < p ? partner!.derivative : partner!.phi;
        for (let i = 0; i < nodes; i++) column[i]! += turned[i]! * beta[from + i]!;
      }
      applySlit(grid, column, 0, out, j * rows);
    }
    if (plate !== null) {
      const slopes = Array.from({ length: 3 }, () => new Float64Array(nodes));
      for (let i = 0; i < nodes; i++) {
        const phase = this.phaseAt(i, plate);
        fringeSlopes(depth[i]!, grid.nodes[i]!, phase, light, plate, slopes, i, share);
      }
      slopes.forEach((one, j) => {
        applySlit(grid, one, 0, out, (this.fringesAt + j) * rows);
      });
    }
    if (this.strayAt >= 0) {
      this.transmit(plate, value);
      applySlit(grid, value, 0, out, this.strayAt * rows);
      for (let i = this.strayAt * rows; i < (this.strayAt + 1) * rows; i++)
        out[i] = (1 - out[i]!) * share * share;
    }
  }

  /** d T/d signal at an energy where the signal without instrument is `signal`, at the phase that is there. */
  slopeAt(parameters: Float64Array, energy: number, signal: number): number {
    const { light } = this;
    const depth = signal * light.depthPerSignal;
    const plate = this.plateAt(parameters);
    if (plate === null)
      return (
        (light.depthPerSignal * transmittedSlope(depth, 0, light, null)) / (1 + this.strayOf(parameters))
      );
    if (this.at.some((one, i) => one !== parameters[i])) this.absorb(parameters);
    const phase = plainPhase(energy, plate) + this.turnedAt(energy);
    const slope = transmittedSlope(depth, phase, light, plate);
    return (light.depthPerSignal * slope) / (1 + this.strayOf(parameters));
  }

  private plateAt(parameters: Float64Array): Plate | null {
    const { fringes } = this.light;
    if (fringes === null || fringes === undefined) return null;
    const at = this.fringesAt;
    return {
      reflectance: fringes.reflectance,
      reference: fringes.reference,
      visibility: parameters[at]!,
      period: parameters[at + 1]!,
      phase: parameters[at + 2]!,
    };
  }

  private transmit(plate: Plate | null, out: Float64Array): void {
    const { depth, light } = this;
    for (let i = 0; i < depth.length; i++)
      out[i] = transmitted(depth[i]!, this.phaseAt(i, plate), light, plate);
  }

  /** phi at node i. */
  private phaseAt(i: number, plate: Plate | null): number {
    if (plate === null) return 0;
    return plainPhase(this.grid.nodes[i]!, plate) + (this.partner?.phase[i] ?? 0);
  }

  /** What the lines add to the phase at an energy, straight between nodes. */
  private turnedAt(energy: number): number {
    if (this.partner === null) return 0;
    const out = new Float64Array(1);
    interpolateColumn(this.grid.nodes, this.partner.phase, Float64Array.of(energy), 0, 1, out);
    return out[0]!;
  }

  private strayOf(parameters: Float64Array): number {
    return this.strayAt >= 0 ? parameters[this.strayAt]! : (this.light.stray?.value ?? 0);
  }

  /** Columns and optical depth on the nodes, and what the lines add to the phase there. */
  private absorb(parameters: Float64Array): void {
    const { inner, phi, depth, held, partner } = this;
    this.addUp(inner, parameters, phi, held, depth);
    if (partner !== null) this.addUp(partner.model, parameters, partner.phi, partner.held, partner.phase);
    this.at.set(parameters);
  }

  private addUp(
    model: AbsorptionModel,
    parameters: Float64Array,
    phi: Float64Array,
    held: Float64Array,
    out: Float64Array,
  ): void {
    const { light } = this;
    const p = model.nonlinear;
    const nodes = out.length;
    const theta = parameters.subarray(0, p);
    model.columns(theta, phi);
    out.fill(0);
    if (model.offset !== undefined) {
      model.offset(theta, held);
      for (let i = 0; i < nodes; i++) out[i] = light.depthPerSignal * held[i]!;
    }
    for (let j = 0; j < model.linear; j++) {
      const c = light.depthPerSignal * parameters[p + j]!;
      const from = j * nodes;
      for (let i = 0; i < nodes; i++) out[i]! += c * phi[from + i]!;
    }
  }
}

interface Plate {
  readonly reflectance: number;
  readonly reference: number;
  readonly visibility: number;
  readonly period: number;
  readonly phase: number;
}

/** The model of the index beside that of the absorption; arrays as there, `phase` is d beta. */
interface Partner {
  readonly model: AbsorptionModel;
  readonly phi: Float64Array;
  readonly held: Float64Array;
  readonly derivative: Float64Array;
  readonly phase: Float64Array;
}

function plainPhase(energy: number, plate: Plate): number {
  return (2 * Math.PI * (energy - plate.reference)) / plate.period + plate.phase;
}

function through(light: MeasuredLight, R: number): number {
  return light.surface === "none" ? 1 : (1 - R) * (1 - R);
}

function transmitted(depth: number, phase: number, light: MeasuredLight, plate: Plate | null): number {
  if (plate === null) return transmittanceFromDepth(depth, light.reflectance, light.surface);
  const R = plate.reflectance;
  const x = Math.exp(-depth);
  const below = 1 + R * R * x * x - 2 * plate.visibility * R * x * Math.cos(phase);
  return (through(light, R) * x) / below;
}

/** dt/d(alpha d). */
function transmittedSlope(depth: number, phase: number, light: MeasuredLight, plate: Plate | null): number {
  if (plate === null) return transmittanceSlope(depth, light.reflectance, light.surface);
  const R = plate.reflectance;
  const x = Math.exp(-depth);
  const below = 1 + R * R * x * x - 2 * plate.visibility * R * x * Math.cos(phase);
  return (-through(light, R) * x * (1 - R * R * x * x)) / (below * below);
}

/** dt/d phi. */
function phaseSlope(depth: number, phase: number, light: MeasuredLight, plate: Plate): number {
  const R = plate.reflectance;
  const x = Math.exp(-depth);
  const below = 1 + R * R * x * x - 2 * plate.visibility * R * x * Math.cos(phase);
  return (-2 * through(light, R) * x * plate.visibility * R * x * Math.sin(phase)) / (below * below);
}

/** out[0..2][i]: dt by visibility, period, phase. */
function fringeSlopes(
  depth: number,
  energy: number,
  phase: number,
  light: MeasuredLight,
  plate: Plate,
  out: readonly Float64Array[],
  i: number,
  share: number,
): void {
  const R = plate.reflectance;
  const x = Math.exp(-depth);
  const below = 1 + R * R * x * x - 2 * plate.visibility * R * x * Math.cos(phase);
  const common = (share * through(light, R) * x * 2 * R * x) / (below * below);
  out[0]![i] = common * Math.cos(phase);
  const byPhase = -common * plate.visibility * Math.sin(phase);
  out[1]![i] = (byPhase * -2 * Math.PI * (energy - plate.reference)) / (plate.period * plate.period);
  out[2]![i] = byPhase;
}
