export {
  fitLevels,
  LEVEL_NAMES,
  REJECTED_BELOW,
  type DefectChoice,
  type LevelFit,
  type LevelInput,
} from "./level-fit.ts";
export { chooseLevelRange, type RangeChoice, type RangeInput, type RangeStep } from "./level-range.ts";
export {
  conventionalShift,
  rankReadings,
  type Reading,
  type Readings,
  type ReadingsInput,
} from "./readings.ts";
export { exponentCurve, fitWidths, type WidthFit, type WidthInput } from "./width-fit.ts";
export { fitStrengths, type StrengthFit, type StrengthInput } from "./strength-fit.ts";
export type { Derived, LineEnergies } from "./relation.ts";
export {
  deriveQuantities,
  type DeriveInput,
  type DerivedLine,
  type DerivedLineInput,
  type DerivedQuantities,
} from "./derive.ts";
export type { SeriesIssue } from "./series-issue.ts";
export { jointRegion, type JointRegion, type LevelName } from "./joint-region.ts";
export { levelInfluence, type LineInfluence } from "./influence.ts";
export { levelProfileCurves, profileLevels, type LevelProfile, type ProfileCurve } from "./level-profile.ts";
export { seriesToResult, strengthsToResult, widthsToResult } from "./to-result.ts";
