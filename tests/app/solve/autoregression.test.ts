import { expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import { autocorrelation, autoregression, drawAutoregression } from "../../../app/solve/index.ts";

function draw(process: Parameters<typeof drawAutoregression>[0], m: number, seed: number): Float64Array {
  const out = new Float64Array(m);
  const random = makeRandom(seed);
  drawAutoregression(process, () => random.normal(), out);
  return out;
}

test("coefficients of a sequence made with them come back", () => {
  const random = makeRandom(4);
  const x = new Float64Array(20_000);
  for (let t = 2; t < x.length; t++) x[t] = 0.9 * x[t - 1]! - 0.4 * x[t - 2]! + random.normal();
  const { stages } = autoregression(x);
  const { coefficients, deviation } = stages[stages.length - 1]!;
  // Derived: errors of sqrt((1 - 0.4^2)/20000) = 0.0065; five of them. More terms than two come in by chance and are small
  expect(Math.abs(coefficients[0]! - 0.9)).toBeLessThan(0.033);
  expect(Math.abs(coefficients[1]! + 0.4)).toBeLessThan(0.033);
  for (const small of coefficients.slice(2)) expect(Math.abs(small)).toBeLessThan(0.033);
  // Derived: variance of such a sequence (1 - b)/((1 + b)((1 - b)^2 - a^2)) with a = 0.9, b = -0.4: 2.0290; 1/sqrt of it
  expect(Math.abs(deviation - 0.702)).toBeLessThan(0.02);
});

test("drawn sequences have unit variance from their first point and the correlation of their source", () => {
  const random = makeRandom(9);
  // A moving average of four, as a detector that smears light over its pixels makes it.
  const white = Float64Array.from({ length: 8003 }, () => random.normal());
  const x = Float64Array.from(
    { length: 8000 },
    (_, t) => white[t]! + white[t + 1]! + white[t + 2]! + white[t + 3]!,
  );
  const process = autoregression(x);
  const rho = autocorrelation(draw(process, 40_000, 2), 5);
  // Derived: moving average of four: 3/4, 2/4, 1/4, 0; the source's own estimate is good to 0.02, the drawn one to 0.01
  [0.75, 0.5, 0.25, 0, 0].forEach((truth, i) => expect(Math.abs(rho[i + 1]! - truth)).toBeLessThan(0.08));
  let first = 0;
  let all = 0;
  for (let seed = 1; seed <= 2000; seed++) {
    const short = draw(process, 40, seed);
    first += short[0]! ** 2 / 2000;
    all += short.reduce((sum, value) => sum + value * value, 0) / 80_000;
  }
  // Derived: the mean square of 2000 normal numbers scatters by sqrt(2/2000) = 0.032; five of it
  expect(Math.abs(first - 1)).toBeLessThan(0.16);
  expect(Math.abs(all - 1)).toBeLessThan(0.16);
});

test("white residuals and none give a white process", () => {
  const random = makeRandom(5);
  const { stages } = autoregression(Float64Array.from({ length: 5000 }, () => random.normal()));
  // Derived: a coefficient of white noise scatters by 1/sqrt(5000) = 0.014; five of it
  for (const small of stages[stages.length - 1]!.coefficients) expect(Math.abs(small)).toBeLessThan(0.07);
  expect(autoregression(new Float64Array(300)).stages).toHaveLength(1);
  expect(autoregression(new Float64Array(0)).stages).toHaveLength(1);
});
