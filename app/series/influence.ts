import { choleskyFactor, choleskySolve } from "../solve/index.ts";
import { fitLevels, levelGradient, type LevelFit, type LevelInput } from "./level-fit.ts";
import { selectMatrix, selectVector } from "./select-lines.ts";

/** What one line does to the level law. */
export interface LineInfluence {
  readonly n: number;
  /** Diagonal of the hat matrix J C J' V^-1: how much of the line's fitted energy is its own reading; they sum to the free parameters. */
  readonly leverage: number;
  /** Energy minus law over the standard error of that difference. */
  readonly residual: number;
  /** Change of each parameter when the line is left out, in its standard error with the line; null where it was held or cannot be fitted. */
  readonly gap_eV: number | null;
  readonly rydberg_eV: number | null;
  readonly defect0: number | null;
}

/**
 * What      Leverage and influence of every line on the level law: each line left out in turn and the law fitted again with the
 *           full covariance of the others.
 * Domain    `input` holds the lines of the fit or more; with no line to spare the changes are null.
 * Source    Belsley, Kuh, Welsch, Regression Diagnostics (1980), 2.1 (hat matrix, DFBETAS), with V for the identity.
 */
export function levelInfluence(input: LevelInput, fit: LevelFit): LineInfluence[] {
  const places = fit.n.map((n) => input.n.indexOf(n));
  if (places.some((place) => place < 0)) return [];
  const k = places.length;
  const energy = selectVector(input.energy_eV, places);
  const covariance = selectMatrix(input.covariance, input.n.length, places);
  const { values } = fit.estimates;
  const leverage = leverages(fit, covariance, values);
  const kept = (without: number): LevelFit | null => {
    const rest = fit.n.map((_, i) => i).filter((i) => i !== without);
    const again = fitLevels({
      ...input,
      how: "newton",
      n: rest.map((i) => fit.n[i]!),
      energy_eV: selectVector(energy, rest),
      covariance: selectMatrix(covariance, k, rest),
    });
    return again.ok && again.value.defect === fit.defect ? again.value : null;
  };
  return fit.n.map((n, i) => {
    const without = fit.degreesOfFreedom > 0 ? kept(i) : null;
    const change = (p: number): number | null => {
      const sigma = Math.sqrt(fit.estimates.covariance[p * (values.length + 1)]!);
      if (without === null || !(sigma > 0)) return null;
      return (without.estimates.values[p]! - values[p]!) / sigma;
    };
    const sigma = fit.offsetSigma_eV[i]!;
    return {
      n,
      leverage: leverage[i]!,
      residual: sigma > 0 ? fit.offset_eV[i]! / sigma : 0,
      gap_eV: change(0),
      rydberg_eV: change(1),
      defect0: change(2),
    };
  });
}

function leverages(fit: LevelFit, covariance: Float64Array, values: Float64Array): Float64Array {
  const k = fit.n.length;
  const size = values.length;
  const out = new Float64Array(k).fill(NaN);
  // V brought to a unit diagonal, as the energies' errors span orders of magnitude.
  const scale = Float64Array.from(fit.n, (_, i) => 1 / Math.sqrt(covariance[i * k + i]!));
  const correlation = covariance.map((value, at) => value * scale[Math.floor(at / k)]! * scale[at % k]!);
  const factor = choleskyFactor(correlation, k);
  if (factor === null) return out;
  const gradients = fit.n.map((n) => levelGradient(n, values));
  for (let i = 0; i < k; i++) {
    // Row i of J C J', then its product with column i of V^-1.
    const unit = new Float64Array(k);
    unit[i] = 1;
    choleskySolve(factor, k, unit);
    let sum = 0;
    for (let j = 0; j < k; j++) {
      let element = 0;
      for (let a = 0; a < size; a++)
        for (let b = 0; b < size; b++)
          element += gradients[i]![a]! * fit.estimates.covariance[a * size + b]! * gradients[j]![b]!;
      sum += element * unit[j]! * scale[i]! * scale[j]!;
    }
    out[i] = sum;
  }
  return out;
}
