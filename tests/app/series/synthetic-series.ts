import { makeRandom, type Random } from "../../../app/base/index.ts";

/** Cuprous-oxide-like lines n = 2..12 with errors that grow as real ones do, written out here apart from app/laws. */
export const TRUTH = {
  gap: 2.17205,
  rydberg: 0.0913,
  defect: 0.21,
  floor: 4e-6,
  coefficient: 0.016,
  strength: 12.5,
};
export const LINES = [2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12];

export const energyOf = (n: number): number => TRUTH.gap - TRUTH.rydberg / (n - TRUTH.defect) ** 2;
export const widthOf = (n: number): number => TRUTH.floor + TRUTH.coefficient / n ** 3;
export const areaOf = (n: number): number => (TRUTH.strength * (n * n - 1)) / n ** 5;

/** sigma_i sigma_j 0.3^|i-j| */
export function chained(sigmas: readonly number[]): Float64Array {
  const k = sigmas.length;
  const out = new Float64Array(k * k);
  for (let i = 0; i < k; i++)
    for (let j = 0; j < k; j++) out[i * k + j] = sigmas[i]! * sigmas[j]! * 0.3 ** Math.abs(i - j);
  return out;
}

/** Draws of covariance `chained(sigmas)`: a first-order autoregressive chain of normal numbers. */
export function drawChained(sigmas: readonly number[], random: Random): Float64Array {
  let last = 0;
  return Float64Array.from(sigmas, (sigma, i) => {
    last = i === 0 ? random.normal() : 0.3 * last + Math.sqrt(1 - 0.09) * random.normal();
    return sigma * last;
  });
}

export function lineEnergies(
  seed: number | null,
  n: readonly number[] = LINES,
): { n: readonly number[]; energy_eV: Float64Array; covariance: Float64Array } {
  const sigmas = n.map((one) => 0.01 * widthOf(one));
  const noise = seed === null ? new Float64Array(n.length) : drawChained(sigmas, makeRandom(seed));
  return {
    n,
    energy_eV: Float64Array.from(n, (one, i) => energyOf(one) + noise[i]!),
    covariance: chained(sigmas),
  };
}

export function mustBe<T>(result: { ok: true; value: T } | { ok: false; issues: readonly unknown[] }): T {
  if (!result.ok) throw new Error(JSON.stringify(result.issues));
  return result.value;
}
