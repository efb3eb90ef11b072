export * from "./model-spec.ts";
export * from "./fit-spectrum.ts";
export { SpectrumProblem } from "./spectrum-problem.ts";
export { backgroundColumns } from "./background-columns.ts";
export { levelLink, strengthShare, widthLink, type LinkData } from "./law-link.ts";
export { fitTransmittance, type TransmittanceFit } from "./transmittance-fit.ts";
export { TransmittanceProblem, type MeasuredLight } from "./transmittance-problem.ts";
export { applySlit, makeSlitGrid, type Feature, type SlitGrid } from "./transmittance-grid.ts";
export { slitBias } from "./transmittance-bias.ts";
