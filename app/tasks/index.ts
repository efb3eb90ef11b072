export * from "./analyse-file.ts";
export * from "./inspect-file.ts";
export * from "./analyse-power.ts";
export * from "./compare-samples.ts";
export * from "./record-files.ts";
export * from "./messages.ts";
export * from "./host.ts";
export { wordIssue } from "./word-issue.ts";
export { typedValues, wordBatchIssue, type BatchIssue } from "../batch/index.ts";
