export * from "./types.ts";
export { placeOf, withPeaks } from "./line-table.ts";
export { judgePower } from "./judge-power.ts";
export { wordJudgeIssue, type JudgeIssue } from "./judge-issue.ts";
export { bleaching, unbleach, type BleachingLaw } from "./bleaching-law.ts";
export { describeBeam, spotArea, type Beam } from "./beam.ts";
export {
  blockadeRadius,
  DEFAULT_C3,
  INTERACTIONS,
  shrinkage,
  slabFactor,
  sphereVolume,
  type Interaction,
} from "./blockade.ts";
export { absorbedFraction, excitonDensity, type DensityInput } from "./density.ts";
export {
  readPowerSeries,
  type PowerSeries,
  type SeriesFile,
  type SeriesIssue,
  type SeriesMember,
} from "./read-series.ts";
export { powerByPattern, powerInFileName, powerInText } from "./power-text.ts";
export { wordPowerSeriesIssue, type PowerSeriesIssue } from "./series-issue.ts";
export type { FittedMember, FittedSeries } from "./fit-series.ts";
export { analyseSeries, type SeriesAnalysis, type SeriesCurve } from "./analyse-series.ts";
