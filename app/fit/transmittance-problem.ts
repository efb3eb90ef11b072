import type { GeneralProblem } from "../solve/index.ts";
import { transmittanceFromDepth, transmittanceSlope, type SurfaceModel } from "../units/index.ts";
import { applySlit, type SlitGrid } from "./transmittance-grid.ts";
import type { SpectrumProblem } from "./spectrum-problem.ts";

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
}

/**
 * What      One spectrum in the measured domain, T_i = [K t(d alpha(E; theta, c))]_i: alpha is the model of SpectrumProblem
 *           on the nodes of the slit, without instrument; t the plate with its surfaces (transmission.ts); K the mean over
 *           the slit (transmittance-grid.ts). dT/d(theta, c) = K diag(d t') [D | Phi].
 * Shapes    parameters theta (p), then c (k); model (m); Jacobian (m x (p + k), column-major).
 * Units     T as a fraction; parameters as in SpectrumProblem.
 * Domain    alpha of either sign; where exp(-alpha d) overflows the model is not finite and the solver turns back.
 * Accuracy  derivatives are those of the discretised model to rounding: tests/app/fit/transmittance-problem.test.ts.
 * Source    PHYSICS of the slit: it averages light, not absorption.
 */
export class TransmittanceProblem implements GeneralProblem {
  readonly rows: number;
  readonly parameters: number;
  readonly data: Float64Array;
  readonly weights: Float64Array;
  private readonly light: MeasuredLight;
  private readonly inner: SpectrumProblem;
  private readonly grid: SlitGrid;
  private readonly phi: Float64Array;
  private readonly derivative: Float64Array;
  private readonly depth: Float64Array;
  private readonly value: Float64Array;
  private readonly at: Float64Array;

  /** `inner`: the absorption on the grid's nodes. */
  constructor(light: MeasuredLight, inner: SpectrumProblem, grid: SlitGrid) {
    const nodes = grid.nodes.length;
    this.rows = light.energy.length;
    this.parameters = inner.nonlinear + inner.linear;
    this.data = light.value;
    this.weights = Float64Array.from(light.sigma, (sigma) => 1 / sigma);
    this.light = light;
    this.inner = inner;
    this.grid = grid;
    this.phi = new Float64Array(nodes * inner.linear);
    this.derivative = new Float64Array(nodes * inner.nonlinear);
    this.depth = new Float64Array(nodes);
    this.value = new Float64Array(nodes);
    this.at = new Float64Array(this.parameters).fill(NaN);
  }

  model(parameters: Float64Array, out: Float64Array): void {
    this.absorb(parameters);
    const { depth, value } = this;
    const { reflectance, surface } = this.light;
    for (let i = 0; i < depth.length; i++) value[i] = transmittanceFromDepth(depth[i]!, reflectance, surface);
    applySlit(this.grid, value, 0, out, 0);
  }

  jacobian(parameters: Float64Array, out: Float64Array): void {
    if (this.at.some((one, i) => one !== parameters[i])) this.absorb(parameters);
    const { inner, depth, value, derivative, phi, light, rows } = this;
    const nodes = depth.length;
    const p = inner.nonlinear;
    inner.derivatives(parameters.subarray(0, p), parameters.subarray(p), derivative);
    for (let i = 0; i < nodes; i++)
      value[i] = light.depthPerSignal * transmittanceSlope(depth[i]!, light.reflectance, light.surface);
    const column = new Float64Array(nodes);
    for (let j = 0; j < this.parameters; j++) {
      const source = j < p ? derivative : phi;
      const from = (j < p ? j : j - p) * nodes;
      for (let i = 0; i < nodes; i++) column[i] = value[i]! * source[from + i]!;
      applySlit(this.grid, column, 0, out, j * rows);
    }
  }

  /** Columns and optical depth on the nodes. */
  private absorb(parameters: Float64Array): void {
    const { inner, phi, depth, light } = this;
    const p = inner.nonlinear;
    const nodes = depth.length;
    inner.columns(parameters.subarray(0, p), phi);
    depth.fill(0);
    for (let j = 0; j < inner.linear; j++) {
      const c = light.depthPerSignal * parameters[p + j]!;
      const from = j * nodes;
      for (let i = 0; i < nodes; i++) depth[i]! += c * phi[from + i]!;
    }
    this.at.set(parameters);
  }
}
