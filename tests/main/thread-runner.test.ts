import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { makeThreadRunner, type FitOutcome, type FitRunner } from "../../main/services/index.ts";

/** A thread program that does what the name of the file asks for. */
const PROGRAM = `
import { parentPort } from "node:worker_threads";
parentPort.on("message", ({ id, request, cancel }) => {
  if (request.file === "throw") throw new Error("thread broke");
  if (request.file === "exit") process.exit(7);
  if (request.file === "long") {
    while (Atomics.load(cancel, 0) === 0);
    parentPort.postMessage({ type: "cancelled", id });
    return;
  }
  parentPort.postMessage({ type: "progress", id, fraction: 0.5, step: "half" });
  parentPort.postMessage({ type: "refused", id, wordings: [{ message: request.file, remedy: "" }] });
});
`;

let folder = "";
const programs: Record<"good" | "broken", URL> = { good: new URL("file:"), broken: new URL("file:") };
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "rungline-thread-"));
  await writeFile(join(folder, "good.mjs"), PROGRAM);
  await writeFile(join(folder, "broken.mjs"), "throw new Error('cannot load');");
  programs.good = pathToFileURL(join(folder, "good.mjs"));
  programs.broken = pathToFileURL(join(folder, "broken.mjs"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

const ask = (
  runner: FitRunner,
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

describe("fits in a thread of its own", () => {
  it("answers one request after another, with progress", async () => {
    const runner = makeThreadRunner(programs.good);
    for (const file of ["a", "b", "c"]) {
      const steps: string[] = [];
      const outcome = await ask(runner, file, undefined, (_, step) => steps.push(step));
      expect(outcome).toMatchObject({ type: "refused", wordings: [{ message: file }] });
      expect(steps).toStrictEqual(["half"]);
    }
    await runner.close();
  });

  it("survives a thread that breaks or ends: that fit is a fault, the next one is done", async () => {
    const runner = makeThreadRunner(programs.good);
    expect(await ask(runner, "throw")).toMatchObject({ type: "fault", message: "thread broke" });
    expect((await ask(runner, "a")).type).toBe("refused");
    expect(await ask(runner, "exit")).toMatchObject({ type: "fault" });
    expect((await ask(runner, "b")).type).toBe("refused");
    await runner.close();
  });

  it("is cancelled while the thread is busy, and the thread goes on to the next request", async () => {
    const runner = makeThreadRunner(programs.good);
    const cancel = new AbortController();
    const long = ask(runner, "long", cancel.signal);
    cancel.abort();
    expect(await long).toStrictEqual({ type: "cancelled" });
    expect((await ask(runner, "a")).type).toBe("refused");
    expect((await ask(runner, "a", AbortSignal.abort())).type).toBe("cancelled");
    await runner.close();
  });

  it("tells a thread that cannot even be loaded as a fault", async () => {
    const runner = makeThreadRunner(programs.broken);
    expect(await ask(runner, "a")).toMatchObject({ type: "fault", message: "cannot load" });
    await runner.close();
  });
});
