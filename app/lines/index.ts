export { dawson, faddeeva, faddeevaDerivative } from "./faddeeva.ts";
export * from "./voigt.ts";
export * from "./line-pair.ts";
export * from "./asymmetry.ts";
export * from "./continuum.ts";
export * from "./averaged-tail.ts";
export * from "./background.ts";
export * from "./interpolate.ts";
