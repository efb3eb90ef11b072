/**
 * Cold starts on many random spectra: `npx tsx tests/bench/assignment.bench.ts [first seed] [count]`.
 * Prints every spectrum that was not read rightly or whose gap is off by more than four standard errors, then the
 * tally, with the 95 % bound of the share of wrong readings (rule of three where none is wrong, else Wilson's interval).
 */
import { campaignCase, judgeCase } from "../support/campaign.ts";

const first = Number(process.argv[2] ?? 1000);
const count = Number(process.argv[3] ?? 300);
const tally = { right: 0, none: 0, wrong: 0 };
const pulls: number[] = [];
let silent = 0;
let spent = 0;
const MILD = ["highest-line-blended", "low-n-coherent", "sampling-coarse", "window-short", "low-n-off-law"];

for (let seed = first; seed < first + count; seed++) {
  const one = campaignCase(seed);
  const began = performance.now();
  const { assignment, doubts, gapPull, result } = judgeCase(one);
  spent += performance.now() - began;
  tally[assignment]++;
  const grave = doubts.filter((code) => !MILD.includes(code));
  const far = Math.abs(gapPull ?? 0) > 4;
  if (grave.length === 0 && (assignment !== "right" || Math.abs(gapPull ?? 0) > 5)) silent++;
  if (grave.length === 0 && gapPull !== null) pulls.push(gapPull);
  if (assignment === "right" && !far) continue;
  console.log(
    `${seed} ${one.preset}: visible to n = ${one.visible}, lines ${result.lines.map((line) => line.n).join(",")}, ` +
      `${assignment}, gap pull ${gapPull?.toFixed(1) ?? "-"}, ${grave.join(" + ") || "SILENT"}`,
  );
}
const share = tally.wrong / count;
const z = 1.96;
const upper =
  tally.wrong === 0
    ? 3 / count
    : (share +
        (z * z) / (2 * count) +
        z * Math.sqrt((share * (1 - share)) / count + (z * z) / (4 * count * count))) /
      (1 + (z * z) / count);
const mean = pulls.reduce((sum, pull) => sum + pull, 0) / pulls.length;
const spread = Math.sqrt(pulls.reduce((sum, pull) => sum + (pull - mean) ** 2, 0) / pulls.length);
console.log(
  `${count} spectra: ${tally.right} right, ${tally.none} no series, ${tally.wrong} wrong (below ${(100 * upper).toFixed(1)} % at 95 %), ` +
    `${silent} silently off; pull of the gap without grave doubt ${mean.toFixed(2)} +- ${spread.toFixed(2)} (${pulls.length}); ` +
    `${(spent / count).toFixed(0)} ms each`,
);
