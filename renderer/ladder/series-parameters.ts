import type { Quantity } from "../../app/base/index.ts";
import type { RunglineResult } from "../../app/protocol/index.ts";

export type SeriesParameter = "gap_eV" | "rydberg_eV" | "defect0" | "width_exponent";

interface Words {
  readonly name: string;
  readonly symbol: string;
  readonly unit: string;
  /** From the result to the unit. */
  readonly scale: number;
  /** Title of an axis that counts from the fitted value, or of the value itself where that is short. */
  readonly axis: string;
  readonly absolute: boolean;
}

/** The series parameters as the plots and tables of their errors say them. */
export const SERIES_PARAMETERS: Readonly<Record<SeriesParameter, Words>> = {
  gap_eV: {
    name: "Gap",
    symbol: "E_g",
    unit: "µeV",
    scale: 1e6,
    axis: "Gap − fitted / µeV",
    absolute: false,
  },
  rydberg_eV: {
    name: "Rydberg energy",
    symbol: "Ry",
    unit: "µeV",
    scale: 1e6,
    axis: "Rydberg energy − fitted / µeV",
    absolute: false,
  },
  defect0: {
    name: "Quantum defect",
    symbol: "δ₀",
    unit: "10⁻³",
    scale: 1e3,
    axis: "(Quantum defect − fitted) / 10⁻³",
    absolute: false,
  },
  width_exponent: {
    name: "Width exponent",
    symbol: "k",
    unit: "",
    scale: 1,
    axis: "Width exponent",
    absolute: true,
  },
};

export const PARAMETER_ORDER: readonly SeriesParameter[] = [
  "gap_eV",
  "rydberg_eV",
  "defect0",
  "width_exponent",
];

/** The fitted value with its error, of a held width exponent what it is when freed; null where there is none. */
export function fittedParameter(result: RunglineResult, parameter: SeriesParameter): Quantity | null {
  const quantity =
    parameter === "width_exponent"
      ? (result.width_law?.free_exponent ?? result.width_law?.exponent)
      : result.series?.[parameter];
  return quantity === undefined || quantity.value === null || !((quantity.sigma ?? 0) > 0) ? null : quantity;
}

/** Title of the axis: a held exponent is shown as it is when freed. */
export function axisTitle(result: RunglineResult, parameter: SeriesParameter): string {
  const { axis } = SERIES_PARAMETERS[parameter];
  const freed = parameter === "width_exponent" && result.width_law?.free_exponent !== undefined;
  return freed ? `${axis}, set free` : axis;
}

/** As the first cell of a row: the symbol, and the unit where there is one. */
export function rowName(parameter: SeriesParameter): string {
  const { symbol, unit } = SERIES_PARAMETERS[parameter];
  return unit === "" ? symbol : `${symbol} / ${unit}`;
}
