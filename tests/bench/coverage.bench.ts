/**
 * How often the 68.3 % intervals hold the truth: `npx tsx tests/bench/coverage.bench.ts [spectra per kind] [kind] [first seed]`.
 * Bars: 64-73 % pooled over lines, 61-75.5 % for each single figure, mean pull within 0.15 of zero, its width 0.9-1.1.
 */
import { COVERAGE_KINDS, countSpectrum, tally, type Counted } from "../support/coverage.ts";
import { doubtsOf } from "../support/analyse-bytes.ts";

const count = Number(process.argv[2] ?? 400);
const only = process.argv[3];
const first = Number(process.argv[4] ?? 1);
let outside = 0;
for (const kind of COVERAGE_KINDS) {
  if (only !== undefined && only !== kind.name) continue;
  const all: Counted[] = [];
  const doubts = new Map<string, number>();
  const tops = new Map<string, number>();
  const began = performance.now();
  for (let seed = first; seed < first + count; seed++) {
    const { counted, result } = countSpectrum(kind, seed);
    all.push(...counted);
    for (const code of new Set(doubtsOf(result))) doubts.set(code, (doubts.get(code) ?? 0) + 1);
    const top = `${result.lines[0]?.n ?? "-"}..${result.lines.at(-1)?.n ?? "-"}/${result.series?.fit_n.join("-") ?? "-"}`;
    tops.set(top, (tops.get(top) ?? 0) + 1);
  }
  console.log(`${kind.name}: ${count} spectra, ${((performance.now() - began) / count).toFixed(0)} ms each`);
  for (const row of tally(all)) {
    const pooled = row.figure.startsWith("line ");
    const [low, high] = pooled ? [0.64, 0.73] : [0.61, 0.755];
    const good =
      row.share >= low &&
      row.share <= high &&
      Math.abs(row.mean) <= 0.15 &&
      row.width >= 0.9 &&
      row.width <= 1.1;
    if (!good) outside++;
    console.log(
      `  ${row.figure.padEnd(18)} ${String(row.count).padStart(5)}  ${(100 * row.share).toFixed(1).padStart(5)} %  ` +
        `pull ${row.mean >= 0 ? "+" : ""}${row.mean.toFixed(3)} +- ${row.width.toFixed(3)}  skewed ${(100 * row.skewed).toFixed(0)} %${good ? "" : "  OUTSIDE"}`,
    );
  }
  const list = (map: Map<string, number>): string =>
    [...map]
      .sort((a, b) => b[1] - a[1])
      .map(([key, value]) => `${key} ${value}`)
      .join(", ");
  console.log(`  lines/range: ${list(tops)}`);
  console.log(`  doubts: ${list(doubts)}`);
}
console.log(outside === 0 ? "all within their bars" : `${outside} outside their bars`);
