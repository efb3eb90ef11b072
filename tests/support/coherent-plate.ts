import { makeRandom } from "../../app/base/index.ts";
import { areaOf, energyOf, widthOf, type SyntheticSeries } from "./make-spectrum.ts";

/**
 * Light through a plane-parallel plate by characteristic matrices, from a complex index that is causal by construction:
 * n + i k = n_b + (hbar c/2E) [sum_n (A_n/pi)(1 - 2 i q)/(E_n - E - i g_n) + continuum + i background]. Amplitudes add up
 * in the plate with everything that follows (phase, surfaces, field at the back). Shares no line, law or plate with app/.
 *
 * Source of the matrix: Abeles, Ann. Phys. (Paris) 5, 596 (1950); Born and Wolf, Principles of Optics, 1.6.
 */
export interface CoherentPlate {
  readonly series: SyntheticSeries;
  /** Factor on every strength and on the background. */
  readonly strength: number;
  readonly index: number;
  readonly thickness_cm: number;
  /** Part of the lines' change of the index that is there; 1 in nature, 0 for an index that is not causal. */
  readonly dispersion?: number;
}

const HBAR_C_EV_CM = 1.973269804e-5;
const LAST = 400;
const SLICES = 120;

type Complex = readonly [number, number];

/** The amplitude whose imaginary part is alpha (1/cm) without background, and whose real part is 2 E dn/(hbar c). */
export function amplitude({ series, strength }: CoherentPlate, energy: number): Complex {
  let re = 0;
  let im = 0;
  const q = series.asymmetry;
  // (1 - 2 i q)(x + i y) = x + 2 q y + i (y - 2 q x)
  const add = (x: number, y: number): void => {
    re += x + 2 * q * y;
    im += y - 2 * q * x;
  };
  for (let n = series.firstN; n <= LAST; n++) {
    const u = energyOf(series, n) - energy;
    const g = widthOf(series, n) / 2;
    const scale = (strength * areaOf(series, n)) / (Math.PI * (u * u + g * g));
    add(scale * u, scale * g);
  }
  if (series.continuumTop_eV !== null) {
    // From the last line on, slices that crowd at the edge; ln of the complex distance is what a slice of lines adds up to.
    const start = series.gap_eV - series.rydberg_eV / (LAST + 0.5 - series.defect0) ** 2;
    const height = (strength * series.strength) / (2 * series.rydberg_eV);
    const g = series.floor_eV / 2 + 1e-9;
    for (let k = 0; k < SLICES; k++) {
      const a = start + (series.continuumTop_eV - start) * (k / SLICES) ** 3 - energy;
      const b = start + (series.continuumTop_eV - start) * ((k + 1) / SLICES) ** 3 - energy;
      const excess = Math.max(0, ((a + b) / 2 + energy - series.gap_eV) / series.rydberg_eV);
      const h = (height * elliott(series.law, excess)) / Math.PI;
      add((h / 2) * Math.log((b * b + g * g) / (a * a + g * g)), h * (Math.atan(b / g) - Math.atan(a / g)));
    }
  }
  return [re, im];
}

/** Elliott, Phys. Rev. 108, 1384 (1957), over the height at the gap. */
function elliott(law: SyntheticSeries["law"], excess: number): number {
  if (excess <= 0) return 1;
  const decay = Math.exp((-2 * Math.PI) / Math.sqrt(excess));
  if (law === "p-envelope") return (1 + excess) / (1 - decay);
  return law === "sheet" ? 1 / (1 + decay) : 1 / (1 - decay);
}

/** T = |2/(m11 + m12 + m21 + m22)|^2 in vacuum. */
export function throughPlate(plate: CoherentPlate, energy: number): number {
  const [re, im] = amplitude(plate, energy);
  const scale = HBAR_C_EV_CM / (2 * energy);
  const n = plate.index + (plate.dispersion ?? 1) * scale * re;
  const k = scale * (im + plate.strength * plate.series.background(energy));
  const turn = (energy * plate.thickness_cm) / HBAR_C_EV_CM;
  // delta = N turn = a + i b; cos delta = cos a cosh b - i sin a sinh b; sin delta = sin a cosh b + i cos a sinh b.
  const a = n * turn;
  const b = k * turn;
  const cos: Complex = [Math.cos(a) * Math.cosh(b), -Math.sin(a) * Math.sinh(b)];
  const sin: Complex = [Math.sin(a) * Math.cosh(b), Math.cos(a) * Math.sinh(b)];
  // m11 + m22 = 2 cos delta; m12 + m21 = -i (1/N + N) sin delta.
  const size = n * n + k * k;
  const sum: Complex = [n / size + n, -k / size + k];
  const both: Complex = [sum[0] * sin[0] - sum[1] * sin[1], sum[0] * sin[1] + sum[1] * sin[0]];
  const x = 2 * cos[0] + both[1];
  const y = 2 * cos[1] - both[0];
  return 4 / (x * x + y * y);
}

/** A file of transmission with its standard deviation. */
export function plateBytes(
  plate: CoherentPlate,
  energies: readonly number[],
  sigmaT: number,
  seed: number,
): Uint8Array {
  const random = makeRandom(seed);
  const rows = energies.map((e) => {
    const read = throughPlate(plate, e) + sigmaT * random.normal();
    return `${e.toFixed(8)},${read.toFixed(6)},${sigmaT}`;
  });
  return new TextEncoder().encode(["Photon energy (eV),Transmission,sigma", ...rows, ""].join("\n"));
}
