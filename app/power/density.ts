/** uW ps/eV in excitons: 1e-6 J/s x 1e-12 s/1.602176634e-19 J, exact. */
const EXCITONS_PER_UW_PS_PER_EV = 1e-18 / 1.602176634e-19;

/**
 * What      Density of excitons of one line at the power P where nothing bleaches,
 *           rho_0 = f_abs P (alpha_n/alpha_tot) tau/(E A d); the absorbed part
 *           f_abs = (1-R)(1-x)/(1-R x) with all reflections, (1-R)(1-x) in a single pass, x = exp(-alpha_tot d).
 * Units     P uW, tau ps, E eV, A um^2, d um, depths without unit; rho_0 1/um^3.
 * Domain    total depth >= line depth >= 0; thin limit alpha d -> 0 without cancellation.
 * Accuracy  rounding only; tests/reference/blockade-figures.test.ts.
 * Source    rate equation in the steady state; reflections of a plate added as intensities.
 */
export interface DensityInput {
  readonly power_uW: number;
  /** alpha_n d and alpha_tot d at the line. */
  readonly lineDepth: number;
  readonly totalDepth: number;
  readonly reflectance: number;
  readonly reflections: "single" | "all";
  readonly lifetime_ps: number;
  readonly energy_eV: number;
  readonly area_um2: number;
  readonly thickness_um: number;
}

export function excitonDensity(input: DensityInput): number {
  const absorbed = absorbedFraction(input.totalDepth, input.reflectance, input.reflections);
  const own = input.totalDepth > 0 ? input.lineDepth / input.totalDepth : 0;
  return (
    (EXCITONS_PER_UW_PS_PER_EV * absorbed * own * input.power_uW * input.lifetime_ps) /
    (input.energy_eV * input.area_um2 * input.thickness_um)
  );
}

export function absorbedFraction(
  totalDepth: number,
  reflectance: number,
  reflections: "single" | "all",
): number {
  const lost = -Math.expm1(-totalDepth);
  const front = (1 - reflectance) * lost;
  return reflections === "single" ? front : front / (1 - reflectance * Math.exp(-totalDepth));
}
