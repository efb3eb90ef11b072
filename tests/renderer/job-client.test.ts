import { afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { JobClient } from "../../renderer/jobs/job-client.ts";
import { FakeWorker } from "./fake-worker.ts";
import { sampleAnalysed, sampleInspection } from "./sample.ts";

const REQUEST = { file: "a.csv", bytes: new Uint8Array(), choices: {} };
const RUN = { version: "1", node: "v20", started: "2026-01-01T00:00:00.000Z" };

function client(shared: boolean): { jobs: JobClient; workers: FakeWorker[] } {
  const workers: FakeWorker[] = [];
  const jobs = new JobClient(() => {
    const worker = new FakeWorker();
    workers.push(worker);
    return worker;
  }, shared);
  return { jobs, workers };
}

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

describe("a job in the page worker", () => {
  it("reports progress and settles with what the worker found", async () => {
    const { jobs, workers } = client(true);
    const steps: string[] = [];
    const { outcome } = jobs.analyse(REQUEST, RUN, (fraction, step) => steps.push(`${fraction} ${step}`));
    workers[0]!.answer({ type: "progress", id: 1, fraction: 0.5, step: "fitting" });
    const analysed = sampleAnalysed();
    workers[0]!.answer({ type: "analysed", id: 1, analysed });
    expect(await outcome).toEqual({ kind: "done", value: analysed });
    expect(steps).toEqual(["0.5 fitting"]);
  });

  it("is told to stop by a shared flag where memory can be shared", async () => {
    const { jobs, workers } = client(true);
    const job = jobs.analyse(REQUEST, RUN, () => undefined);
    job.cancel();
    const asked = workers[0]!.asked[0]!;
    expect(asked.type === "analyse" && Atomics.load(asked.cancel!, 0)).toBe(1);
    expect(workers[0]!.ended).toBe(false);
    workers[0]!.answer({ type: "cancelled", id: 1 });
    expect(await job.outcome).toEqual({ kind: "cancelled" });
  });

  it("is ended when it does not obey in time", async () => {
    const { jobs, workers } = client(true);
    const job = jobs.analyse(REQUEST, RUN, () => undefined);
    job.cancel();
    vi.advanceTimersByTime(2000);
    expect(await job.outcome).toEqual({ kind: "cancelled" });
    expect(workers[0]!.ended).toBe(true);
  });

  it("is ended at once where memory cannot be shared, and the next job has a new worker", async () => {
    const { jobs, workers } = client(false);
    const job = jobs.analyse(REQUEST, RUN, () => undefined);
    const asked = workers[0]!.asked[0]!;
    expect(asked.type === "analyse" && asked.cancel).toBeNull();
    job.cancel();
    expect(await job.outcome).toEqual({ kind: "cancelled" });
    const next = jobs.inspect(REQUEST);
    workers[1]!.answer({ type: "inspected", id: 2, inspection: sampleInspection() });
    expect((await next).kind).toBe("done");
  });

  it("does not hear answers to a job that is over", async () => {
    const { jobs, workers } = client(false);
    const job = jobs.analyse(REQUEST, RUN, () => undefined);
    job.cancel();
    workers[0]!.answer({ type: "analysed", id: 1, analysed: sampleAnalysed() });
    expect(await job.outcome).toEqual({ kind: "cancelled" });
  });

  it("says so when the worker breaks", async () => {
    const { jobs, workers } = client(true);
    const { outcome } = jobs.analyse(REQUEST, RUN, () => undefined);
    workers[0]!.onerror?.({ message: "no such script" } as ErrorEvent);
    expect(await outcome).toEqual({ kind: "fault", message: "no such script", stack: "" });
  });
});
