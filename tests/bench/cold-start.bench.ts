/**
 * The main job from cold starts on random spectra: `npx tsx tests/bench/cold-start.bench.ts [first seed] [count]`.
 * Prints every spectrum that was not read rightly, did not converge, or is off by more than five standard errors, then
 * the tally. A wrong number without a grave doubt is `SILENT`.
 */
import { coldStart, judgeColdStart } from "../support/cold-start.ts";

const first = Number(process.argv[2] ?? 1);
const count = Number(process.argv[3] ?? 500);
const tally = { right: 0, few: 0, none: 0, wrong: 0 };
let converged = 0;
let claimed = 0;
let silent = 0;
let doubted = 0;
const pulls: number[] = [];
const began = performance.now();
for (let seed = first; seed < first + count; seed++) {
  const one = coldStart(seed);
  const verdict = judgeColdStart(one);
  tally[verdict.outcome]++;
  if (verdict.result.series !== null) claimed++;
  if (verdict.converged) converged++;
  const farthest = Math.max(0, ...verdict.pulls.map(Math.abs));
  const grave = verdict.doubts.length > 0;
  if (grave) doubted++;
  else pulls.push(...verdict.pulls);
  const off = verdict.outcome === "wrong" || farthest > 5;
  if (off && !grave) silent++;
  if (!off && verdict.outcome !== "none" && (verdict.converged || verdict.outcome === "few")) continue;
  console.log(
    `${seed} ${one.preset}, ${one.seen} of ${one.count} lines to n = ${one.visible}` +
      `${one.missing === null ? "" : `, ${one.missing} missing`}${one.spurious ? ", one foreign" : ""}, ${one.background}: ` +
      `${verdict.outcome}, ${verdict.result.status}, n ${verdict.result.lines.map((line) => line.n).join(",")}, ` +
      `pulls ${verdict.pulls.map((pull) => pull.toFixed(1)).join(" ") || "-"}, ${verdict.doubts.join(" + ") || "SILENT"}`,
  );
}
const mean = pulls.reduce((sum, pull) => sum + pull, 0) / pulls.length;
const spread = Math.sqrt(pulls.reduce((sum, pull) => sum + (pull - mean) ** 2, 0) / pulls.length);
const readable = count - tally.few;
console.log(
  `${count} spectra, ${readable} with a series to be read: right ${tally.right} (${((100 * tally.right) / readable).toFixed(1)} %), ` +
    `no series ${tally.none}, wrong ${tally.wrong}; converged ${converged} of ${claimed} claimed (${((100 * converged) / claimed).toFixed(1)} %); ` +
    `silently wrong ${silent}; grave doubts at ${doubted}; pulls without them ${mean.toFixed(2)} +- ${spread.toFixed(2)} (${pulls.length}); ` +
    `${((performance.now() - began) / count).toFixed(0)} ms each`,
);
