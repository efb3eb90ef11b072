import { energyUnit, PARAMETER_TITLES } from "../../app/report/index.ts";
import type { ComparedParameter, ComparedPart, Comparison } from "../../app/protocol/index.ts";
import type { LedgerSymbol } from "../ledger/ledger-entry.ts";

/** What a referee asks of a batch first; the others are chosen one by one. */
export const MAIN_PARAMETERS: readonly ComparedParameter[] = [
  "gap_eV",
  "rydberg_eV",
  "defect0",
  "width_floor_eV",
  "highest_n",
];

export const PARAMETER_SYMBOLS: Readonly<Record<ComparedParameter, LedgerSymbol>> = {
  gap_eV: { letter: "E", below: "g" },
  rydberg_eV: { letter: "Ry" },
  defect0: { letter: "δ", below: "0" },
  width_floor_eV: { letter: "Γ", below: "0" },
  width_coefficient_eV: { letter: "Γ", below: "1" },
  width_exponent: { letter: "k" },
  highest_n: { letter: "n", below: "max" },
  highest_resolved_n: { letter: "n", below: "res" },
  strength_coefficient: { letter: "A", below: "1" },
  tail_factor: { letter: "f" },
  background_slope: { letter: "b" },
  urbach_energy_eV: { letter: "E", below: "U" },
  signal_to_noise: { letter: "S/N" },
};

/** One unit for all samples of a parameter. */
export interface ShownUnit {
  readonly unit: string;
  readonly scale: number;
}

/** Of the values themselves; those of the gap are near 2 eV. */
export function valueUnit(part: ComparedPart, { samples }: Comparison): ShownUnit {
  const sizes = samples.map((sample) => Math.abs(sample.parameters[part.name]?.value ?? 0));
  return unitFor(part, Math.max(0, ...sizes));
}

/** Of what differs: differences and scatters are far smaller than the values. */
export function differenceUnit(part: ComparedPart): ShownUnit {
  const sizes = [...part.pairs, ...part.shifts].flatMap((pair) => [
    Math.abs(pair.difference.value ?? 0),
    pair.detectable ?? 0,
  ]);
  return unitFor(part, Math.max(part.within.tau ?? 0, part.between.tau ?? 0, part.mean.sigma ?? 0, ...sizes));
}

export function unitFor(part: Pick<ComparedPart, "name" | "unit">, size: number): ShownUnit {
  if (!part.name.endsWith("_eV")) return { unit: part.unit === "1" ? "" : part.unit, scale: 1 };
  const { name, perElectronvolt } = energyUnit(size);
  return { unit: name, scale: perElectronvolt };
}

export function title(name: ComparedParameter): string {
  const words = PARAMETER_TITLES[name];
  return `${words.slice(0, 1).toUpperCase()}${words.slice(1)}`;
}
