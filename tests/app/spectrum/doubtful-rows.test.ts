import { describe, expect, it } from "vitest";
import { wordSpectrumIssue } from "../../../app/spectrum/index.ts";
import { codes, depthAt, ENERGIES, fileText, issueOf, rowsOf, spectrumOf } from "./make-file.ts";

const HEADER = ["Energy (eV)", "T"];
const eV = (E: number): number => E;
const T = (E: number): number => Math.exp(-depthAt(E));
const rows = (): string[][] => rowsOf([eV, (E, noise) => T(E) + 0.001 * noise()]);
const text = (lines: readonly (readonly string[])[]): string => fileText(HEADER, lines);
const note = (spectrum: ReturnType<typeof spectrumOf>, code: string): string =>
  spectrum.notes.find((one) => one.code === code)?.text ?? "";

describe("several measurements in one file", () => {
  const joined = (first: string, second: string): string =>
    fileText(HEADER, rows(), [first]) + fileText(HEADER, rows(), [second]);

  it("another power before a second sweep is refused with both lines", () => {
    const issue = issueOf(joined("# Power: 10 uW", "# Power: 1000 uW"));
    expect(issue.code).toBe("spectrum/several-measurements");
    // Derived: a fact, a heading, 161 rows, then the second fact
    expect(issue.facts).toMatchObject({ first_line: 1, line: 164, key: "power" });
    expect(wordSpectrumIssue(issue).remedy).toContain("split the file");
  });

  it("a temperature that drifts by less than a twentieth is the same measurement, and the averaging is said", () => {
    const spectrum = spectrumOf(joined("# Temperature: 1.40 K", "# Temperature: 1.42 K"));
    expect(note(spectrum, "axis-not-monotonic")).toContain(
      "161 energies that occur more than once are averaged",
    );
    expect(codes(spectrum)).not.toContain("header-facts-differ");
  });

  it("another temperature below the last row of one sweep is a doubt", () => {
    const spectrum = spectrumOf(`# Temperature: 4 K\n${text(rows())}# Temperature: 12 K\n`);
    expect(note(spectrum, "header-facts-differ")).toContain('line 1 says "Temperature: 4 K"');
  });
});

describe("lines that look like rows and were not read", () => {
  it("a change of the decimal mark in the middle is a doubt with the first line and its text", () => {
    const lines = rows().map((row, i) => (i < 100 ? row : row.map((cell) => cell.replace(".", ","))));
    const spectrum = spectrumOf(fileText(HEADER, lines, [], "\t").replaceAll('"', ""));
    const words = note(spectrum, "rows-not-read");
    // Derived: 161 rows of which 100 have a point; a heading stands above
    expect(words).toContain("61 of 161 lines that look like rows were not read (61 of them together)");
    expect(words).toContain(`line 102: "${lines[100]!.join(" ")}"`);
  });

  it("one bad line among many is none", () => {
    const lines = rows();
    lines[50] = ["2.1x", "oops"];
    expect(codes(spectrumOf(text(lines)))).not.toContain("rows-not-read");
  });

  it("a row without a number in the signal is named with what stands there", () => {
    const lines = rows();
    lines[50] = [lines[50]![0]!, "0.5x"];
    expect(note(spectrumOf(text(lines)), "cells-missing")).toContain('column 2 of line 52 holds "0.5x"');
  });
});

describe("a row whose energy is out of order", () => {
  it("is left out and named with its line, and the sweep counts as one", () => {
    const lines = rows();
    lines[80] = ["21.40", lines[80]![1]!];
    const spectrum = spectrumOf(text(lines));
    expect(note(spectrum, "axis-row-out-of-order")).toContain("line 82 gives 21.4 eV");
    expect(codes(spectrum)).not.toContain("axis-not-monotonic");
    expect(spectrum.energy_eV.length).toBe(ENERGIES.length - 1);
  });

  it("a sweep up and down keeps all its rows", () => {
    const up = rows();
    const shifted = [...rows()].reverse().map(([E, value]) => [String(Number(E) + 1e-4), value!]);
    const spectrum = spectrumOf(text([...up, ...shifted]));
    expect(spectrum.energy_eV.length).toBe(2 * ENERGIES.length);
    expect(codes(spectrum)).toContain("axis-not-monotonic");
  });
});

describe("energies where no edge lies", () => {
  const wavelengths = rowsOf([(E) => 1239.84 / E, T]);

  it("nanometres under a heading in eV are refused and named", () => {
    const issue = issueOf(text(wavelengths));
    expect(issue.code).toBe("spectrum/implausible-energy");
    expect(issue.facts["suggestion"]).toBe("nm");
    expect(wordSpectrumIssue(issue).remedy).toContain("axis.unit=nm");
  });

  it("the protocol's word is taken, with a doubt", () => {
    const spectrum = spectrumOf(text(wavelengths), { axis: { unit: "eV" } });
    expect(note(spectrum, "energy-implausible")).toContain("as nm the same numbers are 2.1");
  });
});

describe("what the header says is not contradicted", () => {
  const withFacts = (...facts: string[]): ReturnType<typeof spectrumOf> =>
    spectrumOf(fileText(HEADER, rows(), facts));

  it("reflection losses that the instrument corrected are not said to stand in the background", () => {
    const corrected = withFacts("# Reflection losses: corrected by the instrument");
    expect(codes(corrected)).toContain("surface-corrected-by-header");
    expect(codes(corrected)).not.toContain("surface-not-corrected");
    expect(codes(withFacts("# Reflection losses: not corrected"))).toContain("surface-not-corrected");
  });

  it("a thickness without an error is said to be taken as exact, with half of its last digit", () => {
    const spectrum = withFacts("# Thickness: 0.34 mm");
    const exact = spectrum.notes.find(({ code }) => code === "thickness-exact")!;
    // Derived: half of a hundredth of a millimetre is 5 µm
    expect(exact.remedy).toContain("half of the last digit is 5)");
    const known = { signal: { thickness_sigma_um: 3 } };
    expect(codes(spectrumOf(fileText(HEADER, rows(), ["# Thickness: 0.34 mm"]), known))).not.toContain(
      "thickness-exact",
    );
  });
});
