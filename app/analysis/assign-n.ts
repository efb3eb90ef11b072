import { choleskyFactor, choleskySolve } from "../solve/index.ts";
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
 *           that all other lines judge. Missing lines and lines of another origin cost, but do not forbid. The best
 *           distinct readings are returned, best first, since the fit may think otherwise of them than the peaks do.
 * Units     eV.
 * Domain    at least three lines; with three or four the defect is held at its centre.
 * Source    hypothesis and verification in the manner of Fischler and Bolles, Commun. ACM 24, 381 (1981), exhaustive
 *           instead of random, hence without a seed.
 */
export function listAssignments(
  peaks: readonly Peak[],
  choices: AssignmentChoices,
  most: number,
): Assignment[] {
  if (peaks.length < 3) return [];
  const judge = new Judge(peaks, choices);
  let best = -Infinity;
  const hypotheses = new Map<number, { score: number; gap: number; rydberg: number }>();
  const strongest = peaks
    .map((_, i) => i)
    .sort((a, b) => peaks[b]!.significance - peaks[a]!.significance)
    .slice(0, 16)
    .sort((a, b) => a - b);
  for (const top of strongest.slice(-MOST_TOPS)) {
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
            const score = judge.score(gap, root * root, null, best - MARGIN);
            if (score === -Infinity) continue;
            if (score > best) best = score;
            const key = judge.ownership();
            const known = hypotheses.get(key);
            if (known === undefined || score > known.score)
              hypotheses.set(key, { score, gap, rydberg: root * root });
          }
        }
      }
    }
  }
  const least = LEAST_SHARE * peaks.reduce((sum, peak) => sum + merit(peak), 0);
  const readings = new Map<number, Assignment>();
  const promising = [...hypotheses.values()]
    .filter((one) => one.score > best - MARGIN)
    .sort((a, b) => b.score - a.score)
    .slice(0, 4 * most);
  for (const { gap, rydberg } of promising) {
    const start = judge.assignment(gap, rydberg, null);
    if (start === null) continue;
    const refined = refine(peaks, judge, start, choices);
    if (refined.score < least) continue;
    judge.assignment(refined.gap_eV, refined.rydberg_eV, refined.defect);
    const key = judge.ownership();
    const known = readings.get(key);
    if (known === undefined || refined.score > known.score) readings.set(key, refined);
  }
  return [...readings.values()].sort((a, b) => b.score - a.score).slice(0, most);
}

/**
 * Two peaks as the two lowest lines, the defect held: no more than a start, which stands only if the fit finds a third
 * line where this says it must be.
 */
export function assignTwoPeaks(peaks: readonly Peak[], choices: AssignmentChoices): Assignment | null {
  if (peaks.length !== 2) return null;
  const n = choices.lowestN;
  const [low, high] = [peaks[0]!, peaks[1]!];
  const defect = choices.defectCentre;
  const [a, b] = [(n - defect) ** -2, (n + 1 - defect) ** -2];
  const rydberg = (high.energy_eV - low.energy_eV) / (a - b);
  return {
    gap_eV: low.energy_eV + rydberg * a,
    rydberg_eV: rydberg,
    defect,
    matched: [
      { n, peak: 0 },
      { n: n + 1, peak: 1 },
    ],
    unmatched: [],
    score: 0,
  };
}

/** Readings this much worse than the best in the judgement of the peaks alone are left to the fit to judge. */
const MARGIN = 7;
/** A ladder whose lowest line has a high n is less likely: its stronger lines must all lie outside the spectrum. */
const LOW_N_COST = 0.4;
/** A series accounts for at least this part of what the peaks are worth; equal spacings and chance reach about a third. */
const LEAST_SHARE = 0.45;
const GAP_TRIALS = 60;
const MOST_TOPS = 6;

/** Judges hypotheses on one set of peaks; its arrays are reused, since thousands are judged. */
class Judge {
  private readonly peaks: readonly Peak[];
  private readonly choices: AssignmentChoices;
  private readonly merits: Float64Array;
  private readonly nu: Float64Array;
  /** By n: the peak that has it (-1 for none) and what it gains. */
  private readonly owner: Int32Array;
  private readonly gain: Float64Array;
  private defect = 0;

  constructor(peaks: readonly Peak[], choices: AssignmentChoices) {
    this.peaks = peaks;
    this.choices = choices;
    this.merits = Float64Array.from(peaks, merit);
    this.nu = new Float64Array(peaks.length);
    this.owner = new Int32Array(choices.highestN + 1);
    this.gain = new Float64Array(choices.highestN + 1);
  }

  /** Score of a gap and a Rydberg energy; -Infinity with fewer than three lines, or where it cannot exceed `least`. */
  score(gap: number, rydberg: number, defect: number | null, least: number): number {
    const { peaks, choices, merits, nu, owner, gain } = this;
    for (let i = 0; i < peaks.length; i++) {
      const depth = gap - peaks[i]!.energy_eV;
      nu[i] = depth > 0 ? Math.sqrt(rydberg / depth) : NaN;
    }
    this.defect = defect ?? (choices.defectHeld ? choices.defectCentre : this.meanDefect());
    owner.fill(-1);
    let score = 0;
    for (let i = 0; i < peaks.length; i++) {
      const weight = merits[i]!;
      if (Number.isNaN(nu[i]!)) {
        score -= 0.3 * weight;
        continue;
      }
      const at = nu[i]! + this.defect;
      const n = Math.round(at);
      const offset = at - n;
      if (n < choices.lowestN || n > choices.highestN || Math.abs(offset) > TOLERANCE) {
        score -= (n < choices.lowestN ? 0.4 : 0.7) * weight;
        continue;
      }
      const worth = weight * (1 - (offset / TOLERANCE) ** 2);
      const other = owner[n]!;
      if (other < 0) {
        owner[n] = i;
        gain[n] = worth;
        score += worth;
      } else if (worth > gain[n]!) {
        score += worth - gain[n]! - 0.5 * merits[other]!;
        owner[n] = i;
        gain[n] = worth;
      } else score -= 0.5 * weight;
    }
    let first = 0;
    let last = 0;
    let count = 0;
    for (let n = 1; n < owner.length; n++) {
      if (owner[n]! < 0) continue;
      if (count === 0) first = n;
      last = n;
      count++;
    }
    if (count < 3) return -Infinity;
    score -=
      2.5 * (last - first + 1 - count) +
      0.8 * Math.abs(this.defect - choices.defectCentre) +
      LOW_N_COST * (first - choices.lowestN);
    if (score <= least) return -Infinity;
    return score - this.strengthLoss(count);
  }

  /** Which peak has which n after the last score, as a number (two readings may share one by a chance of 2^-32). */
  ownership(): number {
    let hash = 0x811c9dc5;
    for (const owner of this.owner) hash = Math.imul(hash ^ (owner + 1), 0x01000193);
    return hash >>> 0;
  }

  /** The assignment behind a score. */
  assignment(gap: number, rydberg: number, defect: number | null): Assignment | null {
    const score = this.score(gap, rydberg, defect, -Infinity);
    if (score === -Infinity) return null;
    const { peaks, owner } = this;
    const matched: { n: number; peak: number }[] = [];
    for (let n = 1; n < owner.length; n++) if (owner[n]! >= 0) matched.push({ n, peak: owner[n]! });
    const used = new Set(matched.map((one) => one.peak));
    const low = peaks[matched[0]!.peak]!.energy_eV;
    return {
      gap_eV: gap,
      rydberg_eV: rydberg,
      defect: this.defect,
      matched,
      unmatched: peaks
        .map((_, i) => i)
        .filter((i) => !used.has(i) && peaks[i]!.energy_eV >= low && peaks[i]!.energy_eV < gap),
      score,
    };
  }

  /** Circular mean of the fractional parts, taken on the turn that keeps the defect nearest to its centre. */
  private meanDefect(): number {
    const { nu, merits, choices } = this;
    let sine = 0;
    let cosine = 0;
    for (let i = 0; i < nu.length; i++) {
      if (Number.isNaN(nu[i]!)) continue;
      sine += merits[i]! * Math.sin(2 * Math.PI * nu[i]!);
      cosine += merits[i]! * Math.cos(2 * Math.PI * nu[i]!);
    }
    const turn = -Math.atan2(sine, cosine) / (2 * Math.PI) - choices.defectCentre;
    return choices.defectCentre + turn - Math.round(turn);
  }

  /** Area n^3 should vary smoothly: the spread of its logarithm about the median, beyond a factor two, costs. */
  private strengthLoss(count: number): number {
    const { peaks, owner } = this;
    const logs = new Float64Array(count);
    let at = 0;
    for (let n = 1; n < owner.length; n++) {
      if (owner[n]! < 0) continue;
      const peak = peaks[owner[n]!]!;
      logs[at++] = Math.log(Math.max(1e-300, peak.height * peak.width_eV * n ** 3));
    }
    logs.sort();
    const median = logs[Math.floor(count / 2)]!;
    return logs.reduce((sum, value) => sum + 0.5 * Math.max(0, Math.abs(value - median) - Math.LN2), 0);
  }
}

const TOLERANCE = 0.3;

/** Weight of a line in the judgement: a strong line says more, but not in proportion. */
function merit(peak: Peak): number {
  return Math.log2(1 + peak.significance / 5);
}

/** Least squares of the level law on the matched lines, each with a tolerance of a part of its spacing; then judged again. */
function refine(
  peaks: readonly Peak[],
  judge: Judge,
  start: Assignment,
  choices: AssignmentChoices,
): Assignment {
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
      const factor = choleskyFactor(normal, p);
      if (factor === null) break;
      choleskySolve(factor, p, right);
      gap += right[0]!;
      rydberg += right[1]!;
      if (!held) defect += Math.max(-0.2, Math.min(0.2, right[2]!));
      if (!(rydberg > 0)) break;
    }
    if (!(rydberg > 0) || !Number.isFinite(gap + rydberg + defect)) return best;
    const turn = defect - choices.defectCentre;
    if (!held) defect -= Math.round(turn);
    const again = judge.assignment(gap, rydberg, defect);
    if (again === null || again.score <= best.score) break;
    best = again;
  }
  return best;
}
