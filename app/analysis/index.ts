export {
  analyse,
  withResampling,
  type Analysis,
  type AnalyseOptions,
  type AnalysisResult,
} from "./analyse.ts";
export { leastSignificance, significances } from "./climb-ladder.ts";
export { drawCurves, type Curves } from "./curves.ts";
export { lineCurve } from "./line-curves.ts";
export { slitOf, withHeaderSlit } from "./instrument.ts";
export { CORRELATED_ABOVE } from "./fit-full.ts";
export { intervalFactor } from "./interval.ts";
export { buildModel, energyOf, stateAfter, withLines } from "./ladder-model.ts";
export type { LadderState, ModelChoices } from "./ladder-model.ts";
export { depthPerSignal } from "./light.ts";
export { selectPoints, type SelectedPoints } from "./select-points.ts";
export { linesForThinning, thinPoints } from "./thin-points.ts";
export { sortNotes } from "./sort-notes.ts";
export { drawingProgress, drawSpectra, type ResampledDraw, type ResamplingPlan } from "./resample.ts";
