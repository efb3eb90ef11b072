/**
 * What      Candidate lines on any background, without the user: at every energy and trial width a line pair on a
 *           parabola is fitted to the neighbourhood, and the places where its height stands out are kept.
 * Shapes    energy, signal, sigma (m), energy ascending, sigma positive.
 * Units     energy eV; heights in the unit of the signal.
 * Domain    trial widths run from three sampling steps to a third of the range, in steps of a factor 1.5.
 * Accuracy  energies to about a tenth of the width, widths to a factor 1.3: starting values, nothing else.
 * Source    matched filtering with a local least-squares background; the significance divides by the root of the
 *           local reduced chi square, so that a bump made of several lines does not pass for one line.
 */
export interface Peak {
  readonly energy_eV: number;
  /** Trial FWHM. */
  readonly width_eV: number;
  readonly height: number;
  /** Odd part at the same place, for a start of the asymmetry: coefficient of 2u/(1+4u^2). */
  readonly odd: number;
  readonly significance: number;
}

const SCALE_STEP = 1.5;
const BINS_PER_WIDTH = 6;
const HALF_WINDOW_WIDTHS = 2.5;
const CENTRES_PER_WIDTH = 4;
const BASIS = 5;

export function findPeaks(
  energy: Float64Array,
  signal: Float64Array,
  sigma: Float64Array,
  threshold = 6,
): Peak[] {
  const m = energy.length;
  if (m < 20) return [];
  const span = energy[m - 1]! - energy[0]!;
  const steps = Float64Array.from({ length: m - 1 }, (_, i) => energy[i + 1]! - energy[i]!).sort();
  const fineStep = steps[Math.floor(0.1 * (m - 1))]!;
  const candidates: Peak[] = [];
  for (let width = 3 * fineStep; width < span / 3; width *= SCALE_STEP) {
    scanWidth(energy, signal, sigma, width, threshold, candidates);
  }
  return thinOut(candidates);
}

function scanWidth(
  energy: Float64Array,
  signal: Float64Array,
  sigma: Float64Array,
  width: number,
  threshold: number,
  out: Peak[],
): void {
  const m = energy.length;
  const first = energy[0]!;
  const span = energy[m - 1]! - first;
  const binWidth = width / BINS_PER_WIDTH;
  const bins = Math.floor(span / binWidth) + 1;
  const weight = new Float64Array(bins);
  const centre = new Float64Array(bins);
  const mean = new Float64Array(bins);
  for (let i = 0; i < m; i++) {
    const b = Math.min(bins - 1, Math.floor((energy[i]! - first) / binWidth));
    const w = 1 / (sigma[i]! * sigma[i]!);
    weight[b]! += w;
    centre[b]! += w * energy[i]!;
    mean[b]! += w * signal[i]!;
  }
  for (let b = 0; b < bins; b++) {
    if (weight[b]! > 0) {
      centre[b]! /= weight[b]!;
      mean[b]! /= weight[b]!;
    }
  }
  const half = Math.ceil(HALF_WINDOW_WIDTHS * BINS_PER_WIDTH);
  const stride = width / CENTRES_PER_WIDTH;
  const count = Math.floor(span / stride) + 1;
  const significance = new Float64Array(count);
  const height = new Float64Array(count);
  const odd = new Float64Array(count);
  const normal = new Float64Array(BASIS * BASIS);
  const right = new Float64Array(BASIS);
  const factor = new Float64Array(BASIS * BASIS);
  const image = new Float64Array(BASIS);
  for (let c = 0; c < count; c++) {
    const at = first + c * stride;
    const middle = Math.floor((at - first) / binWidth);
    // Sums of w b_i b_j and w b_i y for the basis l = 1/(1+4u^2), o = 2 u l, 1, u, u^2, written out: this is the
    // innermost loop of the search.
    let ll = 0,
      lo = 0,
      l1 = 0,
      lu = 0,
      l2 = 0,
      oo = 0,
      ou = 0,
      o2 = 0;
    let s0 = 0,
      s1 = 0,
      s2 = 0,
      s3 = 0,
      s4 = 0,
      ly = 0,
      oy = 0,
      y0 = 0,
      y1 = 0,
      y2 = 0,
      total = 0;
    let filled = 0;
    let core = 0;
    const low = Math.max(0, middle - half);
    const high = Math.min(bins - 1, middle + half);
    for (let b = low; b <= high; b++) {
      const w = weight[b]!;
      if (w === 0) continue;
      filled++;
      const u = (centre[b]! - at) / width;
      const uu = u * u;
      if (uu < 0.25) core++;
      const l = 1 / (1 + 4 * uu);
      const o = 2 * u * l;
      const y = mean[b]!;
      const wl = w * l;
      const wo = w * o;
      const wu = w * u;
      const wuu = w * uu;
      ll += wl * l;
      lo += wl * o;
      l1 += wl;
      lu += wl * u;
      l2 += wl * uu;
      oo += wo * o;
      ou += wo * u;
      o2 += wo * uu;
      s0 += w;
      s1 += wu;
      s2 += wuu;
      s3 += wuu * u;
      s4 += wuu * uu;
      ly += wl * y;
      oy += wo * y;
      y0 += w * y;
      y1 += wu * y;
      y2 += wuu * y;
      total += w * y * y;
    }
    // A line needs points on both flanks and on its top; at the ends of the range a shortened window is enough.
    if (filled < 9 || core < 3 || middle - low < BINS_PER_WIDTH / 2 || high - middle < BINS_PER_WIDTH / 2)
      continue;
    // The lower triangle; the odd basis function is 2 u l, so its sum with 1 is twice that of u l.
    normal[0] = ll;
    normal[5] = lo;
    normal[6] = oo;
    normal[10] = l1;
    normal[11] = 2 * lu;
    normal[12] = s0;
    normal[15] = lu;
    normal[16] = ou;
    normal[17] = s1;
    normal[18] = s2;
    normal[20] = l2;
    normal[21] = o2;
    normal[22] = s2;
    normal[23] = s3;
    normal[24] = s4;
    right[0] = ly;
    right[1] = oy;
    right[2] = y0;
    right[3] = y1;
    right[4] = y2;
    const solved = solveFirst(normal, right, total, factor, image);
    if (solved === null) continue;
    const reduced = Math.max(1, solved.chi2 / Math.max(1, filled - BASIS));
    significance[c] = solved.first / Math.sqrt(solved.firstVariance * reduced);
    height[c] = solved.first;
    odd[c] = solved.second;
  }
  for (let c = 0; c < count; c++) {
    const s = significance[c]!;
    if (s < threshold || (c > 0 && significance[c - 1]! > s) || (c < count - 1 && significance[c + 1]! >= s))
      continue;
    const before = c > 0 ? significance[c - 1]! : s;
    const after = c < count - 1 ? significance[c + 1]! : s;
    const curvature = 2 * s - before - after;
    const shift = curvature > 0 ? Math.max(-0.5, Math.min(0.5, (after - before) / (2 * curvature))) : 0;
    out.push({
      energy_eV: first + (c + shift) * stride,
      width_eV: width,
      height: height[c]!,
      odd: odd[c]!,
      significance: s,
    });
  }
}

/** First two coefficients, the variance of the first and the weighted sum of squares, by Cholesky with the first kept last. */
function solveFirst(
  normal: Float64Array,
  right: Float64Array,
  total: number,
  l: Float64Array,
  z: Float64Array,
): { first: number; second: number; firstVariance: number; chi2: number } | null {
  const k = BASIS;
  // Order 4,3,2,1,0: the last pivot is then what is left of the line after the others, so its variance is 1/pivot^2.
  let explained = 0;
  for (let a = 0; a < k; a++) {
    const i = k - 1 - a;
    for (let b = 0; b <= a; b++) {
      const j = k - 1 - b;
      let sum = i >= j ? normal[i * k + j]! : normal[j * k + i]!;
      for (let c = 0; c < b; c++) sum -= l[a * k + c]! * l[b * k + c]!;
      if (a === b) {
        if (!(sum > 1e-12 * normal[i * k + i]!)) return null;
        l[a * k + a] = Math.sqrt(sum);
      } else l[a * k + b] = sum / l[b * k + b]!;
    }
    let r = right[i]!;
    for (let c = 0; c < a; c++) r -= l[a * k + c]! * z[c]!;
    z[a] = r / l[a * k + a]!;
    explained += z[a]! * z[a]!;
  }
  const last = l[k * k - 1]!;
  const first = z[k - 1]! / last;
  const second = (z[k - 2]! - l[(k - 1) * k + k - 2]! * first) / l[(k - 2) * k + k - 2]!;
  return { first, second, firstVariance: 1 / (last * last), chi2: Math.max(0, total - explained) };
}

/** Strongest first; a candidate that is the same feature seen at another width or place is dropped. */
function thinOut(candidates: Peak[]): Peak[] {
  candidates.sort((a, b) => b.significance - a.significance || a.energy_eV - b.energy_eV);
  const kept: Peak[] = [];
  for (const one of candidates) {
    const same = kept.some((other) => {
      const distance = Math.abs(one.energy_eV - other.energy_eV);
      return distance < (one.width_eV > other.width_eV ? 0.6 * one.width_eV : 0.8 * other.width_eV);
    });
    if (!same) kept.push(one);
  }
  return kept.sort((a, b) => a.energy_eV - b.energy_eV);
}
