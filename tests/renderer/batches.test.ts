import { describe, expect, it } from "vitest";
import { batchLook } from "../../renderer/batches/batch-look.ts";
import { batchesFigure } from "../../renderer/batches/batches-figure.ts";
import { batchesLedger, measuredText, verdict } from "../../renderer/batches/batches-ledger.ts";
import { batchesOf, gather, unfittedFiles } from "../../renderer/store/gather.ts";
import { PALETTES } from "../../renderer/plot/colours.ts";
import { recorded, recordInput } from "../../renderer/record/record-input.ts";
import { addResults, editChoices, editCompare, removeResult } from "../../renderer/store/session.ts";
import { recordFigures, recordFiles, type RecordPart } from "../../app/tasks/index.ts";
import { CRYSTALS, crystalComparison, crystalResult, crystalSession } from "./batches-sample.ts";

const session = crystalSession();
const shownIn = (one: typeof session): string[] =>
  gather(one).flatMap(({ shown, named }) => (shown ? [named.sample] : []));

describe("samples side by side", () => {
  it("are all fits of the session by the names of their headers", () => {
    expect(shownIn(session)).toEqual(["P1", "P2", "P3", "Q1", "Q2"]);
    expect(batchesOf(gather(session))).toEqual(["P", "Q"]);
    expect(gather(session)).toBe(gather(session));
  });

  it("are left out by batch, temperature and date, bounds included", () => {
    const filtered = (change: Parameters<typeof editCompare>[1]): string[] =>
      shownIn(editCompare(session, change, "filter"));
    expect(filtered({ hidden: ["P"] })).toEqual(["Q1", "Q2"]);
    expect(filtered({ temperature: [1.8, null] })).toEqual(["P3", "Q1", "Q2"]);
    expect(filtered({ temperature: [null, 1.4] })).toEqual(["P1", "P2"]);
    expect(filtered({ date: ["2025-03-12", "2025-05-06"] })).toEqual(["P2", "P3", "Q1"]);
  });

  it("belong to the batch that was typed over their header", () => {
    const typed = editCompare(
      session,
      { choices: { values: [{ of: "P3.csv", facts: { batch: "Q" } }] } },
      "batch of P3",
    );
    expect(gather(typed).map(({ named }) => named.batch)).toEqual(["P", "P", "Q", "Q", "Q"]);
  });

  it("stand beside results that came alone, each once", () => {
    const result = crystalResult({ ...CRYSTALS[0]!, sample: "R1", batch: "R" });
    const more = addResults(session, "R1.json", [result, result]);
    expect(shownIn(more)).toEqual(["P1", "P2", "P3", "Q1", "Q2", "R1"]);
    expect(addResults(more, "again.json", [result])).toBe(more);
    expect(removeResult(more, "R1.json").results).toEqual([]);
    // The fit of the file itself goes before the same result as a file.
    const twice = addResults(session, "P1.json", [crystalResult(CRYSTALS[0]!)]);
    expect(recorded(twice)).toHaveLength(5);
  });

  it("whose choices changed wait for the next fit of all", () => {
    const edited = editChoices({ ...session, currentId: "P2.csv" }, { window_eV: [2, 3] }, "window");
    expect(unfittedFiles(session)).toEqual([]);
    expect(unfittedFiles(edited)).toEqual(["P2.csv"]);
    expect(gather(edited).filter(({ old }) => old)).toHaveLength(1);
  });
});

describe("the figure of the batches", () => {
  const comparison = crystalComparison();
  const figure = batchesFigure(comparison, ["P", "Q"], PALETTES.light, "main", "gap_eV");
  const errors = (name: string): readonly number[] =>
    (figure.data.find((trace) => trace.name === name)!["error_x"] as { array: number[] }).array;

  it("shows the statistical part and the total apart", () => {
    // Derived: 4 µeV of the sample's fits
    expect(errors("P")[0]).toBeCloseTo(4, 9);
    // Derived: 3-4-5 triangle with 3 µeV systematic
    expect(errors("P total")[0]).toBeCloseTo(5, 9);
  });

  it("gives each batch a colour and a mark of its own, kept when another is left out", () => {
    const looks = Array.from({ length: 8 }, (_, i) => batchLook(i, "light"));
    expect(new Set(looks.map(({ colour }) => colour)).size).toBe(8);
    expect(new Set(looks.map(({ mark }) => mark)).size).toBe(8);
    expect(batchLook(8, "light")).not.toEqual(looks[0]);
    const alone = { ...comparison, samples: comparison.samples.filter(({ batch }) => batch === "Q") };
    const filtered = batchesFigure(alone, ["P", "Q"], PALETTES.light, "main", "gap_eV");
    const marker = filtered.data.find((trace) => trace.name === "Q")!["marker"] as { color: string };
    expect(marker.color).toBe(looks[1]!.colour);
  });

  it("leaves out what was not determined and lets a mark name its sample", () => {
    const floors = figure.data.filter((trace) => trace.name === "Q" && trace["xaxis"] === "x4");
    expect(floors).toHaveLength(1);
    expect(floors[0]!["customdata"]).toEqual([3]);
  });

  it("draws widths and strengths of all samples in one picture", () => {
    const lines = batchesFigure(comparison, ["P", "Q"], PALETTES.dark, "lines", "gap_eV");
    // Derived: five samples, a line and its marks, in two plots
    expect(lines.data).toHaveLength(20);
    expect(lines.summary).toBe("5 samples of 2 batches side by side");
  });

  it("adds the trend of one parameter where one is asked for", () => {
    const along = crystalComparison({ against: "temperature" });
    const drawn = batchesFigure(along, ["P", "Q"], PALETTES.light, "one", "gap_eV");
    expect(drawn.data.some(({ meta }) => meta.part === "trend")).toBe(true);
    expect((drawn.layout["xaxis2"] as { title: { text: string } }).title.text).toBe("temperature / K");
  });
});

describe("the ledger of the batches", () => {
  const comparison = crystalComparison();

  it("says a difference that is seen", () => {
    const gap = batchesLedger(comparison, null)[0]!;
    expect(gap.title).toBe("Gap");
    expect(gap.remark).toMatch(/^a difference is seen, p [=<]/);
    const pair = gap.entries.find(({ id }) => id === "batches-gap_eV-pair-P-Q")!;
    // Derived: (150 + 154)/2 - (50 + 53 + 48)/3
    expect(pair.quantity.value! * pair.scale).toBeCloseTo(101.67, 1);
    expect(pair.unit).toBe("µeV");
  });

  it("never says no difference without the size that would have been seen", () => {
    const defect = comparison.parameters.find(({ name }) => name === "defect0")!;
    expect(verdict(defect)).toMatch(/^no difference seen; one of 0\.\d+ would have been$/);
  });

  it("holds scatter, batches and all pairs of one parameter, and shifts against a reference", () => {
    const sections = batchesLedger(crystalComparison({ reference: "P" }), "gap_eV");
    expect(sections.map(({ title }) => title)).toEqual(["Gap", "Batches", "Differences", "Against P"]);
    expect(sections[0]!.remark).toMatch(/^Q = .+ Birge ratio/);
  });

  it("writes statistical and systematic part in the last place of the value", () => {
    // Derived: 4 and 3 in the last place; two digits of an error that begins below 3.55
    expect(measuredText({ value: 2.172053, statistical: 4e-6, systematic: 3e-6 }, 1)).toBe(
      "2.172\u2009053(4)(3)",
    );
    expect(measuredText({ value: 0.21, statistical: 0.002, systematic: 1e-5 }, 1)).toBe("0.2100(20)(<1)");
    expect(measuredText({ value: null, statistical: null, systematic: null }, 1)).toBe("not determined");
  });
});

describe("the record", () => {
  const run = { version: "1.2.3", node: "v20", started: "2026-01-02T03:04:05Z" };
  const comparison = crystalComparison();

  it("is about all samples that are shown with their comparison, or about one", () => {
    const all = recordInput(session, comparison, null);
    expect(all.results).toHaveLength(5);
    expect(all.curves.every((curves) => curves !== null)).toBe(true);
    expect(all.comparison).toBe(comparison);
    const one = recordInput(session, comparison, "Q1.csv");
    expect(one.results.map(({ source }) => source.file)).toEqual(["Q1.csv"]);
    expect(one.comparison).toBeNull();
  });

  it("is kept in files named after their input, one protocol for all where it is the same", () => {
    const names = (input: Parameters<typeof recordFiles>[0], part: RecordPart): string[] =>
      recordFiles(input, part).files.map(({ name }) => name);
    const one = { ...recordInput(session, null, "Q1.csv"), run };
    expect(names(one, "report")).toEqual(["Q1.report.html"]);
    expect(names(one, "protocol")).toEqual(["Q1.protocol.json"]);
    expect(names(one, "latex")).toEqual(["Q1.tables.tex"]);
    const all = { ...recordInput(session, comparison, null), run };
    expect(names(all, "protocol")).toEqual(["rungline.protocol.json"]);
    expect(names(all, "results")).toEqual(["rungline.results.json"]);
    expect(recordFiles(all, "csv").archive).toBe("rungline.tables.zip");
    expect(names(all, "csv")).toEqual(["P1.csv", "P2.csv", "P3.csv", "Q1.csv", "Q2.csv", "comparison.csv"]);
    expect(recordFigures(all).map(({ name }) => name)).toContain("compare-widths");
  });
});
