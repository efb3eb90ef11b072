import { judgePower } from "../../app/power/index.ts";
import { makePowerInput } from "./make-power-table.ts";

const N = [7, 8, 9, 10, 11, 12];
const POWERS = [1, 5, 20, 80, 300, 1000];
const EXPONENT = 9.3;
const SATURATION = (n: number): number => 1.5e-3 * (n / 10) ** EXPONENT;

export interface Coverage {
  readonly series: number;
  /** Intervals at 68.3 % of the exponent that hold the truth. */
  readonly covered: number;
  /** Pulls of the exponent, and of every S_n. */
  readonly pulls: number[];
  readonly saturationPulls: number[];
  readonly seconds: number;
}

/** Seeded series with one known exponent; how often its interval holds the truth. */
export function powerCoverage(first: number, count: number): Coverage {
  const pulls: number[] = [];
  const saturationPulls: number[] = [];
  let covered = 0;
  const began = performance.now();
  for (let seed = first; seed < first + count; seed++) {
    const judged = judgePower(
      makePowerInput({
        n: N,
        power_uW: POWERS,
        saturation: SATURATION,
        seed,
        protocol: { power: { draws: 200 } },
      }),
    );
    if (!judged.ok) throw new Error("series refused");
    const { power } = judged.value;
    const exponent = power.exponent?.exponent;
    if (exponent === undefined || exponent.value === null) throw new Error(`no exponent, seed ${seed}`);
    if (exponent.low! <= EXPONENT && EXPONENT <= exponent.high!) covered++;
    pulls.push((exponent.value - EXPONENT) / exponent.sigma!);
    for (const line of power.lines) {
      const { value, sigma } = line.saturation_per_uW;
      saturationPulls.push((value! - SATURATION(line.n)) / sigma!);
    }
  }
  return { series: count, covered, pulls, saturationPulls, seconds: (performance.now() - began) / 1000 };
}
