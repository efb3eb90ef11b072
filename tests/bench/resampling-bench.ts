/**
 * Spectra drawn anew, and profiles, on the demo's first crystal (9,000 points): `npx tsx tests/bench/resampling-bench.ts [draws]`.
 * Wall and processor time of the whole fit on one and two threads of the pool, whether both gave the same bits, how soon a
 * cancelled one was answered, and what profiles and joint regions of the series parameters take. Bars: 500 draws under 60 s,
 * four profiles under 2 s. Processor time stands beside wall time, since only that is fair on a machine that does other work.
 */
import { execFileSync } from "node:child_process";
import { readFileSync } from "node:fs";
import { availableParallelism, loadavg } from "node:os";
import { fileURLToPath } from "node:url";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { makePoolRunner } from "../../main/services/pool-runner.ts";

const draws = Number(process.argv[2] ?? 500);
const bytes = readFileSync(new URL("../../fixtures/demo/TH-A1_transmission.csv", import.meta.url));
// The thread's program is the one that ships, built by asking for the version.
execFileSync(process.execPath, [
  fileURLToPath(new URL("../../main/rungline.mjs", import.meta.url)),
  "--version",
]);
const THREAD = new URL("../../dist/main/fit-pool-thread.mjs", import.meta.url);

interface Measured {
  readonly wall: number;
  readonly processor: number;
  readonly result: RunglineResult | null;
}

async function measure(
  threads: number,
  uncertainty: object,
  cancelAt = Infinity,
): Promise<Measured & { readonly answered: number }> {
  const runner = makePoolRunner(THREAD, threads);
  const cancel = new AbortController();
  const began = performance.now();
  const before = process.cpuUsage();
  let asked = began;
  const outcome = await runner.fit(
    {
      file: "TH-A1_transmission.csv",
      bytes,
      choices: { material: { preset: "cuprous-oxide-yellow-p" }, uncertainty },
    },
    { version: "0", node: process.version, started: "" },
    (fraction) => {
      if (fraction < cancelAt || cancel.signal.aborted) return;
      asked = performance.now();
      cancel.abort();
    },
    cancel.signal,
  );
  const answered = performance.now() - asked;
  const { user, system } = process.cpuUsage(before);
  await runner.close();
  return {
    wall: (performance.now() - began) / 1000,
    processor: (user + system) / 1e6,
    result: outcome.type === "analysed" ? outcome.analysed.result : null,
    answered,
  };
}

const bits = (result: RunglineResult | null): string => JSON.stringify({ ...result, run: null });
const load = (): string => loadavg()[0]!.toFixed(1);

console.log(`${draws} draws, ${availableParallelism()} processors`);
const found: string[] = [];
for (const threads of [1, 2]) {
  const { wall, processor, result } = await measure(threads, { resample: "parametric", resamples: draws });
  found.push(bits(result));
  console.log(
    `${threads} thread${threads === 1 ? " " : "s"}: ${wall.toFixed(1)} s wall, ${processor.toFixed(1)} s processor at load ${load()}, ${result?.resampled?.failed ?? "?"} failed`,
  );
}
console.log(`the same bits: ${found[0] === found[1]}`);
const stopped = await measure(2, { resample: "parametric", resamples: draws }, 0.2);
console.log(`cancelled while drawing: answered after ${stopped.answered.toFixed(1)} ms`);
const seconds = async (uncertainty: object): Promise<number> => {
  const all: number[] = [];
  for (let i = 0; i < 3; i++) all.push((await measure(1, uncertainty)).result!.run.seconds.uncertainty);
  return Math.min(...all);
};
const without = await seconds({ systematic: false, profile: false });
const plain = await seconds({ systematic: false });
console.log(
  `profiles of four series parameters and joint regions: ${(plain - without).toFixed(2)} s (uncertainties ${plain.toFixed(2)} s with, ${without.toFixed(2)} s without, at load ${load()})`,
);
