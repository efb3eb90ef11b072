import type { Issue } from "../base/index.ts";

export type SpectrumIssueCode =
  | "spectrum/unknown-column"
  | "spectrum/same-column"
  | "spectrum/no-axis"
  | "spectrum/pixel-axis"
  | "spectrum/unknown-axis-unit"
  | "spectrum/constant-axis"
  | "spectrum/implausible-energy"
  | "spectrum/several-measurements"
  | "spectrum/no-light"
  | "spectrum/no-signal"
  | "spectrum/reflectance"
  | "spectrum/emission"
  | "spectrum/no-reference"
  | "spectrum/no-reflectance"
  | "spectrum/unit-mismatch"
  | "spectrum/constant-signal"
  | "spectrum/too-few-points";

/** A table that is no spectrum, or choices that do not fit it; `file` is always among the facts. */
export interface SpectrumIssue extends Issue {
  readonly code: SpectrumIssueCode;
}
