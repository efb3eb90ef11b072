/**
 * Coverage of the exponent of S_n: `npx tsx tests/bench/power-coverage.bench.ts [first seed] [count]`.
 * Seeded series of line parameters with known S_n; prints how often the 68.3 % interval of the exponent holds the truth
 * (bar: 61 % to 75.5 % over 400), the width of the pulls and the worst S_n, and ends with 1 where a bar is missed.
 */
import { powerCoverage } from "../support/power-coverage.ts";

const first = Number(process.argv[2] ?? 1000);
const count = Number(process.argv[3] ?? 400);
const { covered, pulls, saturationPulls, seconds } = powerCoverage(first, count);
const rms = (x: readonly number[]): number =>
  Math.sqrt(x.reduce((sum, one) => sum + one * one, 0) / x.length);
const mean = (x: readonly number[]): number => x.reduce((sum, one) => sum + one, 0) / x.length;
const worst = (x: readonly number[]): number => Math.max(...x.map(Math.abs));
const share = covered / count;
console.log(`${count} series from seed ${first} in ${seconds.toFixed(1)} s`);
console.log(`exponent: ${(100 * share).toFixed(1)} % covered (bar 61 to 75.5 %)`);
console.log(
  `exponent pulls: mean ${mean(pulls).toFixed(3)}, rms ${rms(pulls).toFixed(3)}, worst ${worst(pulls).toFixed(2)} (bar 4)`,
);
console.log(
  `S_n pulls: mean ${mean(saturationPulls).toFixed(3)}, rms ${rms(saturationPulls).toFixed(3)}, worst ${worst(saturationPulls).toFixed(2)} of ${saturationPulls.length}`,
);
process.exitCode = share >= 0.61 && share <= 0.755 && worst(pulls) < 4 ? 0 : 1;
