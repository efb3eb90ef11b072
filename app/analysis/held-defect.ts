import { assumption, type Note } from "../base/index.ts";
import type { SpectrumFit } from "../fit/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { fitLevels, type LevelFit } from "../series/index.ts";
import { levelInput } from "./level-range.ts";

/** A defect that too few lines could not free, and what its own uncertainty does to the others. */
export interface HeldDefect {
  readonly defect0: number;
  readonly sigma: number;
  /** The protocol says nothing of the uncertainty (`material.defect0_sigma`). */
  readonly assumed: boolean;
  readonly gap_eV: number;
  readonly rydberg_eV: number;
}

/** Defects of one series differ by about this from crystal to crystal and from reading to reading. */
const ASSUMED_SIGMA = 0.1;
/** Where nothing says what kind of series it is, all defects that the convention allows (half to either side) are alike. */
const UNKNOWN_SIGMA = 1 / Math.sqrt(12);

/**
 * What      Half the difference of gap and Rydberg energy between the defect held one standard uncertainty higher and lower, all
 *           else as it was: a systematic part, since no number of points makes it smaller. Null where the defect was free,
 *           or left out of the law on purpose (`series.defect=none`), or its uncertainty is zero.
 * Units     eV.
 */
export function heldDefect(fit: SpectrumFit, law: LevelFit, protocol: Protocol): HeldDefect | null {
  if (law.defect !== "none" || protocol.series.defect === "none") return null;
  const sigma = protocol.material.defect0_sigma ?? (isKnown(protocol) ? ASSUMED_SIGMA : UNKNOWN_SIGMA);
  if (!(sigma > 0)) return null;
  const defect0 = law.estimates.values[2]!;
  const [gap, rydberg] = spread(fit, law, protocol, defect0, sigma);
  return {
    defect0,
    sigma,
    assumed: protocol.material.defect0_sigma === null,
    gap_eV: Math.abs(gap),
    rydberg_eV: Math.abs(rydberg),
  };
}

function isKnown({ material }: Protocol): boolean {
  return material.preset !== null || material.defect0 !== null;
}

function spread(
  fit: SpectrumFit,
  law: LevelFit,
  protocol: Protocol,
  defect0: number,
  sigma: number,
): readonly [number, number] {
  const input = levelInput(fit, protocol);
  const places = law.n.map((n) => input?.n.indexOf(n) ?? -1);
  if (protocol.series.mode === "free" && input !== null && places.every((place) => place >= 0)) {
    const size = input.n.length;
    const held = (value: number): ArrayLike<number> | null => {
      const level = fitLevels({
        n: law.n,
        energy_eV: Float64Array.from(places, (i) => input.energy_eV[i]!),
        covariance: Float64Array.from(
          { length: places.length ** 2 },
          (_, at) =>
            input.covariance[places[Math.floor(at / places.length)]! * size + places[at % places.length]!]!,
        ),
        defect: "none",
        heldDefect: value,
      });
      return level.ok ? level.value.estimates.values : null;
    };
    const high = held(defect0 + sigma);
    const low = held(defect0 - sigma);
    if (high !== null && low !== null) return [(high[0]! - low[0]!) / 2, (high[1]! - low[1]!) / 2];
  }
  // To first order: the energies move by dE/ddelta, and the law's gain takes that back.
  const count = law.n.length;
  const rydberg = law.estimates.values[1]!;
  const move = law.n.map((n) => (2 * rydberg * sigma) / (n - defect0) ** 3);
  const by = (i: number): number => move.reduce((sum, one, l) => sum + law.gain[i * count + l]! * one, 0);
  return [by(0), by(1)];
}

export function heldDefectNotes(held: HeldDefect | null): Note[] {
  if (held === null) return [];
  const { defect0, sigma, assumed, gap_eV, rydberg_eV } = held;
  return [
    assumption(
      "held-defect-uncertain",
      "systematic",
      `The held defect ${defect0} is known to ±${Number(sigma.toPrecision(2))}${assumed ? " (assumed, since the protocol does not say)" : ""}, which puts ±${(1e3 * gap_eV).toPrecision(2)} meV on the gap and ±${(1e3 * rydberg_eV).toPrecision(2)} meV on the Rydberg energy: part of the systematic errors, not of the statistical ones.`,
      "give its uncertainty (material.defect0_sigma), or measure a fourth line",
    ),
  ];
}
