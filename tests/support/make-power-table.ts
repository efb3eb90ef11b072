import { withPeaks, type LineTable, type PowerInput } from "../../app/power/index.ts";
import { resolveProtocol, type ProtocolInput } from "../../app/protocol/index.ts";
import { makeRandom } from "../../app/base/index.ts";

/**
 * Line parameters against power with known truth, made by plain code: no law of app/ is called (only the seeded random
 * numbers and the layout of the table). Errors of areas and widths are correlated between neighbouring lines of one
 * spectrum and between area and width of one line, as a fit of overlapping lines leaves them.
 */
export interface PowerTruth {
  readonly n: readonly number[];
  readonly power_uW: readonly number[];
  readonly saturation: (n: number) => number;
  /** Relative areas and widths by s = S P; default hyperbola and constant width. */
  readonly areaFactor?: (s: number, n: number, power: number) => number;
  readonly widthFactor?: (s: number, n: number, power: number) => number;
  /** eV/cm at n = 1 for n^-3; default 4. */
  readonly strength?: number;
  readonly floor_eV?: number;
  /** Relative error of an area at zero power; default 0.01 (n/6)^1.5. */
  readonly areaError?: (n: number) => number;
  readonly surrounding?: number;
  readonly seed: number;
  readonly shift_eV?: (power: number) => number;
  /** Extra scatter common to all areas of one spectrum, relative. */
  readonly drift?: number;
  readonly protocol?: ProtocolInput;
  readonly highestN?: (power: number) => number;
}

export const GAP = 2.17208;
export const RYDBERG = 0.092;
export const DEFECT = 0.23;
export const SPOT_UM = 100;
export const THICKNESS_UM = 34;

export const energyOf = (n: number): number => GAP - RYDBERG / (n - DEFECT) ** 2;
export const widthOf = (n: number, floor = 0): number => floor + 0.016 / n ** 3;
export const areaOf = (n: number, strength = 4): number => strength / n ** 3;

const CORRELATION = { neighbours: 0.4, areaWidth: 0.6 };

export function makePowerTable(truth: PowerTruth): LineTable {
  const { n, power_uW: powers } = truth;
  const k = n.length;
  const m = powers.length;
  const block = m * k;
  const values = new Float64Array(3 * block);
  const covariance = new Float64Array((3 * block) ** 2);
  const random = makeRandom(truth.seed);
  const areaFactor = truth.areaFactor ?? ((s: number) => 1 / (1 + s));
  for (let j = 0; j < m; j++) {
    const drift = 1 + (truth.drift ?? 0) * random.normal();
    // Chain x_i = c x_(i-1) + sqrt(1-c^2) e_i: correlation c^|i-i'| between lines.
    const chain = new Float64Array(k);
    for (let i = 0; i < k; i++) {
      const c = i === 0 ? 0 : CORRELATION.neighbours;
      chain[i] = (i === 0 ? 0 : c * chain[i - 1]!) + Math.sqrt(1 - c * c) * random.normal();
    }
    for (let i = 0; i < k; i++) {
      const s = truth.saturation(n[i]!) * powers[j]!;
      const at = j * k + i;
      const relative = (truth.areaError ?? ((one: number) => 0.01 * (one / 6) ** 1.5))(n[i]!);
      const width = widthOf(n[i]!, truth.floor_eV) * (truth.widthFactor?.(s, n[i]!, powers[j]!) ?? 1);
      const other = Math.sqrt(1 - CORRELATION.areaWidth ** 2) * random.normal();
      values[at] =
        energyOf(n[i]!) + (truth.shift_eV?.(powers[j]!) ?? 0) + 0.05 * relative * width * random.normal();
      values[block + at] = width * (1 + 1.2 * relative * (CORRELATION.areaWidth * chain[i]! + other));
      values[2 * block + at] =
        areaOf(n[i]!, truth.strength) * (areaFactor(s, n[i]!, powers[j]!) * drift + relative * chain[i]!);
    }
    for (let i = 0; i < k; i++) {
      for (let h = 0; h < k; h++) {
        const near = CORRELATION.neighbours ** Math.abs(i - h);
        const size = 3 * block;
        const [a, b] = [j * k + i, j * k + h];
        const error = (line: number): { e: number; w: number; a: number } => {
          const relative = (truth.areaError ?? ((one: number) => 0.01 * (one / 6) ** 1.5))(n[line]!);
          const s = truth.saturation(n[line]!) * powers[j]!;
          const width =
            widthOf(n[line]!, truth.floor_eV) * (truth.widthFactor?.(s, n[line]!, powers[j]!) ?? 1);
          return {
            e: 0.05 * relative * width,
            w: 1.2 * relative * width,
            a: relative * areaOf(n[line]!, truth.strength),
          };
        };
        const [x, y] = [error(i), error(h)];
        const c = CORRELATION.areaWidth;
        covariance[a * size + b] = i === h ? x.e * y.e : 0;
        covariance[(block + a) * size + block + b] = x.w * y.w * (c * c * near + (i === h ? 1 - c * c : 0));
        covariance[(2 * block + a) * size + 2 * block + b] = x.a * y.a * near;
        covariance[(block + a) * size + 2 * block + b] = x.w * y.a * c * near;
        covariance[(2 * block + b) * size + block + a] = x.w * y.a * c * near;
      }
    }
  }
  return withPeaks(n, powers, values, covariance, new Float64Array(k));
}

/** The same as an input of `judgePower`; the protocol is the cuprous-oxide preset with spot and thickness. */
export function makePowerInput(truth: PowerTruth): PowerInput {
  const table = makePowerTable(truth);
  const protocol = resolveProtocol({
    material: { preset: "cuprous-oxide-yellow-p" },
    ...truth.protocol,
    signal: { quantity: "alpha", thickness_um: THICKNESS_UM, ...truth.protocol?.signal },
    power: { spot_diameter_um: SPOT_UM, ...truth.protocol?.power },
  });
  if (!protocol.ok) throw new Error(JSON.stringify(protocol.issues));
  const k = truth.n.length;
  const covariance = new Float64Array(16);
  covariance[0] = 1e-12;
  covariance[5] = 1e-10;
  covariance[10] = 1e-6;
  return {
    spectra: truth.power_uW.map((power, j) => ({
      label: `spectrum ${j + 1}`,
      power_uW: power,
      gap_eV: null,
      apparent_gap_eV: null,
      highest_n: truth.highestN?.(power) ?? null,
      chi2: null,
      points: null,
    })),
    table,
    signalUnit: "1/cm",
    surrounding: new Float64Array(k).fill(truth.surrounding ?? 20),
    surroundingSigma: new Float64Array(k).fill(0.5),
    series: { gap_eV: GAP, rydberg_eV: RYDBERG, defect0: DEFECT, defect2: 0, covariance },
    protocol: protocol.value,
  };
}
