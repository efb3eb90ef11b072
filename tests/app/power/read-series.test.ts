import { describe, expect, it, test } from "vitest";
import { NO_WATCH } from "../../../app/base/index.ts";
import {
  powerByPattern,
  powerInFileName,
  powerInText,
  readPowerSeries,
  wordPowerSeriesIssue,
  type SeriesFile,
} from "../../../app/power/index.ts";
import { resolveProtocol, type Protocol } from "../../../app/protocol/index.ts";

const encode = (lines: readonly string[]): Uint8Array => new TextEncoder().encode([...lines, ""].join("\n"));

/** Rows of a plain table: energies and as many columns of transmission; `from` moves the window. */
function rows(columns: number, from = 2.15): string[] {
  return Array.from({ length: 40 }, (_, i) =>
    [
      (from + 0.0005 * i).toFixed(5),
      ...Array.from({ length: columns }, (_, j) => (0.5 + 0.01 * j + 0.001 * ((7 * i) % 11)).toFixed(4)),
    ].join(","),
  );
}

const file = (name: string, head: readonly string[], columns = 1, from = 2.15): SeriesFile => ({
  file: name,
  bytes: encode([...head, ...rows(columns, from)]),
});

function protocol(choices: unknown = {}): Protocol {
  const resolved = resolveProtocol(choices);
  if (!resolved.ok) throw new Error(JSON.stringify(resolved.issues));
  return resolved.value;
}

function read(files: readonly SeriesFile[], choices: unknown = {}): ReturnType<typeof readPowerSeries> {
  return readPowerSeries(files, protocol(choices), NO_WATCH);
}

function powersOf(files: readonly SeriesFile[], choices: unknown = {}): [number, string][] {
  const series = read(files, choices);
  if (!series.ok) throw new Error(JSON.stringify(series.issues));
  return series.value.members.map((member) => [member.power_uW, member.power_from]);
}

const HEAD = "Energy (eV),T";

describe("a power in words", () => {
  test.each([
    ["5 uW", 5],
    ["0.1 mW", 100],
    ["P = 20 µW", 20],
    ["20µW", 20],
    ["20\u03bcW", 20],
    ["T (0,5 µW)", 0.5],
    ["alpha 250 nW (1/cm)", 0.25],
    ["T_1.5mW", 1500],
    ["pump off", 0],
    ["-3 uW", -3],
  ])("%s is %d uW", (text, power) => {
    // Derived: the number times its prefix.
    expect(powerInText(text, null)?.power_uW).toBe(power);
  });

  test.each(["Transmission", "Energy (eV)", "5 K", "Power (uW)", "20 uW/cm2", "W2", "MW"])(
    "%s is none",
    (text) => {
      expect(powerInText(text, null)).toBeNull();
    },
  );

  test.each([
    ["TH-A1_5uW.csv", 5],
    ["run-20uW-a.txt", 20],
    ["0p5mW.dat", 500],
    ["crystal3 12.5 uW.csv", 12.5],
    ["A1_pump_off.csv", 0],
  ])("the file name %s says %d uW", (name, power) => {
    // Derived: as written.
    expect(powerInFileName(name)?.power_uW).toBe(power);
  });

  it("is found in a file name by a pattern, with the unit of the protocol where it has none", () => {
    // Derived: as written.
    expect(powerByPattern("run_0p25_a.csv", "run_{power}_*", "mW")?.power_uW).toBe(250);
    expect(powerByPattern("other_0p25.csv", "run_{power}_*", "mW")).toBeNull();
  });
});

describe("a power series", () => {
  it("is read from columns of one file, ascending, whatever their order", () => {
    const one = file("a.csv", ["Energy (eV),0.1 mW,5 uW,P = 20 µW"], 3);
    expect(powersOf([one])).toEqual([
      [5, "column header"],
      [20, "column header"],
      [100, "column header"],
    ]);
  });

  it("takes the standard deviations beside their columns", () => {
    const one = file("a.csv", ["Energy (eV),T 5 uW,sigma 5 uW,T 10 uW,sigma 10 uW"], 4);
    const series = read([one]);
    if (!series.ok) throw new Error("not read");
    const sigmas = series.value.members.map(
      ({ spectrum }) => spectrum.columns.find((column) => column.role === "sigma")?.column,
    );
    expect(sigmas).toEqual([3, 5]);
  });

  it("is read from several files by header lines and by names, repeats in their order", () => {
    const files = [
      file("x.csv", ["# Power: 0.02 mW", HEAD]),
      file("b_3uW.csv", [HEAD]),
      file("c_3uW.csv", [HEAD]),
    ];
    const series = read(files);
    if (!series.ok) throw new Error("not read");
    expect(series.value.members.map(({ label, power_uW }) => [label, power_uW])).toEqual([
      ["b_3uW.csv", 3],
      ["c_3uW.csv", 3],
      ["x.csv", 20],
    ]);
  });

  it("takes powers that are typed in before all others, and says where their number is wrong", () => {
    const one = file("a.csv", ["Energy (eV),T a,T b,T c"], 3);
    expect(powersOf([one], { power: { values_uW: [9, 0, 4] } })).toEqual([
      [0, "typed in"],
      [4, "typed in"],
      [9, "typed in"],
    ]);
    const wrong = read([one], { power: { values_uW: [1, 2] } });
    expect(wrong.ok ? null : wrong.issues).toMatchObject([
      { code: "power-series/values-count", facts: { found: 2, expected: 3 } },
    ]);
  });

  it("takes a column called dark for the spectrum without light, with a note", () => {
    const series = read([file("a.csv", ["Energy (eV),dark,5 uW"], 2)]);
    if (!series.ok) throw new Error("not read");
    expect(series.value.members[0]!.power_uW).toBe(0);
    expect(series.value.notes.map((note) => note.code)).toContain("dark-is-zero-power");
  });

  it("names what cannot take part and finishes the rest: no power, a negative one, a broken file", () => {
    const files = [
      file("a_1uW.csv", [HEAD]),
      file("nothing.csv", [HEAD]),
      file("minus.csv", ["# Power: -2 uW", HEAD]),
      { file: "broken_4uW.csv", bytes: encode(["no table at all"]) },
      file("db.csv", ["# Power: 3 dBm", HEAD]),
      file("b_8uW.csv", [HEAD]),
    ];
    const series = read(files);
    if (!series.ok) throw new Error("not read");
    expect(series.value.members.map((member) => member.power_uW)).toEqual([1, 8]);
    const failed = series.value.failed.map(({ label, issues }) => [label, issues[0]!.code]);
    expect(failed).toContainEqual(["nothing.csv", "power-series/no-power"]);
    expect(failed).toContainEqual(["minus.csv", "power-series/negative-power"]);
    expect(failed).toContainEqual(["db.csv", "power-series/unknown-unit"]);
    expect(failed.find(([label]) => label === "broken_4uW.csv")?.[1]).toMatch(/^table\//);
  });

  it("is none with one power, and the message names file and remedy", () => {
    const series = read([file("a_1uW.csv", [HEAD])]);
    const issue = series.ok ? null : series.issues[0]!;
    expect(issue?.code).toBe("power-series/too-few-powers");
    const { message, remedy } = wordPowerSeriesIssue(issue as never);
    expect(message).toContain("a_1uW.csv");
    expect(remedy).toContain("rungline fit");
  });

  it("notes windows that hardly overlap, another sample, and sources that disagree", () => {
    const series = read([
      file("a_1uW.csv", ["# Sample: one", "# Power: 1 uW", HEAD]),
      file("b_5uW.csv", ["# Sample: two", "# Power: 2 uW", HEAD], 1, 2.165),
    ]);
    if (!series.ok) throw new Error("not read");
    expect(series.value.notes.map((note) => note.code)).toEqual(
      expect.arrayContaining(["power-ranges-differ", "power-sample-differs", "power-sources-disagree"]),
    );
    // Derived: the header line stands before the file name.
    expect(series.value.members[1]!.power_uW).toBe(2);
  });
});
