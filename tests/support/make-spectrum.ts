import { makeRandom } from "../../app/base/index.ts";

/**
 * Synthetic spectra for the tests of the analysis: plain Lorentz lines summed one by one to n = 400 and Elliott's
 * continuum convolved slice by slice. Shares no line shape, law or tail with app/ (only the seeded random numbers).
 *
 *   energies    E_n = gap - Ry/(n - delta)^2 + offset_n
 *   widths      G_n = floor + G_1 n^-k, or in quadrature
 *   areas       A_n = C n^-3 (cubic), C (n^2-1)/n^5 (p-envelope), C (n-1/2)^-3 (sheet), times `share(n)`
 *   line        (A_n/pi)(g + 2 q x)/(x^2 + g^2), g = G_n/2
 *   continuum   C/(2 Ry) times Elliott's factor from the last line on, each slice as broad as `floor`, with the same q
 */
export interface SyntheticSeries {
  readonly gap_eV: number;
  readonly rydberg_eV: number;
  readonly defect0: number;
  readonly firstN: number;
  readonly law: "cubic" | "p-envelope" | "sheet";
  readonly floor_eV: number;
  /** `gaussian`: floor and n^-k part add in quadrature; lorentzian where not given. The shape stays a Lorentz line. */
  readonly floorKind?: "lorentzian" | "gaussian";
  readonly coefficient_eV: number;
  readonly exponent: number;
  /** C in eV times the unit of the signal. */
  readonly strength: number;
  readonly asymmetry: number;
  readonly offsets_eV?: Readonly<Record<number, number>>;
  /** Part of the law's strength that line n has; 1 where not given. */
  readonly share?: (n: number) => number;
  readonly extraLines?: readonly {
    readonly energy_eV: number;
    readonly width_eV: number;
    readonly area: number;
  }[];
  /** Upper end of the continuum; null for none. */
  readonly continuumTop_eV: number | null;
  readonly background: (energy: number) => number;
}

export interface Sampling {
  /** [from, to, number of points], each piece evenly spaced up to a jitter of a fifth of a step. */
  readonly grid: readonly (readonly [number, number, number])[];
  /** Standard deviation of the noise in the unit of the signal. */
  readonly sigma: number;
  readonly seed: number;
}

export interface SyntheticSpectrum {
  readonly energy: Float64Array;
  readonly clean: Float64Array;
  readonly signal: Float64Array;
}

export const LAST_LINE = 400;
const CONTINUUM_SLICES = 120;

export function strengthOf(law: SyntheticSeries["law"], n: number): number {
  if (law === "p-envelope") return (n * n - 1) / n ** 5;
  if (law === "sheet") return (n - 0.5) ** -3;
  return n ** -3;
}

export function energyOf(
  series: Pick<SyntheticSeries, "gap_eV" | "rydberg_eV" | "defect0" | "offsets_eV">,
  n: number,
): number {
  return series.gap_eV - series.rydberg_eV / (n - series.defect0) ** 2 + (series.offsets_eV?.[n] ?? 0);
}

export function widthOf(
  series: Pick<SyntheticSeries, "floor_eV" | "floorKind" | "coefficient_eV" | "exponent">,
  n: number,
): number {
  const own = series.coefficient_eV * n ** -series.exponent;
  return series.floorKind === "gaussian" ? Math.hypot(series.floor_eV, own) : series.floor_eV + own;
}

export function areaOf(series: Pick<SyntheticSeries, "strength" | "law" | "share">, n: number): number {
  return series.strength * strengthOf(series.law, n) * (series.share?.(n) ?? 1);
}

/** out_i += area/pi (g + 2 q x)/(x^2 + g^2). */
export function addLine(
  energies: Float64Array,
  center: number,
  width: number,
  area: number,
  q: number,
  out: Float64Array,
): void {
  const g = width / 2;
  const scale = area / Math.PI;
  for (let i = 0; i < energies.length; i++) {
    const x = energies[i]! - center;
    out[i]! += (scale * (g + 2 * q * x)) / (x * x + g * g);
  }
}

/** Elliott's continuum over its height at the gap, by (E - gap)/Ry. */
function elliott(law: SyntheticSeries["law"], excess: number): number {
  if (excess <= 0) return 1;
  const decay = Math.exp((-2 * Math.PI) / Math.sqrt(excess));
  if (law === "p-envelope") return (1 + excess) / (1 - decay);
  return law === "sheet" ? 1 / (1 + decay) : 1 / (1 - decay);
}

/** out_i += the continuum of unit C; piecewise linear between nodes, each slice convolved exactly. */
export function addContinuum(
  energies: Float64Array,
  series: Pick<
    SyntheticSeries,
    "gap_eV" | "rydberg_eV" | "defect0" | "law" | "floor_eV" | "asymmetry" | "continuumTop_eV"
  >,
  factor: number,
  out: Float64Array,
): void {
  const { gap_eV: gap, rydberg_eV: rydberg, defect0, law, floor_eV, asymmetry: q, continuumTop_eV } = series;
  if (continuumTop_eV === null) return;
  const height = factor / (2 * rydberg);
  const nodes: [number, number][] = [[gap - rydberg / (LAST_LINE + 0.5 - defect0) ** 2, height]];
  for (let j = 0; j <= CONTINUUM_SLICES; j++) {
    const excess = (continuumTop_eV - gap) * (j / CONTINUUM_SLICES) ** 3;
    nodes.push([gap + excess, height * elliott(law, excess / rydberg)]);
  }
  const g = floor_eV / 2;
  for (let i = 0; i < energies.length; i++) {
    let u0 = nodes[0]![0] - energies[i]!;
    let angle0 = Math.atan(u0 / g);
    let log0 = Math.log(u0 * u0 + g * g);
    let sum = 0;
    for (let j = 1; j < nodes.length; j++) {
      const u1 = nodes[j]![0] - energies[i]!;
      const angle1 = Math.atan(u1 / g);
      const log1 = Math.log(u1 * u1 + g * g);
      const slope = (nodes[j]![1] - nodes[j - 1]![1]) / (u1 - u0);
      const level = nodes[j - 1]![1] - slope * u0;
      sum +=
        level * (angle1 - angle0 - q * (log1 - log0)) +
        slope * ((g / 2) * (log1 - log0) - 2 * q * (u1 - u0 - g * (angle1 - angle0)));
      u0 = u1;
      angle0 = angle1;
      log0 = log1;
    }
    out[i]! += sum / Math.PI;
  }
}

/** The noiseless signal at these energies. */
export function cleanSignal(energies: Float64Array, series: SyntheticSeries): Float64Array {
  const out = Float64Array.from(energies, series.background);
  for (let n = series.firstN; n <= LAST_LINE; n++) {
    const area = areaOf(series, n);
    if (area !== 0) addLine(energies, energyOf(series, n), widthOf(series, n), area, series.asymmetry, out);
  }
  for (const line of series.extraLines ?? [])
    addLine(energies, line.energy_eV, line.width_eV, line.area, series.asymmetry, out);
  addContinuum(energies, series, series.strength, out);
  return out;
}

export function makeSpectrum(series: SyntheticSeries, sampling: Sampling): SyntheticSpectrum {
  const random = makeRandom(sampling.seed);
  const energies: number[] = [];
  for (const [from, to, count] of sampling.grid) {
    const step = (to - from) / count;
    for (let j = 0; j < count; j++) {
      const energy = from + (j + 0.5 + 0.4 * (random.uniform() - 0.5)) * step;
      energies.push(Number(energy.toFixed(8)));
    }
  }
  const energy = Float64Array.from(energies);
  const clean = cleanSignal(energy, series);
  return { energy, clean, signal: clean.map((value) => value + sampling.sigma * random.normal()) };
}

/** As an instrument's file: photon energy in eV, alpha in 1/cm (or optical depth) with a sixth of its noise as last digit. */
export function spectrumFile(
  spectrum: SyntheticSpectrum,
  sigma: number,
  heading = "Photon energy (eV),alpha (1/cm)",
): Uint8Array {
  const digits = Math.max(0, 2 - Math.floor(Math.log10(sigma)));
  const rows = Array.from(
    spectrum.energy,
    (energy, i) => `${energy.toFixed(8)},${spectrum.signal[i]!.toFixed(digits)}`,
  );
  return new TextEncoder().encode([heading, ...rows, ""].join("\n"));
}
