export { dawson, faddeeva, faddeevaDerivative } from "./faddeeva.ts";
export * from "./voigt.ts";
export * from "./line-pair.ts";
export * from "./asymmetry.ts";
