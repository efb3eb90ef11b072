import { propagate } from "../base/index.ts";
import { levelEnergy } from "../laws/index.ts";
import { levelGradient, type LevelFit } from "./level-fit.ts";

/** A derived number with its variance. */
export interface Derived {
  readonly value: number;
  readonly sigma: number;
}

/** Energies of all lines with their covariance, those outside the level fit included. */
export interface LineEnergies {
  readonly n: readonly number[];
  readonly energy_eV: Float64Array;
  /** (k x k, row-major) */
  readonly covariance: Float64Array;
}

/**
 * What      A number w E_i + h' theta of one line energy and the level parameters, with its standard error: the
 *           parameters come from the energies by theta = theta_0 + K E, so line and parameters are correlated by
 *           cov(E_i, theta) = V_i,fit K'.
 * Shapes    gradient h (5).
 */
function combine(
  fit: LevelFit,
  lines: LineEnergies,
  i: number,
  weight: number,
  gradient: Float64Array,
): number {
  const k = lines.n.length;
  const inFit = fit.n.map((n) => lines.n.indexOf(n));
  const columns = fit.n.length;
  let cross = 0;
  for (let p = 0; p < gradient.length; p++) {
    for (let c = 0; c < columns; c++) {
      const at = inFit[c]!;
      if (at >= 0) cross += gradient[p]! * fit.gain[p * columns + c]! * lines.covariance[i * k + at]!;
    }
  }
  const own = lines.covariance[i * k + i]!;
  return Math.max(
    0,
    weight * weight * own + 2 * weight * cross + propagate(gradient, fit.estimates.covariance),
  );
}

/** E_i minus the level law. */
export function offsetFromLaw(fit: LevelFit, lines: LineEnergies, i: number): Derived {
  const gradient = levelGradient(lines.n[i]!, fit.estimates.values).map((one) => -one);
  return {
    value: lines.energy_eV[i]! - energyAt(fit, lines.n[i]!),
    sigma: Math.sqrt(combine(fit, lines, i, 1, gradient)),
  };
}

/** Series limit minus E_i: the binding energy of a line. */
export function bindingOf(fit: LevelFit, lines: LineEnergies, i: number): Derived {
  const gradient = Float64Array.of(1, 0, 0, 0, 0);
  return {
    value: fit.estimates.values[0]! - lines.energy_eV[i]!,
    sigma: Math.sqrt(combine(fit, lines, i, -1, gradient)),
  };
}

/** The law at any n, half-integers too. */
export function lawAt(fit: LevelFit, n: number): Derived {
  return {
    value: energyAt(fit, n),
    sigma: Math.sqrt(propagate(levelGradient(n, fit.estimates.values), fit.estimates.covariance)),
  };
}

function energyAt(fit: LevelFit, n: number): number {
  const [gap, rydberg, defect0, defect2, defect4] = fit.estimates.values;
  return levelEnergy(n, gap!, rydberg!, defect0, defect2, defect4);
}
