export * from "./types.ts";
export { placeOf, withPeaks } from "./line-table.ts";
