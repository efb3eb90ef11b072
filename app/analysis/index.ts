export { analyse, type AnalysisResult } from "./analyse.ts";
export type { Curves } from "./curves.ts";
