export type { AxisUnit, ColumnRole, ReadingChoices, SignalQuantity, Spectrum } from "./spectrum.ts";
export type { SpectrumIssue, SpectrumIssueCode } from "./issue.ts";
export { readSpectrum } from "./read-spectrum.ts";
export { wordSpectrumIssue } from "./wording.ts";
export { signalColumns, type SignalColumn } from "./signal-columns.ts";
