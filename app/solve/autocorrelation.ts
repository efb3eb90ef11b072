/**
 * What      Autocorrelation of residuals about their mean at lags 0..most: rho_k = sum d_i d_{i+k}/sum d_i^2.
 * Shapes    residuals (m); returns most + 1 numbers, the first 1 (all NaN without spread).
 * Domain    the sum has m - k terms over the full one, the estimate that gives a positive semidefinite sequence.
 * Source    Box, Jenkins, Reinsel, Time Series Analysis, 3rd ed. (1994), 2.1.
 */
export function autocorrelation(residuals: ArrayLike<number>, most: number): Float64Array {
  const at = correlationAt(residuals);
  return Float64Array.from({ length: most + 1 }, (_, lag) => at(lag));
}

/** rho_k, one at a time. */
function correlationAt(residuals: ArrayLike<number>): (lag: number) => number {
  const m = residuals.length;
  if (m < 2) return () => NaN;
  let mean = 0;
  for (let i = 0; i < m; i++) mean += residuals[i]! / m;
  const d = Float64Array.from(residuals, (value) => value - mean);
  const square = product(d, 0);
  return (lag) => (square > 0 ? product(d, lag) / square : NaN);
}

function product(d: Float64Array, lag: number): number {
  let sum = 0;
  for (let i = lag; i < d.length; i++) sum += d[i]! * d[i - lag]!;
  return sum;
}

/** Lags after which white noise would show no more: the rule 4 (m/100)^(2/9) of the Newey-West estimate, at least 1. */
function defaultLags(points: number): number {
  return Math.max(1, Math.floor(4 * (points / 100) ** (2 / 9)));
}

/**
 * How many neighbours count as one: 1 + 2 sum w_k rho_k with Bartlett's weights w_k = 1 - k/(L + 1). The lags L grow from the
 * default until the correlation has died out (|rho| below two standard errors of white noise), at most to m/20.
 */
export function correlationTime(residuals: ArrayLike<number>): {
  readonly time: number;
  readonly lags: number;
} {
  const m = residuals.length;
  const most = Math.max(1, Math.floor(m / 20));
  const at = correlationAt(residuals);
  // Of a long series most lags are never looked at.
  const rho = [1];
  let lags = Math.min(most, defaultLags(m));
  let died = 0;
  while (died < most && Math.abs((rho[died + 1] = at(died + 1))) > 2 / Math.sqrt(m)) died++;
  // Bartlett's weights reach zero at L + 1: three times the length of the correlation leaves its last lag two thirds.
  lags = Math.min(most, Math.max(lags, 3 * died));
  let time = 1;
  for (let k = 1; k <= lags; k++) time += 2 * (1 - k / (lags + 1)) * (rho[k] ?? at(k));
  return { time: Number.isFinite(time) ? Math.max(time, 1e-3) : 1, lags };
}
