import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { FitOutcome, FitRunner } from "../../main/services/index.ts";
import { makePoolRunner } from "../../main/services/pool-runner.ts";

/** A pool's program that does what the name of the file asks for. */
const PROGRAM = `
import { parentPort } from "node:worker_threads";
export default function ({ id, request, cancel }) {
  if (request.file === "throw") throw new Error("fit broke");
  if (request.file === "exit") process.exit(7);
  if (request.file === "long") {
    while (Atomics.load(cancel, 0) === 0);
    return { type: "cancelled" };
  }
  parentPort.postMessage({ id, fraction: 0.5, step: request.file });
  // Progress goes its own way: a fit that ends at once may overtake it.
  Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, 40);
  return { type: "refused", wordings: [{ message: request.file, remedy: "" }] };
}
`;

let folder = "";
let runner: FitRunner;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "rungline-pool-"));
  await writeFile(join(folder, "program.mjs"), PROGRAM);
  runner = makePoolRunner(pathToFileURL(join(folder, "program.mjs")), 2);
});
afterAll(async () => {
  await runner.close();
  await rm(folder, { recursive: true, force: true });
});

const ask = (
  file: string,
  signal = new AbortController().signal,
  progress: (fraction: number, step: string) => void = () => undefined,
): Promise<FitOutcome> =>
  runner.fit(
    { file, bytes: new Uint8Array(1), choices: {} },
    { version: "0", node: "v20", started: "" },
    progress,
    signal,
  );

describe("fits in a pool of threads", () => {
  it("are answered each with its own outcome and progress", async () => {
    expect(runner.threads).toBe(2);
    const files = ["a", "b", "c", "d", "e"];
    const steps = new Map<string, string[]>();
    const outcomes = await Promise.all(
      files.map((file) =>
        ask(file, undefined, (_, step) => steps.set(file, [...(steps.get(file) ?? []), step])),
      ),
    );
    outcomes.forEach((outcome, i) =>
      expect(outcome).toMatchObject({ type: "refused", wordings: [{ message: files[i] }] }),
    );
    for (const file of files) expect(steps.get(file)).toStrictEqual([file]);
  });

  it("that break or end their thread are faults; the others and the next ones are done", async () => {
    const [broke, ended, good] = await Promise.all([ask("throw"), ask("exit"), ask("a")]);
    expect(broke).toMatchObject({ type: "fault", message: "fit broke" });
    expect(ended.type).toBe("fault");
    expect(["refused", "fault"]).toContain(good.type);
    expect((await ask("b")).type).toBe("refused");
  });

  it("are cancelled while their threads are busy", async () => {
    const cancel = new AbortController();
    const long = [ask("long", cancel.signal), ask("long", cancel.signal), ask("a", cancel.signal)];
    cancel.abort();
    expect((await Promise.all(long)).map((outcome) => outcome.type)).toStrictEqual([
      "cancelled",
      "cancelled",
      "cancelled",
    ]);
    expect((await ask("a")).type).toBe("refused");
    expect((await ask("a", AbortSignal.abort())).type).toBe("cancelled");
  });
});
