import { continuum, type ContinuumEnvelope } from "./continuum.ts";

/**
 * One additive piece of the background: linear coefficients times columns, which may depend on a few nonlinear
 * parameters. To add a term, write a factory that returns this record.
 *
 * Shapes    fill writes column j, element i at out[offset + j * stride + i] for from <= i < to;
 *           differentiate writes the derivative of column j by nonlinear parameter p at
 *           out[offset + (p * columns.length + j) * stride + i].
 * Units     energies in eV; a coefficient has the unit of the signal unless its column says otherwise.
 */
export interface BackgroundTerm {
  readonly kind: "polynomial" | "onset" | "urbach" | "measured" | "fringes" | "continuum";
  /** Name of each linear coefficient. */
  readonly columns: readonly string[];
  /** Name of each nonlinear parameter, all in eV. */
  readonly nonlinear: readonly string[];
  fill(
    energies: Float64Array,
    from: number,
    to: number,
    nonlinear: ArrayLike<number>,
    out: Float64Array,
    offset: number,
    stride: number,
  ): void;
  differentiate(
    energies: Float64Array,
    from: number,
    to: number,
    nonlinear: ArrayLike<number>,
    out: Float64Array,
    offset: number,
    stride: number,
  ): void;
}

const nothing = (): void => undefined;

/**
 * What      Polynomial of given order in t = (E - middle)/halfSpan on Legendre polynomials P_0 ... P_order, whose columns
 *           stay nearly orthogonal on an even grid over the window.
 * Source    DLMF 18.9.1.
 */
export function polynomialTerm(order: number, middle: number, halfSpan: number): BackgroundTerm {
  return {
    kind: "polynomial",
    columns: Array.from({ length: order + 1 }, (_, k) => `legendre${k}`),
    nonlinear: [],
    fill: (energies, from, to, _nonlinear, out, offset, stride) => {
      for (let i = from; i < to; i++) {
        const t = (energies[i]! - middle) / halfSpan;
        let before = 0;
        let now = 1;
        for (let k = 0; k <= order; k++) {
          out[offset + k * stride + i] = now;
          const next = ((2 * k + 1) * t * now - k * before) / (k + 1);
          before = now;
          now = next;
        }
      }
    },
    differentiate: nothing,
  };
}

/**
 * What      Rows that turn Legendre coefficients into value, slope (per eV) and second derivative (per eV^2) of the
 *           polynomial at an energy, so that they and their covariance are plain products.
 * Shapes    three rows of order + 1.
 */
export function polynomialReading(
  order: number,
  middle: number,
  halfSpan: number,
  energy = middle,
): { readonly value: Float64Array; readonly slope: Float64Array; readonly curvature: Float64Array } {
  const t = (energy - middle) / halfSpan;
  const value = new Float64Array(order + 1);
  const slope = new Float64Array(order + 1);
  const curvature = new Float64Array(order + 1);
  value[0] = 1;
  for (let k = 0; k < order; k++) {
    const before = k > 0 ? k - 1 : -1;
    const earlier = (row: Float64Array): number => (before < 0 ? 0 : row[before]!);
    value[k + 1] = ((2 * k + 1) * t * value[k]! - k * earlier(value)) / (k + 1);
    // P'_(k+1) = P'_(k-1) + (2k+1) P_k, and the same once more.
    slope[k + 1] = earlier(slope) + (2 * k + 1) * value[k]!;
    curvature[k + 1] = earlier(curvature) + (2 * k + 1) * slope[k]!;
  }
  for (let k = 0; k <= order; k++) {
    slope[k]! /= halfSpan;
    curvature[k]! /= halfSpan * halfSpan;
  }
  return { value, slope, curvature };
}

/**
 * What      Phonon-assisted onset sqrt(E - onset) above a fixed energy, 0 below. Coefficient: signal per eV^(1/2).
 * Source    Elliott, Phys. Rev. 108, 1384 (1957).
 */
export function squareRootOnsetTerm(onset: number): BackgroundTerm {
  return {
    kind: "onset",
    columns: ["onset"],
    nonlinear: [],
    fill: (energies, from, to, _nonlinear, out, offset) => {
      for (let i = from; i < to; i++) out[offset + i] = Math.sqrt(Math.max(0, energies[i]! - onset));
    },
    differentiate: nothing,
  };
}

/**
 * What      Urbach tail exp[(E - reference)/E_U], nonlinear parameter E_U > 0. The coefficient is the signal at the
 *           reference; take the upper end of the window (or the gap), so that no value overflows.
 * Source    Urbach, Phys. Rev. 92, 1324 (1953).
 */
export function urbachTerm(reference: number): BackgroundTerm {
  return {
    kind: "urbach",
    columns: ["urbach"],
    nonlinear: ["urbach_eV"],
    fill: (energies, from, to, nonlinear, out, offset) => {
      const tail = nonlinear[0]!;
      for (let i = from; i < to; i++) out[offset + i] = Math.exp((energies[i]! - reference) / tail);
    },
    differentiate: (energies, from, to, nonlinear, out, offset) => {
      const tail = nonlinear[0]!;
      for (let i = from; i < to; i++) {
        const u = (energies[i]! - reference) / tail;
        out[offset + i] = (-u / tail) * Math.exp(u);
      }
    },
  };
}

/** What: a measured spectrum, already on the grid of the energies (see interpolateColumn), times a free factor. */
export function measuredTerm(values: Float64Array): BackgroundTerm {
  return {
    kind: "measured",
    columns: ["measured"],
    nonlinear: [],
    fill: (_energies, from, to, _nonlinear, out, offset) => {
      for (let i = from; i < to; i++) out[offset + i] = values[i]!;
    },
    differentiate: nothing,
  };
}

/**
 * What      Additive interference fringes a cos(p) + b sin(p), p = 2 pi (E - reference)/period: amplitude and phase are
 *           linear, the period is the nonlinear parameter. Good only while alpha d hardly varies.
 * Units     period in eV; thickness = hc/(2 n_g period).
 */
export function fringesTerm(reference: number): BackgroundTerm {
  return {
    kind: "fringes",
    columns: ["fringe_cos", "fringe_sin"],
    nonlinear: ["fringe_period_eV"],
    fill: (energies, from, to, nonlinear, out, offset, stride) => {
      const wave = (2 * Math.PI) / nonlinear[0]!;
      for (let i = from; i < to; i++) {
        const phase = wave * (energies[i]! - reference);
        out[offset + i] = Math.cos(phase);
        out[offset + stride + i] = Math.sin(phase);
      }
    },
    differentiate: (energies, from, to, nonlinear, out, offset, stride) => {
      const period = nonlinear[0]!;
      const wave = (2 * Math.PI) / period;
      for (let i = from; i < to; i++) {
        const phase = wave * (energies[i]! - reference);
        out[offset + i] = (Math.sin(phase) * phase) / period;
        out[offset + stride + i] = (-Math.cos(phase) * phase) / period;
      }
    },
  };
}

/** What: the continuum above the gap with a height of its own; tied to the lines, use `continuum` directly. */
export function continuumTerm(envelope: ContinuumEnvelope): BackgroundTerm {
  return {
    kind: "continuum",
    columns: ["continuum"],
    nonlinear: ["gap_eV", "rydberg_eV", "broadening_eV"],
    fill: (energies, from, to, nonlinear, out, offset) => {
      const [gap, rydberg, width] = [nonlinear[0]!, nonlinear[1]!, nonlinear[2]!];
      const column = out.subarray(offset);
      continuum(energies, from, to, gap, rydberg, envelope, width, column);
    },
    differentiate: (energies, from, to, nonlinear, out, offset, stride) => {
      const [gap, rydberg, width] = [nonlinear[0]!, nonlinear[1]!, nonlinear[2]!];
      const value = new Float64Array(energies.length);
      const part = (p: number): Float64Array => out.subarray(offset + p * stride);
      continuum(energies, from, to, gap, rydberg, envelope, width, value, part(0), part(1), part(2));
    },
  };
}
