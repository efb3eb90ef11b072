import type { StrengthBase, StrengthEnvelope } from "../laws/index.ts";
import type { LawLink, LevelValues, WidthValues } from "./model-spec.ts";

/**
 * What one parameter of one line may do. `law`: as the law of its kind says (energies: the level law of the lines that
 * are free; widths and areas: a law of their own or that of the free lines, `widthLaw` and `strengthLaw` below).
 * `shared`: equal to the others of the same group.
 */
export type Rule =
  | { readonly kind: "free" }
  | { readonly kind: "held"; readonly value: number }
  | { readonly kind: "bounded"; readonly low: number; readonly high: number }
  | { readonly kind: "law" }
  | { readonly kind: "shared"; readonly group: number };

export type LineParameterName = "energy" | "width" | "area" | "asymmetry";

/** Rules line by line; arrays run with the `ns` of the model. */
export interface LineRules {
  readonly energy: readonly Rule[];
  readonly width: readonly Rule[];
  readonly area: readonly Rule[];
  /** Free here means as the model has it for all lines (shared, free line by line, or zero). */
  readonly asymmetry: readonly Rule[];
}

/** Lines of another series that shares gap and Rydberg energy: energy gap - Ry/(n - defect)^2, areas their own. */
export interface ExtraSeries {
  readonly name: string;
  readonly ns: readonly number[];
  readonly defect: number;
  readonly defectHeld: boolean;
  /** `law`: the width law of the main series at this n. */
  readonly width: "free" | "law";
  /** One asymmetry for the lines of this series; else that of the main series. */
  readonly ownAsymmetry: boolean;
  /** FWHM to start from where widths are free (lines). */
  readonly startWidth: Float64Array;
}

/** The laws as they follow from the lines that are free, for parameters that are tied to them. */
export interface LawLinks {
  readonly levels: LevelValues;
  readonly levelLink: LawLink;
  readonly widths: WidthValues;
  readonly widthLink: LawLink;
  /** C = sum_j share_j A_j over the free lines. */
  readonly strengthShare: Float64Array;
  readonly strength: { readonly law: StrengthEnvelope; readonly base: StrengthBase };
}

export interface ConstraintSpec {
  readonly rules: LineRules;
  readonly links: LawLinks;
  /** `own`: the law's parameters are fitted with the tied lines; `others`: the law of the free lines. */
  readonly widthLaw: {
    readonly from: "own" | "others";
    readonly floorFree: boolean;
    readonly exponentFree: boolean;
  };
  readonly strengthLaw: "own" | "others";
  /** q_n = q_0 + q_1/n^2 for all lines whose rule is free. */
  readonly asymmetryLaw: boolean;
  readonly extra: readonly ExtraSeries[];
}

/** Whether anything is asked that the plain model does not do. */
export function isConstrained(spec: ConstraintSpec): boolean {
  const { rules } = spec;
  const some = [rules.energy, rules.width, rules.area, rules.asymmetry].some((list) =>
    list.some((rule) => rule.kind !== "free"),
  );
  return some || spec.asymmetryLaw || spec.extra.length > 0;
}
