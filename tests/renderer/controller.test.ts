import { beforeEach, describe, expect, it } from "vitest";
import type { Host, NamedBytes } from "../../app/tasks/index.ts";
import { JobClient } from "../../renderer/jobs/job-client.ts";
import {
  currentChoices,
  currentFit,
  currentPower,
  currentReading,
  currentSeries,
  fitIsOld,
  powerIsOld,
} from "../../renderer/store/context.ts";
import { Controller } from "../../renderer/store/controller.ts";
import { makeStore, type WindowStore } from "../../renderer/store/store.ts";
import { FakeWorker } from "./fake-worker.ts";
import { samplePower } from "./power-sample.ts";
import { sampleAnalysed, sampleInspection } from "./sample.ts";

const bytes = (text: string): Uint8Array => new TextEncoder().encode(text);
const DEMO: readonly NamedBytes[] = [
  { name: "one.csv", bytes: bytes("1") },
  { name: "two.csv", bytes: bytes("2") },
];

let store: WindowStore;
let controller: Controller;
let reader: FakeWorker;
let fitter: FakeWorker;
let saved: { name: string; text: string }[];
let start: { files: readonly NamedBytes[]; choices: unknown };

const settle = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
const lastAsked = (worker: FakeWorker): number => worker.asked.at(-1)!.id;

beforeEach(() => {
  saved = [];
  start = { files: [], choices: {} };
  reader = new FakeWorker();
  fitter = new FakeWorker();
  store = makeStore();
  const host: Host = {
    shell: "loopback",
    about: async () => ({ version: "1.2.3", node: "v20" }),
    startFiles: async () => start,
    demoFiles: async () => DEMO,
    demoSeries: async () => [{ name: "series.csv", bytes: bytes("5") }],
    openFiles: async () => [{ name: "picked.csv", bytes: bytes("3") }],
    saveFile: async (name, content) => {
      saved.push({ name, text: new TextDecoder().decode(content) });
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
});

async function startWithFit(): Promise<void> {
  const started = controller.start();
  await settle();
  fitter.answer({ type: "analysed", id: lastAsked(fitter), analysed: sampleAnalysed() });
  await started;
}

describe("starting", () => {
  it("opens the demo with its material and fits it", async () => {
    await startWithFit();
    const state = store.getState();
    expect(state.start).toBe("ready");
    expect(state.session.files.map((file) => file.name)).toEqual(["one.csv", "two.csv"]);
    expect(currentChoices(state)).toEqual({ material: { preset: "cuprous-oxide-yellow-p" } });
    expect(currentFit(state)).not.toBeNull();
    const asked = fitter.asked[0]!;
    expect(asked.type === "analyse" && asked.run).toEqual({
      version: "1.2.3",
      node: "v20",
      started: "2026-01-02T03:04:05.000Z",
    });
  });

  it("opens what the shell was started with instead, with its choices", async () => {
    start = { files: [{ name: "mine.csv", bytes: bytes("4") }], choices: { window_eV: [2, 3] } };
    await startWithFit();
    expect(store.getState().session.files.map((file) => file.name)).toEqual(["mine.csv"]);
    expect(currentChoices(store.getState())).toEqual({ window_eV: [2, 3] });
  });
});

describe("undo", () => {
  it("goes back over choices, each by its name, and forward again", async () => {
    await startWithFit();
    controller.change({ signal: { thickness_um: 30 } }, "thickness 30 µm");
    controller.change({ lines: { asymmetry: "zero" } }, "asymmetry zero");
    expect(store.getState().session.step).toBe("asymmetry zero");
    controller.undo();
    expect(store.getState().session.step).toBe("thickness 30 µm");
    expect(currentChoices(store.getState()).lines).toBeUndefined();
    controller.redo();
    expect(currentChoices(store.getState()).lines).toEqual({ asymmetry: "zero" });
  });

  it("takes a fit as one step, however often it reported progress", async () => {
    await startWithFit();
    const steps = store.temporal.getState().pastStates.length;
    controller.change({ lines: { asymmetry: "zero" } }, "asymmetry zero");
    const fitting = controller.fit();
    for (let i = 1; i < 9; i++)
      fitter.answer({ type: "progress", id: lastAsked(fitter), fraction: i / 9, step: "fitting" });
    expect(store.getState().job?.fraction).toBeCloseTo(8 / 9, 12);
    fitter.answer({ type: "analysed", id: lastAsked(fitter), analysed: sampleAnalysed() });
    await fitting;
    // Derived: one choice and one fit
    expect(store.temporal.getState().pastStates.length).toBe(steps + 2);
    expect(fitIsOld(store.getState())).toBe(false);
    controller.undo();
    expect(fitIsOld(store.getState())).toBe(true);
    controller.undo();
    expect(fitIsOld(store.getState())).toBe(false);
  });

  it("does not count pointing, choosing a line or looking at another stage", async () => {
    await startWithFit();
    const steps = store.temporal.getState().pastStates.length;
    controller.point(5);
    controller.select(6);
    controller.show("ladder");
    controller.setTheme("dark");
    expect(store.temporal.getState().pastStates.length).toBe(steps);
  });

  it("goes back over files that were opened and closed", async () => {
    await startWithFit();
    controller.add([{ name: "new.csv", bytes: bytes("5") }]);
    controller.close("one.csv");
    expect(store.getState().session.files.map((file) => file.name)).toEqual(["two.csv", "new.csv"]);
    controller.undo();
    controller.undo();
    expect(store.getState().session.files.map((file) => file.name)).toEqual(["one.csv", "two.csv"]);
    expect(currentFit(store.getState())).not.toBeNull();
  });
});

describe("reading", () => {
  it("happens again with every choice, and a late answer to an earlier choice is not taken", async () => {
    await startWithFit();
    const first = lastAsked(reader);
    controller.change({ signal: { thickness_um: 30 } }, "thickness 30 µm");
    const second = lastAsked(reader);
    expect(second).toBeGreaterThan(first);
    reader.answer({ type: "inspected", id: second, inspection: sampleInspection("second") });
    reader.answer({ type: "inspected", id: first, inspection: sampleInspection("first") });
    await settle();
    const reading = currentReading(store.getState());
    expect(reading?.state === "read" && reading.inspection.file).toBe("second");
  });

  it("keeps the words of a refusal", async () => {
    await startWithFit();
    const wordings = [{ message: "one.csv, line 3: no number", remedy: "name the header line" }];
    reader.answer({ type: "refused", id: lastAsked(reader), wordings });
    await settle();
    expect(currentReading(store.getState())).toMatchObject({ state: "refused", wordings });
  });
});

describe("files", () => {
  it("with one name are kept apart", async () => {
    await startWithFit();
    controller.add([DEMO[0]!]);
    expect(store.getState().session.files.map((file) => file.id)).toEqual([
      "one.csv",
      "two.csv",
      "one.csv (2)",
    ]);
  });

  it("that hold a protocol become choices, a broken one is refused in words", async () => {
    await startWithFit();
    const good = { schema: "rungline-protocol/1", series: { defect: "ritz" } };
    controller.add([{ name: "p.json", bytes: bytes(JSON.stringify(good)) }]);
    expect(currentChoices(store.getState())).toEqual(good);
    const bad = { schema: "rungline-protocol/1", serie: {} };
    controller.add([{ name: "q.json", bytes: bytes(JSON.stringify(bad)) }]);
    expect(store.getState().messages[0]).toMatchObject({
      grave: true,
      text: 'q.json: protocol: unknown key "serie"',
    });
    expect(currentChoices(store.getState())).toEqual(good);
  });

  it("share the choices of the current one on request", async () => {
    await startWithFit();
    controller.change({ series: { defect: "none" } }, "quantum defect none");
    controller.share();
    const { choices } = store.getState().session;
    expect(choices["two.csv"]).toEqual(choices["one.csv"]);
  });
});

describe("a preset", () => {
  it("replaces the whole material, so that no value of another one stays behind", async () => {
    await startWithFit();
    controller.change({ material: { gap_eV: 2.1 } }, "gap");
    controller.change({ material: { preset: "gallium-arsenide" } }, "material gallium-arsenide");
    expect(currentChoices(store.getState()).material).toEqual({ preset: "gallium-arsenide" });
  });
});

describe("a fit", () => {
  it("that is cancelled leaves what was there and says so", async () => {
    await startWithFit();
    const before = store.getState().session;
    const fitting = controller.fit();
    controller.cancel();
    expect(store.getState().job?.cancelling).toBe(true);
    fitter.answer({ type: "cancelled", id: lastAsked(fitter) });
    await fitting;
    expect(store.getState().session).toBe(before);
    expect(store.getState().messages[0]?.text).toBe("the fit of one.csv was cancelled");
  });

  it("that breaks is told as a fault of the program", async () => {
    await startWithFit();
    const fitting = controller.fit();
    fitter.answer({ type: "fault", id: lastAsked(fitter), message: "broken promise", stack: "" });
    await fitting;
    expect(store.getState().messages[0]).toMatchObject({ grave: true });
    expect(store.getState().job).toBeNull();
  });
});

describe("spectra drawn anew", () => {
  const WANTED = { resample: "residual", resamples: 50, seed: 3 } as const;

  it("are asked for with their choices, which are kept with the fit as one step", async () => {
    await startWithFit();
    const steps = store.temporal.getState().pastStates.length;
    const drawing = controller.drawAnew(WANTED);
    const asked = fitter.asked.at(-1)!;
    expect(asked.type === "analyse" && asked.request.choices).toMatchObject({ uncertainty: WANTED });
    expect(currentChoices(store.getState()).uncertainty).toBeUndefined();
    fitter.answer({ type: "analysed", id: asked.id, analysed: sampleAnalysed() });
    await drawing;
    expect(currentChoices(store.getState()).uncertainty).toEqual(WANTED);
    expect(fitIsOld(store.getState())).toBe(false);
    // Derived: one press, one step
    expect(store.temporal.getState().pastStates.length).toBe(steps + 1);
    controller.undo();
    expect(currentChoices(store.getState()).uncertainty).toBeUndefined();
    expect(fitIsOld(store.getState())).toBe(false);
  });

  it("do not undo what was chosen meanwhile", async () => {
    await startWithFit();
    const drawing = controller.drawAnew(WANTED);
    controller.change({ lines: { asymmetry: "zero" } }, "asymmetry zero");
    fitter.answer({ type: "analysed", id: lastAsked(fitter), analysed: sampleAnalysed() });
    await drawing;
    expect(currentChoices(store.getState())).toMatchObject({
      lines: { asymmetry: "zero" },
      uncertainty: WANTED,
    });
    expect(fitIsOld(store.getState())).toBe(true);
  });

  it("that are cancelled leave fit and choices as they were", async () => {
    await startWithFit();
    const before = store.getState().session;
    const drawing = controller.drawAnew(WANTED);
    controller.cancel();
    fitter.answer({ type: "cancelled", id: lastAsked(fitter) });
    await drawing;
    expect(store.getState().session).toBe(before);
    expect(store.getState().messages[0]?.text).toContain("the fit before stands");
  });
});

describe("saving", () => {
  it("writes the result, and the protocol that repeats it", async () => {
    await startWithFit();
    await controller.saveFit("result");
    await controller.saveFit("protocol");
    expect(saved.map((file) => file.name)).toEqual(["one.json", "one.protocol.json"]);
    expect(JSON.parse(saved[0]!.text)).toMatchObject({ schema: "rungline-result/1" });
    expect(JSON.parse(saved[1]!.text)).toMatchObject({ schema: "rungline-protocol/1" });
  });
});

describe("a power series", () => {
  it("of the demo is opened with its choices and fitted at once, as one step of undo each", async () => {
    await startWithFit();
    const opening = controller.openDemoSeries();
    await settle();
    expect(store.getState().stage).toBe("power");
    const asked = fitter.asked.at(-1)!;
    expect(asked.type).toBe("analyse-power");
    if (asked.type !== "analyse-power") return;
    expect(asked.request.files.map(({ file }) => file)).toEqual(["series.csv"]);
    expect(asked.request.choices).toMatchObject({ power: { excitation: "separate-pump" } });
    fitter.answer({ type: "progress", id: asked.id, fraction: 0.5, step: "fitting together" });
    expect(store.getState().job).toMatchObject({ what: "power", fraction: 0.5 });
    fitter.answer({ type: "analysed-power", id: asked.id, analysed: samplePower() });
    await opening;
    expect(currentPower(store.getState())!.fileIds).toEqual(["series.csv"]);
    expect(powerIsOld(store.getState())).toBe(false);
    controller.change({ power: { spot_diameter_um: 20 } }, "spot 20 µm");
    expect(powerIsOld(store.getState())).toBe(true);
    await controller.saveFit("result");
    expect(saved.at(-1)!.name).toBe("series.power.json");
    for (let step = 0; step < 3; step++) controller.undo();
    expect(store.getState().session.files.map(({ name }) => name)).toEqual(["one.csv", "two.csv"]);
  });

  it("of marked files is sent whole, and a refusal is kept beside it", async () => {
    await startWithFit();
    controller.markSeries(["one.csv", "two.csv"]);
    const fitting = controller.fitPower();
    const asked = fitter.asked.at(-1)!;
    if (asked.type !== "analyse-power") throw new Error("a series must be asked for");
    expect(asked.request.files.map(({ file }) => file)).toEqual(["one.csv", "two.csv"]);
    fitter.answer({ type: "refused", id: asked.id, wordings: [{ message: "no power", remedy: "type it" }] });
    await fitting;
    expect(store.getState().powerRefusals["one.csv"]).toEqual([{ message: "no power", remedy: "type it" }]);
    controller.close("two.csv");
    expect(currentSeries(store.getState())).toEqual([]);
  });
});
