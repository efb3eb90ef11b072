import { autocorrelation } from "./autocorrelation.ts";

/**
 * A stationary process x_t = sum_j phi_j x_{t-j} + e_t of unit variance. `stages[k]` predicts from k values: its coefficients
 * and the standard deviation of what is left, so that a series can start in its stationary state.
 */
export interface Autoregression {
  readonly stages: readonly { readonly coefficients: Float64Array; readonly deviation: number }[];
}

/**
 * What      The autoregression whose autocorrelation is that of the residuals at lags 1..p, by the Levinson-Durbin recursion;
 *           of all orders up to 10 log10(m) the one with the least m ln(s_p^2) + 2 p.
 * Shapes    residuals (m).
 * Domain    order 0 (white) where no order is better, or the residuals have no spread.
 * Accuracy  tests/app/solve/autoregression.test.ts.
 * Source    Brockwell and Davis, Time Series: Theory and Methods, 2nd ed. (1991), 8.2; order: Akaike, IEEE Trans. Autom. Control
 *           19, 716 (1974).
 */
export function autoregression(residuals: ArrayLike<number>): Autoregression {
  const m = residuals.length;
  const white = { stages: [{ coefficients: new Float64Array(0), deviation: 1 }] };
  const most = Math.min(Math.floor(10 * Math.log10(Math.max(1, m))), m >> 2);
  if (most < 1) return white;
  const rho = autocorrelation(residuals, most);
  if (!rho.every(Number.isFinite)) return white;
  const stages: { coefficients: Float64Array; deviation: number }[] = [...white.stages];
  let variance = 1;
  let best = 0;
  let least = 0;
  for (let order = 1; order <= most; order++) {
    const before = stages[order - 1]!.coefficients;
    let reflection = rho[order]!;
    for (let j = 0; j < order - 1; j++) reflection -= before[j]! * rho[order - 1 - j]!;
    reflection /= variance;
    const left = variance * (1 - reflection * reflection);
    if (!(left > 0)) break;
    const coefficients = new Float64Array(order);
    for (let j = 0; j < order - 1; j++) coefficients[j] = before[j]! - reflection * before[order - 2 - j]!;
    coefficients[order - 1] = reflection;
    variance = left;
    stages.push({ coefficients, deviation: Math.sqrt(variance) });
    const criterion = m * Math.log(variance) + 2 * order;
    if (criterion < least) {
      least = criterion;
      best = order;
    }
  }
  return { stages: stages.slice(0, best + 1) };
}

/** A stretch of the process from standard normal numbers; out (m) is written. */
export function drawAutoregression(
  { stages }: Autoregression,
  normal: () => number,
  out: Float64Array,
): void {
  const last = stages.length - 1;
  for (let t = 0; t < out.length; t++) {
    const { coefficients, deviation } = stages[Math.min(t, last)]!;
    let value = deviation * normal();
    for (let j = 0; j < coefficients.length; j++) value += coefficients[j]! * out[t - 1 - j]!;
    out[t] = value;
  }
}
