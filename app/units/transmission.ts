/**
 * What      Transmittance T of a plate from its natural optical depth a = alpha d, and back. R is the reflectance of
 *           one surface, x = exp(-a):
 *             none    T = x
 *             single  T = (1-R)^2 x                       (one pass through both surfaces)
 *             all     T = (1-R)^2 x/(1 - R^2 x^2)         (all reflections, intensities added)
 *           and the inverse of the last, x = 2 T/{(1-R)^2 + sqrt[(1-R)^4 + 4 T^2 R^2]}, which is not 0/0 at R = 0.
 * Units     all without unit.
 * Domain    0 <= R < 1. T above 1 and above (1-R)/(1+R) are kept (a < 0); T = 0 gives +Infinity, T < 0 gives NaN.
 * Accuracy  a few units in the last place; round trips in tests/app/units/transmission.test.ts.
 * Source    geometric sum of the intensities of all internal reflections; the stable inverse by rationalising the root.
 */
export type SurfaceModel = "none" | "single" | "all";

export function depthFromTransmittance(T: number, R: number, model: SurfaceModel): number {
  if (model === "none") return -Math.log(T);
  const through = (1 - R) * (1 - R);
  if (model === "single") return -Math.log(T / through);
  return -Math.log((2 * T) / (through + Math.sqrt(through * through + 4 * T * T * R * R)));
}

export function transmittanceFromDepth(depth: number, R: number, model: SurfaceModel): number {
  const x = Math.exp(-depth);
  if (model === "none") return x;
  const through = (1 - R) * (1 - R) * x;
  return model === "single" ? through : through / (1 - R * R * x * x);
}

/** dT/d(alpha d) = -T (1 + R^2 x^2)/(1 - R^2 x^2) with all reflections, -T otherwise. */
export function transmittanceSlope(depth: number, R: number, model: SurfaceModel): number {
  const T = transmittanceFromDepth(depth, R, model);
  if (model !== "all") return -T;
  const r2 = R * R * Math.exp(-2 * depth);
  return (-T * (1 + r2)) / (1 - r2);
}

/**
 * One standard uncertainty of alpha d: (sigma_T/T)(1 - R^2 x^2)/(1 + R^2 x^2). `T` should be a smoothed or modelled
 * transmittance: weights taken from the single reading bias alpha d by about -1.5 (sigma_T/T)^2.
 */
export function depthSigma(T: number, sigmaT: number, R: number, model: SurfaceModel): number {
  if (model !== "all") return sigmaT / T;
  const r2 = R * R * Math.exp(-2 * depthFromTransmittance(T, R, model));
  return ((sigmaT / T) * (1 - r2)) / (1 + r2);
}

/** Reflectance of one surface at normal incidence: [(n-s)^2 + k^2]/[(n+s)^2 + k^2], s the index of the surroundings. */
export function reflectance(index: number, surroundIndex = 1, extinction = 0): number {
  const k2 = extinction * extinction;
  return ((index - surroundIndex) ** 2 + k2) / ((index + surroundIndex) ** 2 + k2);
}

/** Natural optical depth of 1 absorbance (or 1 optical density), ln 10. */
export const DEPTH_PER_ABSORBANCE = Math.LN10;

export function depthFromAbsorbance(absorbance: number): number {
  return absorbance * DEPTH_PER_ABSORBANCE;
}

export function absorbanceFromDepth(depth: number): number {
  return depth / DEPTH_PER_ABSORBANCE;
}

export type CoefficientUnit = "1/cm" | "1/mm" | "1/um" | "1/m";

/** 1/cm in one of the unit. */
export const PER_CM: Readonly<Record<CoefficientUnit, number>> = {
  "1/cm": 1,
  "1/mm": 10,
  "1/um": 1e4,
  "1/m": 0.01,
};

/** Thickness in cm of one um. */
export const CM_PER_UM = 1e-4;
