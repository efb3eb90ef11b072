import { describe, expect, it } from "vitest";
import {
  addFiles,
  editChoices,
  EMPTY_SESSION,
  keepPower,
  markSeries,
  partSeries,
  removeFile,
  seriesOf,
} from "../../renderer/store/session.ts";
import { samplePower } from "./power-sample.ts";

const named = (name: string): { name: string; bytes: Uint8Array } => ({ name, bytes: new Uint8Array(1) });
const three = addFiles(EMPTY_SESSION, ["a.csv", "b.csv", "c.csv"].map(named), { window_eV: [2, 3] });

describe("files marked as one power series", () => {
  it("stand in the order of the drawer and share the choices of the first", () => {
    const other = editChoices({ ...three, currentId: "c.csv" }, { window_eV: [1, 2] }, "window");
    const marked = markSeries(other, ["c.csv", "a.csv"]);
    expect(seriesOf(marked, "c.csv")).toEqual(["a.csv", "c.csv"]);
    expect(marked.choices["c.csv"]).toEqual({ window_eV: [2, 3] });
    expect(marked.choices["b.csv"]).toEqual({ window_eV: [2, 3] });
    const edited = editChoices(marked, { power: { spot_diameter_um: 12 } }, "spot");
    expect(edited.choices["c.csv"]).toBe(edited.choices["a.csv"]);
    expect(edited.choices["b.csv"]).not.toBe(edited.choices["a.csv"]);
  });

  it("stand in one series at most", () => {
    const first = markSeries(three, ["a.csv", "b.csv"]);
    const second = markSeries(first, ["b.csv", "c.csv"]);
    expect(second.series).toEqual([["b.csv", "c.csv"]]);
    expect(seriesOf(second, "a.csv")).toEqual(["a.csv"]);
  });

  it("are parted, and a series of one left over is none", () => {
    const marked = markSeries(three, ["a.csv", "b.csv"]);
    expect(partSeries(marked, "b.csv").series).toEqual([]);
    expect(removeFile(marked, "a.csv").series).toEqual([]);
    expect(markSeries(three, ["a.csv"])).toBe(three);
  });

  it("keep their fit under the first file, and lose it with that file", () => {
    const marked = markSeries(three, ["a.csv", "b.csv"]);
    const fitted = keepPower(marked, "a.csv", {
      analysed: samplePower(),
      choices: {},
      fileIds: ["a.csv", "b.csv"],
    });
    expect(Object.keys(fitted.powerFits)).toEqual(["a.csv"]);
    expect(removeFile(fitted, "a.csv").powerFits).toEqual({});
  });
});
