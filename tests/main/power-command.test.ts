import { readdir, readFile, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { afterEach, describe, expect, it } from "vitest";
import type { RunglineResult } from "../../app/protocol/index.ts";
import { makePowerSeries, SERIES, singleFile } from "../support/make-power-series.ts";
import { makeBench, type Bench } from "./command-line-bench.ts";

const SMALL = { ...SERIES, points: 2600, powers_uW: [0.1, 20, 60], sigma: 4 };
const curves = makePowerSeries(SMALL);
const CHOICES = [
  "--material",
  "cuprous-oxide-yellow-p",
  "--set",
  "uncertainty.systematic=false",
  "--set",
  "uncertainty.profile=false",
  "--set",
  "power.draws=300",
];

let bench: Bench | null = null;
afterEach(async () => {
  await bench?.remove();
  bench = null;
});

async function withFiles(): Promise<Bench> {
  bench = await makeBench();
  for (const [a, power] of SMALL.powers_uW.entries())
    await writeFile(join(bench.folder, `s_${power}uW.csv`), singleFile(curves, a));
  return bench;
}

describe("rungline power", () => {
  it("writes one result for several files and its protocol beside it, and repeats from that to the last bit", async () => {
    const { run, folder } = await withFiles();
    const files = SMALL.powers_uW.map((power) => `s_${power}uW.csv`);
    const first = await run("power", ...files, ...CHOICES, "--curves", "--out", "series.json");
    expect(first.status).toBe(0);
    expect(first.out).toBe("");
    expect(first.error).toContain("3 powers");
    const read = async (name: string): Promise<RunglineResult> =>
      JSON.parse(await readFile(join(folder, name), "utf8")) as RunglineResult;
    const again = await run("power", ...files, "--protocol", "series.protocol.json", "--out", "again.json");
    expect(again.status).toBe(0);
    const { run: _, ...one } = await read("series.json");
    const { run: __, ...other } = await read("again.json");
    expect(JSON.stringify(other)).toBe(JSON.stringify(one));
    // The curves lie beside the result, where the report finds them.
    expect((await run("report", "series.json", "--figures", "f")).error).toBe("");
    expect(await readdir(join(folder, "f"))).toEqual(
      expect.arrayContaining(["series-spectra-by-power.svg", "series-spectrum.svg"]),
    );
  });

  it("takes a folder, names a broken file and one without a power, finishes the rest with status 3", async () => {
    const { run, folder } = await withFiles();
    await writeFile(join(folder, "broken_40uW.csv"), "this is no table");
    await writeFile(join(folder, "nameless.csv"), singleFile(curves, 0));
    const { status, out, error } = await run("power", folder, ...CHOICES);
    expect(status).toBe(3);
    expect(out).toContain("Power series: 3 spectra");
    expect(error).toContain("broken_40uW.csv");
    expect(error).toContain("nameless.csv: at which power");
    expect(error).toContain("power.file_pattern");
  });

  it("refuses what cannot be: a spot of zero (2), one power alone (3), a file that is not there (3)", async () => {
    const { run } = await withFiles();
    const spot = await run("power", "s_20uW.csv", "--set", "power.spot_diameter_um=0");
    expect(spot.status).toBe(2);
    expect(spot.error).toContain("power.spot_diameter_um");
    const alone = await run("power", "s_20uW.csv");
    expect(alone.status).toBe(3);
    expect(alone.error).toContain("rungline fit");
    const missing = await run("power", "not_there_3uW.csv");
    expect(missing.status).toBe(3);
    expect(missing.error).toContain("not_there_3uW.csv");
  });

  it("sets a control series beside: a pump that bleaches a fifth as much says so in the evidence", async () => {
    const { run, folder } = await withFiles();
    const weak = { ...SMALL, saturation10_per_uW: SMALL.saturation10_per_uW / 5, seed: 12 };
    const control = makePowerSeries(weak);
    for (const [a, power] of weak.powers_uW.entries())
      await writeFile(join(folder, `beside_${power}uW.csv`), singleFile(control, a));
    const files = SMALL.powers_uW.map((power) => `s_${power}uW.csv`);
    const { status, out } = await run(
      "power",
      ...files,
      "--control",
      "beside_*.csv",
      ...CHOICES,
      "--format",
      "json",
    );
    expect(status).toBe(0);
    const { power, notes } = JSON.parse(out) as RunglineResult;
    const row = power!.other.plasma.find(({ evidence }) => evidence.includes("control"))!;
    // Derived: every S of the control is a fifth; the highest lines, which weigh most, have it to a few percent.
    expect(row.value!).toBeGreaterThan(0.1);
    expect(row.value!).toBeLessThan(0.3);
    expect(row.speaks).toContain("needs excitons of these lines");
    expect(power!.fit!.control!.map(({ power_uW }) => power_uW)).toEqual(weak.powers_uW);
    expect(notes.find(({ code }) => code === "plasma-not-excluded")!.text).toContain("control series");
    const missing = await run("power", ...files, "--control", "not_there.csv", ...CHOICES);
    expect(missing.status).toBe(3);
    expect(missing.error).toContain("not_there.csv");
  });
});
