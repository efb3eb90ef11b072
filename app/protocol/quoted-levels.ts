import type { Quantity } from "../base/index.ts";
import type { RunglineResult } from "./result-schema.ts";

/** Gap, Rydberg energy and defect as they may be quoted. */
export interface QuotedLevels {
  readonly gap_eV: Quantity;
  readonly rydberg_eV: Quantity;
  readonly defect0: Quantity;
  /** Whether the errors are the scaled ones: the law was rejected, and the plain ones are known to be too small. */
  readonly scaled: boolean;
}

/** The scaled standard errors where the law was rejected, else the plain ones. */
export function quotedLevels(series: NonNullable<RunglineResult["series"]>): QuotedLevels {
  const { gap_eV, rydberg_eV, defect0, scaled } = series;
  return scaled === null ? { gap_eV, rydberg_eV, defect0, scaled: false } : { ...scaled, scaled: true };
}
