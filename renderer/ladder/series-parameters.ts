import type { Quantity } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";

export type SeriesParameter = "gap_eV" | "rydberg_eV" | "defect0" | "width_exponent";

interface Words {
  readonly name: string;
  readonly symbol: string;
  readonly unit: string;
  /** From the result to the unit. */
  readonly scale: number;
  /** Title of an axis that counts from the fitted value. */
  readonly fromFit: string;
}

/** The series parameters as the plots and tables of their errors say them: all count from the fitted value. */
export const SERIES_PARAMETERS: Readonly<Record<SeriesParameter, Words>> = {
  gap_eV: { name: "Gap", symbol: "E_g", unit: "µeV", scale: 1e6, fromFit: "Gap − fitted / µeV" },
  rydberg_eV: {
    name: "Rydberg energy",
    symbol: "Ry",
    unit: "µeV",
    scale: 1e6,
    fromFit: "Rydberg energy − fitted / µeV",
  },
  defect0: {
    name: "Quantum defect",
    symbol: "δ₀",
    unit: "10⁻³",
    scale: 1e3,
    fromFit: "(Quantum defect − fitted) / 10⁻³",
  },
  width_exponent: {
    name: "Width exponent",
    symbol: "k",
    unit: "10⁻³",
    scale: 1e3,
    fromFit: "(Width exponent − fitted) / 10⁻³",
  },
};

export const PARAMETER_ORDER: readonly SeriesParameter[] = [
  "gap_eV",
  "rydberg_eV",
  "defect0",
  "width_exponent",
];

/** The fitted value with its error; null where it was held or is not determined. */
export function fittedParameter(result: RunglineResult, parameter: SeriesParameter): Quantity | null {
  const quantity = parameter === "width_exponent" ? result.width_law?.exponent : result.series?.[parameter];
  return quantity === undefined || quantity.value === null || !((quantity.sigma ?? 0) > 0) ? null : quantity;
}
