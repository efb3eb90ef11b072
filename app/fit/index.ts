export * from "./model-spec.ts";
export * from "./fit-spectrum.ts";
export { SpectrumProblem } from "./spectrum-problem.ts";
export { backgroundColumns } from "./background-columns.ts";
export { levelLink, strengthShare, widthLink, type LinkData } from "./law-link.ts";
