/**
 * What      Area of one line against the power of the exciting light, with A_0 the area at zero power and S >= 0 its
 *           initial relative fall (A = A_0 (1 - S P + ...) in every law):
 *           separate pump   A_0/(1 + S P)                 a pump bleaches, a weak probe reads
 *           scanned probe   A_0/sqrt(1 + 2 S P)           the swept laser bleaches the line it reads
 *           gaussian self   A_0 ln(1 + 2 S P)/(2 S P)     hyperbola averaged over a Gaussian beam that reads itself
 *           test            A_0 (1 - S P + c P^2)         S unbounded, for the question whether there is bleaching
 * Shapes    out (SATURATION.size): value and partial derivatives at the indices of SATURATION.
 * Units     power in any unit, S in its inverse, c in its inverse square, A_0 free.
 * Domain    P >= 0; 1 + S P > 0 (2 S P for the middle two), else NaN: a negative S may be tried a little way.
 * Accuracy  1e-14 relative; the logarithmic law goes over into its series for |2 S P| < 0.02.
 * Source    Two-level saturation, Siegman, Lasers (1986), ch. 4 and 30; excluded volume at rate equilibrium (stationary
 *           solution of d rho/dt = G_0 (1 - rho V) - rho/tau); the average over the beam is an elementary integral.
 */
export const SATURATION = {
  area: 0,
  byArea0: 1,
  bySaturation: 2,
  byPower: 3,
  byCurvature: 4,
  size: 5,
} as const;

export type SaturationLaw = "separate-pump" | "scanned-probe" | "gaussian-self";

export function saturationLaw(
  law: SaturationLaw,
  power: number,
  area0: number,
  saturation: number,
  out: Float64Array,
): void {
  const u = saturation * power;
  let factor: number;
  let slope: number; // d factor/du
  if (law === "separate-pump") {
    factor = u > -1 ? 1 / (1 + u) : Number.NaN;
    slope = -factor * factor;
  } else if (law === "scanned-probe") {
    factor = 1 / Math.sqrt(1 + 2 * u);
    slope = -factor * factor * factor;
  } else {
    factor = logarithmicMean(2 * u);
    slope = 2 * logarithmicMeanSlope(2 * u);
  }
  out[SATURATION.area] = area0 * factor;
  out[SATURATION.byArea0] = factor;
  out[SATURATION.bySaturation] = area0 * slope * power;
  out[SATURATION.byPower] = area0 * slope * saturation;
  out[SATURATION.byCurvature] = 0;
}

export function linearQuadraticLaw(
  power: number,
  area0: number,
  saturation: number,
  curvature: number,
  out: Float64Array,
): void {
  const factor = 1 + power * (curvature * power - saturation);
  out[SATURATION.area] = area0 * factor;
  out[SATURATION.byArea0] = factor;
  out[SATURATION.bySaturation] = -area0 * power;
  out[SATURATION.byPower] = area0 * (2 * curvature * power - saturation);
  out[SATURATION.byCurvature] = area0 * power * power;
}

/** Apparent full width of a line swept by the laser that saturates it: G sqrt(1 + 2 S P), S of its area. */
export function scannedProbeWidth(width: number, saturation: number, power: number): number {
  return width * Math.sqrt(1 + 2 * saturation * power);
}

/** Bleaching of the peak of the same line, 1/(1 + 2 S P). */
export function scannedProbePeak(saturation: number, power: number): number {
  return 1 / (1 + 2 * saturation * power);
}

/** ln(1 + v)/v. */
function logarithmicMean(v: number): number {
  return Math.abs(v) < 1e-8 ? 1 - v / 2 : Math.log1p(v) / v;
}

/** d/dv ln(1 + v)/v = [v/(1 + v) - ln(1 + v)]/v^2; below 0.02 Sum_k (-1)^(k+1) (k+1)/(k+2) v^k. */
function logarithmicMeanSlope(v: number): number {
  if (Math.abs(v) >= 0.02) return (v / (1 + v) - Math.log1p(v)) / (v * v);
  let sum = 0;
  for (let k = 9; k >= 0; k--) sum = (k + 1) / (k + 2) - v * sum;
  return -sum;
}
