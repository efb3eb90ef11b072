export {
  makeFolder,
  OutputError,
  pathKind,
  reasonInWords,
  requireFolderOf,
  writeWhole,
  type PathKind,
} from "./files.ts";
export { listInputs, resultNames, type InputFile, type InputList } from "./list-inputs.ts";
export { FAILURES_SCHEMA, mayReplace, readResultFile, type OutputKind } from "./known-outputs.ts";
export { makeInlineRunner, runFit, type FitOutcome, type FitRunner, type Progress } from "./fit-runner.ts";
export { makeThreadRunner } from "./thread-runner.ts";
export { programVersion } from "./version.ts";
