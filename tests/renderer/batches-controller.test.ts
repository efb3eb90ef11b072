import { beforeEach, describe, expect, it } from "vitest";
import { resultsToJson } from "../../app/report/index.ts";
import type { Host } from "../../app/tasks/index.ts";
import { gather, unfittedFiles } from "../../renderer/store/gather.ts";
import { JobClient } from "../../renderer/jobs/job-client.ts";
import { currentComparison } from "../../renderer/store/context.ts";
import { Controller } from "../../renderer/store/controller.ts";
import { makeStore, type WindowStore } from "../../renderer/store/store.ts";
import { CRYSTALS, crystalAnalysed, crystalComparison, crystalResult } from "./batches-sample.ts";
import { FakeWorker } from "./fake-worker.ts";

let store: WindowStore;
let controller: Controller;
let reader: FakeWorker;
let fitter: FakeWorker;
let saved: string[];

const settle = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
const encode = (text: string): Uint8Array => new TextEncoder().encode(text);
const comparisons = (): number => reader.asked.filter(({ type }) => type === "compare").length;

beforeEach(async () => {
  saved = [];
  reader = new FakeWorker();
  fitter = new FakeWorker();
  store = makeStore();
  const host: Host = {
    shell: "loopback",
    about: async () => ({ version: "1.2.3", node: "v20" }),
    startFiles: async () => ({ files: [], choices: {} }),
    demoFiles: async () => [],
    demoSeries: async () => [],
    openFiles: async () => [],
    saveFile: async (name) => {
      saved.push(name);
      return name;
    },
  };
  controller = new Controller(
    store,
    host,
    new JobClient(() => reader, true),
    new JobClient(() => fitter, true),
    () => new Date("2026-01-02T03:04:05Z"),
  );
  await controller.start();
});

/** The next fit that was asked for, answered. */
async function answerFit(i: number): Promise<void> {
  await settle();
  const { id } = fitter.asked.at(-1)!;
  fitter.answer({ type: "analysed", id, analysed: crystalAnalysed(CRYSTALS[i]!) });
  await settle();
}

const openThree = (): void =>
  controller.add(CRYSTALS.slice(0, 3).map(({ sample }) => ({ name: `${sample}.csv`, bytes: encode("1") })));

describe("fitting all files", () => {
  it("goes through those without a fit, tells how far it is, and is one step of undo", async () => {
    openThree();
    const done = controller.fitAll();
    await answerFit(0);
    expect(store.getState().job).toMatchObject({ what: "all", step: "2 of 3" });
    await answerFit(1);
    await answerFit(2);
    await done;
    expect(store.getState().job).toBeNull();
    expect(unfittedFiles(store.getState().session)).toEqual([]);
    controller.undo();
    expect(Object.keys(store.getState().session.fits)).toEqual([]);
    controller.redo();
    expect(Object.keys(store.getState().session.fits)).toHaveLength(3);
  });

  it("keeps what is finished when it is cancelled", async () => {
    openThree();
    const done = controller.fitAll();
    await answerFit(0);
    controller.cancel();
    fitter.answer({ type: "cancelled", id: fitter.asked.at(-1)!.id });
    await done;
    expect(Object.keys(store.getState().session.fits)).toEqual(["P1.csv"]);
    expect(store.getState().messages[0]!.text).toBe(
      "fitting all files was cancelled; 1 of 3 were finished and are kept",
    );
  });

  it("names the files that were refused and fits the others", async () => {
    openThree();
    const done = controller.fitAll();
    await settle();
    const wordings = [{ message: "no table", remedy: "look at it" }];
    fitter.answer({ type: "refused", id: fitter.asked.at(-1)!.id, wordings });
    await answerFit(1);
    await answerFit(2);
    await done;
    expect(store.getState().refusals["P1.csv"]).toEqual(wordings);
    expect(store.getState().messages[0]!.text).toBe("1 of 3 files could not be fitted: P1.csv");
    expect(Object.keys(store.getState().session.fits)).toEqual(["P2.csv", "P3.csv"]);
  });
});

describe("results dropped on the window", () => {
  const drop = (): void =>
    controller.add([{ name: "all.json", bytes: encode(resultsToJson(CRYSTALS.map(crystalResult))) }]);

  it("are compared at once, in the worker, and again only when something has changed", async () => {
    drop();
    expect(store.getState().stage).toBe("batches");
    expect(comparisons()).toBe(1);
    reader.answer({ type: "compared", id: reader.asked.at(-1)!.id, comparison: crystalComparison() });
    await settle();
    expect(currentComparison(store.getState())!.samples).toHaveLength(5);
    controller.select(4);
    expect(comparisons()).toBe(1);
    controller.changeCompare({ hidden: ["P"] }, "leave out P");
    expect(comparisons()).toBe(2);
    controller.changeCompare({ hidden: ["P", "Q"] }, "leave out Q");
    expect(store.getState().compared).toBeNull();
    controller.undo();
    expect(store.getState().session.compare.hidden).toEqual(["P"]);
    expect(comparisons()).toBe(3);
  });

  it("lose a reference batch that the filters leave out", () => {
    drop();
    controller.changeCompare({ choices: { reference: "P" } }, "reference batch");
    expect(store.getState().session.compare.choices.reference).toBe("P");
    controller.changeCompare({ hidden: ["P"] }, "leave out P");
    expect(store.getState().session.compare.choices.reference).toBeNull();
  });

  it("open in their record, files in their ladder", () => {
    drop();
    openThree();
    const result = crystalResult(CRYSTALS[4]!);
    controller.openMeasured(result.source.file, result.source.sha256);
    expect(store.getState()).toMatchObject({ stage: "record", recordOf: "all.json [5]" });
  });

  it("are refused in words when they are broken", () => {
    const text = resultsToJson([crystalResult(CRYSTALS[0]!)]).replace('"converged"', '"splendid"');
    controller.add([{ name: "broken.json", bytes: encode(text) }]);
    expect(gather(store.getState().session)).toEqual([]);
    expect(store.getState().messages[0]!.text).toMatch(/^broken\.json: /);
  });
});

describe("the record", () => {
  it("is made in the worker and kept under its name", async () => {
    const input = { results: [crystalResult(CRYSTALS[0]!)], curves: [null], comparison: null };
    const done = controller.saveRecord(input, "report");
    const { id } = reader.asked.at(-1)!;
    reader.answer({ type: "recorded", id, file: { name: "P1.report.html", bytes: encode("<p>") } });
    await done;
    expect(saved).toEqual(["P1.report.html"]);
  });

  it("is what Ctrl+S keeps in its stage", async () => {
    controller.add([{ name: "P1.json", bytes: encode(resultsToJson([crystalResult(CRYSTALS[0]!)])) }]);
    controller.show("record");
    const done = controller.saveShown();
    expect(reader.asked.at(-1)).toMatchObject({ type: "record", part: "report" });
    const { id } = reader.asked.at(-1)!;
    reader.answer({ type: "recorded", id, file: { name: "P1.report.html", bytes: encode("<p>") } });
    await done;
    expect(saved).toEqual(["P1.report.html"]);
  });
});
