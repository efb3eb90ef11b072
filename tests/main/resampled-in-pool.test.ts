import { beforeAll, describe, expect, it } from "vitest";
import type { FitOutcome, FitRunner } from "../../main/services/index.ts";
import { makeInlineRunner } from "../../main/services/index.ts";
import { makePoolRunner } from "../../main/services/pool-runner.ts";
import { runProgram } from "../faults/program.ts";
import { COVERAGE_KINDS } from "../support/coverage.ts";
import { makeSpectrum, spectrumFile } from "../support/make-spectrum.ts";

const THREAD = new URL("../../dist/main/fit-pool-thread.mjs", import.meta.url);
const kind = COVERAGE_KINDS[1]!;
const bytes = spectrumFile(
  makeSpectrum(kind.series, { ...kind.sampling, seed: 3 }),
  kind.sampling.sigma,
  kind.heading,
);

beforeAll(async () => {
  // The thread's program is the one that ships.
  await runProgram(["--version"]);
});

function fit(
  runner: FitRunner,
  resamples: number,
  signal = new AbortController().signal,
  progress: (fraction: number, step: string) => void = () => undefined,
): Promise<FitOutcome> {
  const uncertainty = { systematic: false, profile: false, resample: "residual", resamples, seed: 4 };
  return runner.fit(
    { file: "made.csv", bytes, choices: { ...kind.choices, uncertainty } },
    { version: "0", node: "v20", started: "" },
    progress,
    signal,
  );
}

async function resultWith(runner: FitRunner): Promise<unknown> {
  const outcome = await fit(runner, 25);
  await runner.close();
  if (outcome.type !== "analysed") throw new Error(`not analysed but ${outcome.type}`);
  const { run: _, ...result } = outcome.analysed.result;
  // Derived: as asked for
  expect(result.resampled!.count).toBe(25);
  return JSON.stringify(result);
}

describe("resampled spectra of one file", () => {
  it("are the same to the bit whatever the number of threads that draw them", async () => {
    const alone = await resultWith(makeInlineRunner());
    for (const threads of [1, 3]) expect(await resultWith(makePoolRunner(THREAD, threads))).toBe(alone);
  });

  it("tell how far they are, and are cancelled between two draws", async () => {
    const runner = makePoolRunner(THREAD, 2);
    const cancel = new AbortController();
    const heard: number[] = [];
    const outcome = await fit(runner, 100_000, cancel.signal, (fraction, step) => {
      if (!step.startsWith("drawing spectra anew")) return;
      heard.push(fraction);
      if (heard.length === 5) cancel.abort();
    });
    expect(outcome.type).toBe("cancelled");
    expect(heard).toEqual([...heard].sort((a, b) => a - b));
    await runner.close();
  });
});
