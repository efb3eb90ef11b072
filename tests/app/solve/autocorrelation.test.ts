import { expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { autocorrelation, correlationTime } from "../../../app/solve/index.ts";

function autoregressive(rho: number, m: number, seed: number): Float64Array {
  const random = makeRandom(seed);
  let last = random.normal();
  return Float64Array.from({ length: m }, () => {
    last = rho * last + Math.sqrt(1 - rho * rho) * random.normal();
    return last;
  });
}

test("the autocorrelation of an autoregressive sequence falls as a power of the lag", () => {
  const rho = autocorrelation(autoregressive(0.6, 20_000, 1), 4);
  // Derived: rho_k = 0.6^k; standard error about 1/sqrt(20000) times a factor below 2
  [1, 0.6, 0.36, 0.216, 0.1296].forEach((truth, k) => expect(Math.abs(rho[k]! - truth)).toBeLessThan(0.03));
});

test("so many neighbours count as one as the sum of the correlations says", () => {
  // Derived: 1 + 2 sum 0.6^k = 1.6/0.4 = 4; Bartlett's weights take a tenth or so of it away
  expect(correlationTime(autoregressive(0.6, 20_000, 2)).time).toBeGreaterThan(3.2);
  expect(correlationTime(autoregressive(0.6, 20_000, 2)).time).toBeLessThan(4.4);
  // Derived: white noise has 1, with an error of sqrt(4 L/(3 m)) = 0.03 for L = 12 lags
  expect(Math.abs(correlationTime(autoregressive(0, 20_000, 3)).time - 1)).toBeLessThan(0.12);
});

test("residuals without spread have no autocorrelation", () => {
  expect(autocorrelation(new Float64Array(5), 2).every(Number.isNaN)).toBe(true);
  expect(correlationTime(new Float64Array(50)).time).toBe(1);
});
