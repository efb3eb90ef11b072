export * from "./constants.ts";
export * from "./air-index.ts";
export * from "./light-axis.ts";
export * from "./transmission.ts";
