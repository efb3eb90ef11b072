export * from "./issue.ts";
export * from "./note.ts";
export * from "./quantity.ts";
export * from "./estimates.ts";
export * from "./random.ts";
export * from "./watch.ts";
export { sha256 } from "./sha256.ts";
export { nearestWord } from "./nearest-word.ts";
