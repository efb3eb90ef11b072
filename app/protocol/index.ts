export * from "./protocol-schema.ts";
export * from "./power-protocol.ts";
export * from "./power-schema.ts";
export * from "./result-schema.ts";
export { quotedLevels, type QuotedLevels } from "./quoted-levels.ts";
export { DEFAULT_PROTOCOL } from "./defaults.ts";
export { PRESETS, findPreset, type Preset } from "./presets.ts";
export {
  resolveProtocol,
  wordProtocolIssue,
  mergeChoices,
  protocolJsonSchema,
  type ProtocolIssue,
} from "./resolve-protocol.ts";
export { choicesFromSetting, composeChoices } from "./set-key.ts";
export {
  parseResult,
  parseResults,
  parseProtocolSource,
  wordResultIssue,
  type ProtocolSource,
  type ResultIssue,
} from "./parse-result.ts";
export { differences, type Difference } from "./differences.ts";
export * from "./comparison-schema.ts";
export { findComparisonChoices, resolveComparisonChoices } from "./comparison-choices.ts";
