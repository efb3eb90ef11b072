export { OutputError, reasonInWords } from "./output-error.ts";
export { makeFolder, pathKind, requireFolderOf, writeWhole, type PathKind } from "./files.ts";
export { removeLeftovers } from "./remove-leftovers.ts";
export { listInputs, resultNames, type InputFile, type InputList } from "./list-inputs.ts";
export { FAILURES_SCHEMA, mayReplace, readResultFile, type OutputKind } from "./known-outputs.ts";
export { makeInlineRunner, runFit } from "./fit-runner.ts";
export type { FitOutcome, FitRunner, Progress } from "./fit-outcome.ts";
export { makeThreadRunner } from "./thread-runner.ts";
export { programVersion } from "./version.ts";
