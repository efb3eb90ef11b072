export * from "./level.ts";
export * from "./width.ts";
export * from "./strength.ts";
export * from "./saturation.ts";
export * from "./temperature.ts";
export * from "./sizes.ts";
