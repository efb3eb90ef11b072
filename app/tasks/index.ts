export * from "./analyse-file.ts";
export * from "./inspect-file.ts";
export * from "./messages.ts";
export * from "./host.ts";
export { wordIssue } from "./word-issue.ts";
