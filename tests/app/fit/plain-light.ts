import { makeRandom } from "../../../app/base/index.ts";
import type { Spectrum } from "../../../app/spectrum/index.ts";

/**
 * Transmitted light made with plain loops that share nothing with the fit: Lorentz lines with their odd partners on a
 * straight background, mean over the slit by brute force (2001 steps over +-8 standard deviations).
 */
export interface PlainLine {
  readonly n: number;
  readonly energy: number;
  readonly width: number;
  /** eV times optical depth. */
  readonly area: number;
}

export interface PlainLight {
  readonly lines: readonly PlainLine[];
  readonly asymmetry: number;
  readonly background: readonly [number, number];
  readonly slitFwhm: number;
  readonly surface: { readonly model: "none" | "single" | "all"; readonly reflectance: number };
}

export function opticalDepth(light: PlainLight, energy: number): number {
  let depth = light.background[0] + light.background[1] * (energy - 1) * 100;
  for (const line of light.lines) {
    const x = energy - line.energy;
    const g = line.width / 2;
    depth += ((line.area / Math.PI) * (g + 2 * light.asymmetry * x)) / (x * x + g * g);
  }
  return depth;
}

export function transmitted(light: PlainLight, energy: number): number {
  const R = light.surface.reflectance;
  const plate = (e: number): number => {
    const x = Math.exp(-opticalDepth(light, e));
    if (light.surface.model === "none") return x;
    const once = (1 - R) * (1 - R) * x;
    return light.surface.model === "single" ? once : once / (1 - R * R * x * x);
  };
  if (light.slitFwhm === 0) return plate(energy);
  const s = light.slitFwhm / Math.sqrt(8 * Math.log(2));
  let sum = 0;
  let weights = 0;
  for (let k = -1000; k <= 1000; k++) {
    const u = (8 * k) / 1000;
    const weight = Math.exp((-u * u) / 2);
    sum += weight * plate(energy + u * s);
    weights += weight;
  }
  return sum / weights;
}

/** Five lines of a series without a tail: gap 1 eV, Rydberg energy 0.05 eV, defect 0.1, from n = 2. */
export function fiveLines(peakDepth: number): PlainLine[] {
  return [2, 3, 4, 5, 6].map((n) => {
    const width = 0.012 / n ** 3 + 1e-5;
    return {
      n,
      energy: 1 - 0.05 / (n - 0.1) ** 2,
      width,
      area: (((Math.PI / 2) * peakDepth * 8) / n ** 3) * 0.0015,
    };
  });
}

export function unevenEnergies(low: number, high: number, count: number): Float64Array {
  const random = makeRandom(7);
  return Float64Array.from({ length: count }, (_, i) => {
    const u = (i + 0.5 + 0.6 * (random.uniform() - 0.5)) / count;
    return low + (high - low) * (1 - (1 - u) ** 1.6);
  });
}

/** `correlation`: of the noise of neighbouring points. */
export function spectrumOf(
  energy: Float64Array,
  light: PlainLight,
  sigmaT: number,
  seed: number,
  correlation = 0,
): Spectrum {
  const random = makeRandom(seed);
  const clean = Float64Array.from(energy, (e) => transmitted(light, e));
  let last = correlation === 0 ? 0 : random.normal();
  const value = clean.map((T) => {
    last = correlation * last + Math.sqrt(1 - correlation * correlation) * random.normal();
    return T + sigmaT * last;
  });
  const R = light.surface.reflectance;
  const { model } = light.surface;
  const through = (1 - R) * (1 - R);
  const signal = value.map((T) => {
    if (!(T > 0)) return NaN;
    if (model === "none") return -Math.log(T);
    if (model === "single") return -Math.log(T / through);
    return -Math.log((2 * T) / (through + Math.sqrt(through * through + 4 * T * T * R * R)));
  });
  return {
    file: "plain",
    sha256: "",
    energy_eV: energy,
    signal,
    unit: "1",
    thickness_cm: null,
    // As the reading does: from the light without its noise, no smaller than the noise.
    sigma: signal.map((one, i) => (Number.isFinite(one) ? sigmaT / Math.max(clean[i]!, sigmaT) : NaN)),
    noise: { source: "column", medianSigma: sigmaT },
    transmittance: {
      value,
      sigma: new Float64Array(energy.length).fill(sigmaT),
      surface: model,
      reflectance: R,
      thickness_cm: 1,
    },
    used: Uint8Array.from(value, (T) => (T > 0 ? 1 : 0)),
    quantityRead: "transmittance",
    axisUnitRead: "eV",
    medium: "vacuum",
    columns: [],
    dialect: {},
    facts: [],
    skippedRows: 0,
    notes: [],
  };
}
