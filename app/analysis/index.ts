export { analyse, type Analysis, type AnalysisResult } from "./analyse.ts";
export type { Curves } from "./curves.ts";
