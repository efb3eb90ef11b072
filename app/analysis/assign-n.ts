import type { Peak } from "./find-peaks.ts";

/** How a reading of n is pinned. */
export interface AssignmentChoices {
  /** Shift of n by which readings are told apart: |defect - centre| <= 0.5. */
  readonly defectCentre: number;
  /** The defect is held at its centre (too few lines, or the user wants none). */
  readonly defectHeld: boolean;
  /** Lowest n that the series can have. */
  readonly lowestN: number;
  readonly highestN: number;
}

export interface Assignment {
  readonly gap_eV: number;
  readonly rydberg_eV: number;
  readonly defect: number;
  /** Index into the peaks, by n; ascending in n. */
  readonly matched: readonly { readonly n: number; readonly peak: number }[];
  /** Peaks inside the series that belong to no n. */
  readonly unmatched: readonly number[];
  readonly score: number;
}

/**
 * What      The series law picks the principal quantum numbers: at the right gap the numbers t = (gap - E)^(-1/2) of
 *           the lines are equally spaced by Ry^(-1/2), so a gap and one pair of neighbouring lines make a hypothesis
 *           that all other lines judge. Missing lines and lines of another origin cost, but do not forbid.
 * Units     eV.
 * Domain    at least three lines; with three or four the defect is held at its centre.
 * Source    hypothesis and verification in the manner of Fischler and Bolles, Commun. ACM 24, 381 (1981), exhaustive
 *           instead of random, hence without a seed.
 */
export function assignPrincipalNumbers(
  peaks: readonly Peak[],
  choices: AssignmentChoices,
): Assignment | null {
  if (peaks.length < 3) return null;
  let best: Assignment | null = null;
  const strongest = peaks
    .map((_, i) => i)
    .sort((a, b) => peaks[b]!.significance - peaks[a]!.significance)
    .slice(0, 16)
    .sort((a, b) => a - b);
  const tops = strongest.slice(Math.max(0, strongest.length - 6));
  for (const top of tops) {
    const place = strongest.indexOf(top);
    if (place < 2) continue;
    const spacing = peaks[top]!.energy_eV - peaks[strongest[place - 1]!]!.energy_eV;
    for (let k = 0; k < GAP_TRIALS; k++) {
      const gap = peaks[top]!.energy_eV + spacing * 0.2 * 150 ** (k / (GAP_TRIALS - 1));
      const t = strongest.slice(0, place + 1).map((i) => 1 / Math.sqrt(gap - peaks[i]!.energy_eV));
      for (let a = 0; a < t.length - 1; a++) {
        for (let b = a + 1; b < Math.min(t.length, a + 4); b++) {
          for (let step = 1; step <= 2; step++) {
            const root = step / (t[b]! - t[a]!);
            if (root * t[0]! > choices.highestN) continue;
            const trial = judge(peaks, gap, root * root, choices);
            if (trial !== null && (best === null || trial.score > best.score)) best = trial;
          }
        }
      }
    }
  }
  return best === null ? null : refine(peaks, best, choices);
}

const GAP_TRIALS = 60;

function judge(
  peaks: readonly Peak[],
  gap: number,
  rydberg: number,
  choices: AssignmentChoices,
  known?: number,
): Assignment | null {
  const nu = peaks.map((peak) => (peak.energy_eV < gap ? Math.sqrt(rydberg / (gap - peak.energy_eV)) : NaN));
  let defect = known ?? choices.defectCentre;
  if (known === undefined && !choices.defectHeld) {
    // Circular mean of the fractional parts, taken on the turn that keeps the defect nearest to its centre.
    let sine = 0;
    let cosine = 0;
    for (let i = 0; i < nu.length; i++) {
      if (Number.isNaN(nu[i]!)) continue;
      const weight = merit(peaks[i]!);
      sine += weight * Math.sin(2 * Math.PI * nu[i]!);
      cosine += weight * Math.cos(2 * Math.PI * nu[i]!);
    }
    const turn = -Math.atan2(sine, cosine) / (2 * Math.PI) - choices.defectCentre;
    defect = choices.defectCentre + turn - Math.round(turn);
  }
  const byN = new Map<number, { peak: number; offset: number; gain: number }>();
  let loss = 0;
  for (let i = 0; i < peaks.length; i++) {
    if (Number.isNaN(nu[i]!)) {
      loss += 0.3 * merit(peaks[i]!);
      continue;
    }
    const at = nu[i]! + defect;
    const n = Math.round(at);
    const offset = at - n;
    const gain = merit(peaks[i]!) * (1 - (offset / TOLERANCE) ** 2);
    if (n < choices.lowestN || n > choices.highestN || Math.abs(offset) > TOLERANCE) {
      loss += (n < choices.lowestN ? 0.4 : 0.7) * merit(peaks[i]!);
      continue;
    }
    const other = byN.get(n);
    if (other === undefined || gain > other.gain) {
      if (other !== undefined) loss += 0.5 * merit(peaks[other.peak]!);
      byN.set(n, { peak: i, offset, gain });
    } else loss += 0.5 * merit(peaks[i]!);
  }
  if (byN.size < 3) return null;
  const ns = [...byN.keys()].sort((a, b) => a - b);
  const missing = ns[ns.length - 1]! - ns[0]! + 1 - ns.length;
  let gain = 0;
  for (const one of byN.values()) gain += one.gain;
  const score =
    gain -
    loss -
    2.5 * missing -
    strengthLoss(peaks, byN) -
    0.8 * Math.abs(defect - choices.defectCentre) -
    0.15 * ns[0]!;
  const used = new Set([...byN.values()].map((one) => one.peak));
  const low = peaks[byN.get(ns[0]!)!.peak]!.energy_eV;
  return {
    gap_eV: gap,
    rydberg_eV: rydberg,
    defect,
    matched: ns.map((n) => ({ n, peak: byN.get(n)!.peak })),
    unmatched: peaks
      .map((_, i) => i)
      .filter((i) => !used.has(i) && peaks[i]!.energy_eV >= low && peaks[i]!.energy_eV < gap),
    score,
  };
}

const TOLERANCE = 0.3;

/** Weight of a line in the judgement: a strong line says more, but not in proportion. */
function merit(peak: Peak): number {
  return Math.log2(1 + peak.significance / 5);
}

/** Area n^3 should vary smoothly: the spread of its logarithm about the median, beyond a factor two, costs. */
function strengthLoss(peaks: readonly Peak[], byN: ReadonlyMap<number, { peak: number }>): number {
  const logs = [...byN].map(([n, one]) =>
    Math.log(Math.max(1e-300, peaks[one.peak]!.height * peaks[one.peak]!.width_eV * n ** 3)),
  );
  const sorted = [...logs].sort((a, b) => a - b);
  const median = sorted[Math.floor(sorted.length / 2)]!;
  return logs.reduce((sum, value) => sum + 0.5 * Math.max(0, Math.abs(value - median) - Math.LN2), 0);
}

/** Least squares of the level law on the matched lines, each with a tolerance of a part of its spacing; then judged again. */
function refine(peaks: readonly Peak[], start: Assignment, choices: AssignmentChoices): Assignment {
  let best = start;
  for (let round = 0; round < 4; round++) {
    const held = choices.defectHeld || best.matched.length < 5;
    let { gap_eV: gap, rydberg_eV: rydberg, defect } = best;
    for (let iteration = 0; iteration < 20; iteration++) {
      const p = held ? 2 : 3;
      const normal = new Float64Array(p * p);
      const right = new Float64Array(p);
      for (const { n, peak } of best.matched) {
        const nu = n - defect;
        const tolerance = (2 * rydberg) / nu ** 3;
        const residual = (peaks[peak]!.energy_eV - (gap - rydberg / nu ** 2)) / tolerance;
        // Lines far off the law (low n) must not steer it: Cauchy weights at a twentieth of the spacing.
        const weight = merit(peaks[peak]!) / (1 + (residual / 0.05) ** 2);
        const row = [1 / tolerance, -1 / nu ** 2 / tolerance, (-2 * rydberg) / nu ** 3 / tolerance];
        for (let i = 0; i < p; i++) {
          right[i]! += weight * row[i]! * residual;
          for (let j = 0; j < p; j++) normal[i * p + j]! += weight * row[i]! * row[j]!;
        }
      }
      const step = solveSmall(normal, right, p);
      if (step === null) break;
      gap += step[0]!;
      rydberg += step[1]!;
      if (!held) defect += Math.max(-0.2, Math.min(0.2, step[2]!));
      if (!(rydberg > 0)) break;
    }
    if (!(rydberg > 0) || !Number.isFinite(gap + rydberg + defect)) return best;
    const turn = defect - choices.defectCentre;
    if (!held) defect -= Math.round(turn);
    const again = judge(peaks, gap, rydberg, choices, defect);
    if (again === null || again.score <= best.score) break;
    best = again;
  }
  return best;
}

function solveSmall(matrix: Float64Array, right: Float64Array, p: number): Float64Array | null {
  const a = Float64Array.from(matrix);
  const x = Float64Array.from(right);
  for (let i = 0; i < p; i++) {
    let pivot = i;
    for (let r = i + 1; r < p; r++) if (Math.abs(a[r * p + i]!) > Math.abs(a[pivot * p + i]!)) pivot = r;
    if (!(Math.abs(a[pivot * p + i]!) > 0)) return null;
    if (pivot !== i) {
      for (let j = 0; j < p; j++) [a[i * p + j], a[pivot * p + j]] = [a[pivot * p + j]!, a[i * p + j]!];
      [x[i], x[pivot]] = [x[pivot]!, x[i]!];
    }
    for (let r = i + 1; r < p; r++) {
      const factor = a[r * p + i]! / a[i * p + i]!;
      for (let j = i; j < p; j++) a[r * p + j]! -= factor * a[i * p + j]!;
      x[r]! -= factor * x[i]!;
    }
  }
  for (let i = p - 1; i >= 0; i--) {
    for (let j = i + 1; j < p; j++) x[i]! -= a[i * p + j]! * x[j]!;
    x[i]! /= a[i * p + i]!;
  }
  return x;
}
