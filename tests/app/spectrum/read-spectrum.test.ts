import { describe, expect, it } from "vitest";
import { HC_EV_NM, reflectance, depthFromTransmittance } from "../../../app/units/index.ts";
import { wordSpectrumIssue } from "../../../app/spectrum/index.ts";
import {
  codes,
  depthAt,
  ENERGIES,
  fileText,
  issueOf,
  type read,
  roleColumn,
  rowsOf,
  spectrumOf,
} from "./make-file.ts";

const eV = (E: number): number => E;
const T = (E: number): number => Math.exp(-depthAt(E));
const note = (spectrum: ReturnType<typeof spectrumOf>, code: string): string =>
  spectrum.notes.find((one) => one.code === code)?.text ?? "";

describe("a clean file of alpha", () => {
  const spectrum = spectrumOf(
    fileText(["Energy (eV)", "alpha (1/cm)"], rowsOf([eV, (E, noise) => 100 * depthAt(E) + 0.2 * noise()]), [
      "# Sample: K-17",
      "# Temperature: 1.4 K",
    ]),
  );

  it("is the signal in 1/cm, ascending, every point used", () => {
    expect(spectrum.unit).toBe("1/cm");
    expect(spectrum.energy_eV.length).toBe(161);
    expect(spectrum.energy_eV.every((E, i) => i === 0 || E > spectrum.energy_eV[i - 1]!)).toBe(true);
    expect(spectrum.used.every((flag) => flag === 1)).toBe(true);
    expect(spectrum.transmittance).toBeNull();
  });

  it("has its noise estimated, and says so", () => {
    expect(spectrum.noise.source).toBe("estimated");
    // Derived: made with sigma 0.2; 161 points give a standard error of about 10 %
    expect(Math.abs(spectrum.noise.medianSigma / 0.2 - 1)).toBeLessThan(0.35);
    expect(codes(spectrum)).toEqual(["energy-may-come-from-air", "noise-estimated"]);
  });

  it("carries the facts, the dialect and a reason for each column", () => {
    expect(spectrum.facts.map((fact) => fact.key)).toEqual(["sample", "temperature"]);
    expect(spectrum.dialect["delimiter"]).toBe(",");
    expect(spectrum.columns.every((column) => column.reason.length > 10)).toBe(true);
    expect(spectrum.skippedRows).toBe(0);
  });

  it("is the same when read again, and survives a copy as plain data", () => {
    const again = structuredClone(spectrum);
    expect(again).toEqual(spectrum);
  });
});

describe("order of the light axis", () => {
  const row = ([E, a]: readonly [number, number]): string => `${E.toFixed(6)},${a.toFixed(6)}`;
  const pairs = ENERGIES.map((E) => [E, 100 * depthAt(E)] as const);
  const text = (rows: readonly (readonly [number, number])[]): string =>
    `Energy (eV),alpha (1/cm)\n${rows.map(row).join("\n")}\n`;
  const forward = spectrumOf(text(pairs));

  it("does not change the spectrum: descending rows give the same, said in the reason", () => {
    const backward = spectrumOf(text(pairs.slice().reverse()));
    // Derived: invariance to order
    expect(backward.energy_eV).toEqual(forward.energy_eV);
    expect(backward.signal).toEqual(forward.signal);
    expect(backward.sigma).toEqual(forward.sigma);
    expect(backward.columns[0]!.reason).toContain("descending");
  });

  it("repeated places are averaged, counted and located", () => {
    const rows = pairs.flatMap((pair, i) =>
      i === 3 || i === 9 ? [pair, [pair[0], pair[1] + 2] as const] : [pair],
    );
    const merged = spectrumOf(text(rows));
    expect(merged.energy_eV).toEqual(forward.energy_eV);
    // Derived: mean of a and a + 2
    expect(merged.signal[3]).toBeCloseTo(pairs[3]![1] + 1, 5);
    expect(note(merged, "repeated-axis-averaged")).toContain("2 places");
    // Derived: rows 4 and 10 of the table, below one header line, plus the extra row before the second
    expect(note(merged, "repeated-axis-averaged")).toContain("lines 5, 12");
    // Derived: the mean of two readings has 1/sqrt(2) of the noise
    expect(merged.sigma[3]! / merged.sigma[4]!).toBeCloseTo(Math.SQRT1_2, 10);
  });

  it("repeated places with standard deviations are weighted by them", () => {
    const lines = pairs.map(([E, a], i) => `${E.toFixed(6)},${a.toFixed(6)},${i === 5 ? 1 : 2}`);
    lines.splice(6, 0, `${pairs[5]![0].toFixed(6)},${(pairs[5]![1] + 10).toFixed(6)},2`);
    const merged = spectrumOf(`Energy (eV),alpha (1/cm),sd\n${lines.join("\n")}\n`);
    // Derived: weights 1 and 1/4: (a + (a + 10)/4)/(5/4) = a + 2, sigma = 1/sqrt(5/4)
    expect(merged.signal[5]).toBeCloseTo(pairs[5]![1] + 2, 5);
    expect(merged.sigma[5]).toBeCloseTo(Math.sqrt(0.8), 12);
  });

  it("up and down sweeps become one curve with a note", () => {
    const swept = spectrumOf(text([...pairs, ...pairs.slice().reverse()]));
    expect(codes(swept)).toEqual(expect.arrayContaining(["axis-not-monotonic", "repeated-axis-averaged"]));
    expect(swept.energy_eV).toEqual(forward.energy_eV);
  });

  it("a row without number is left out, counted and located", () => {
    const lines = text(pairs).split("\n");
    lines[10] = lines[10]!.replace(/,.*/, ",NaN");
    lines[20] = lines[20]!.replace(/,.*/, ",");
    const spectrum = spectrumOf(lines.join("\n"));
    expect(spectrum.energy_eV.length).toBe(159);
    expect(spectrum.skippedRows).toBe(2);
    expect(note(spectrum, "cells-missing")).toContain("lines 11, 21");
  });
});

describe("air and vacuum", () => {
  const nm = (E: number): number => HC_EV_NM / E;
  const text = (header: string, before: readonly string[] = []): string =>
    fileText([header, "alpha (1/cm)"], rowsOf([nm, (E) => 100 * depthAt(E)]), before);

  it("wavelengths are of standard air unless something says otherwise", () => {
    const spectrum = spectrumOf(text("Wavelength (nm)"));
    expect(spectrum.medium).toBe("air");
    expect(codes(spectrum)).toContain("standard-air-assumed");
    // Source: fixtures/reference/air_index.csv, Ciddor at 571 nm 1.00027745; 0.60 meV lower
    expect(1e3 * (ENERGIES[142]! - spectrum.energy_eV[142]!)).toBeCloseTo(0.6023, 3);
  });

  it.each([
    [["# Wavelengths in vacuum"], "Wavelength (nm)"],
    [["# Medium: vacuum"], "Wavelength (nm)"],
    [["# axis calibrated with a wavemeter"], "Wavelength (nm)"],
    [["# Spektrometer: evakuiert"], "Wellenlänge [nm]"],
    [[], "Vacuum wavelength (nm)"],
    [[], "Wavelength (nm, vacuum)"],
  ])("%s %s is read as vacuum", (before, header) => {
    const spectrum = spectrumOf(text(header, before));
    expect(spectrum.medium).toBe("vacuum");
    expect(codes(spectrum)).not.toContain("standard-air-assumed");
    expect(spectrum.energy_eV[0]).toBeCloseTo(2.1, 8);
  });

  it("a sample held in vacuum says nothing about the spectrometer", () => {
    expect(spectrumOf(text("Wavelength (nm)", ["# Sample chamber: vacuum 1e-6 mbar"])).medium).toBe("air");
  });

  it("the choice overrules the file", () => {
    expect(spectrumOf(text("Vacuum wavelength (nm)"), { axis: { medium: "air" } }).medium).toBe("air");
  });

  it("a stated state of the air is used and not called standard", () => {
    const cold = spectrumOf(text("Wavelength (nm)"), { axis: { medium: "air", air: { temperature_C: 25 } } });
    const standard = spectrumOf(text("Wavelength (nm)"), { axis: { medium: "air" } });
    expect(codes(cold)).not.toContain("standard-air-assumed");
    // Derived: 10 K of 2.1 ueV each
    expect(1e6 * (cold.energy_eV[142]! - standard.energy_eV[142]!)).toBeCloseTo(20.3, 0);
  });

  it("energies said to come from air are divided by the index, with a note", () => {
    const file = fileText(["Energy (eV)", "alpha (1/cm)"], rowsOf([eV, (E) => 100 * depthAt(E)]));
    const spectrum = spectrumOf(file, { axis: { medium: "air" } });
    expect(codes(spectrum)).toContain("energy-from-air");
    expect(1e3 * (ENERGIES[142]! - spectrum.energy_eV[142]!)).toBeCloseTo(0.6023, 3);
    // Derived: a choice leaves nothing to assume
    expect(codes(spectrumOf(file, { axis: { medium: "vacuum" } }))).not.toContain("energy-may-come-from-air");
  });
});

describe("transmission", () => {
  const file = (before: readonly string[] = [], noise = 0.002): string =>
    fileText(["Energy (eV)", "T"], rowsOf([eV, (E, draw) => T(E) + noise * draw()]), before);

  it("without thickness is natural optical depth, with notes on thickness and surfaces", () => {
    const spectrum = spectrumOf(file());
    expect(spectrum.unit).toBe("1");
    expect(codes(spectrum)).toEqual(expect.arrayContaining(["thickness-unknown", "surface-not-corrected"]));
    // Derived: -ln T
    expect(spectrum.signal[50]).toBeCloseTo(-Math.log(spectrum.transmittance!.value[50]!), 14);
  });

  it.each([
    ["# Thickness: 34 µm", 34],
    ["# d = 0.034 mm", 34],
    ["# Dicke: 0,034 mm", 34],
    ["# thickness (nm): 34000", 34],
    ["# Épaisseur = 34 um", 34],
  ])("%s gives alpha in 1/cm", (line, um) => {
    const spectrum = spectrumOf(file([line]));
    expect(spectrum.unit).toBe("1/cm");
    expect(codes(spectrum)).toContain("thickness-from-header");
    // Derived: alpha = -ln T/d
    expect(spectrum.signal[50]! * um * 1e-4).toBeCloseTo(-Math.log(spectrum.transmittance!.value[50]!), 12);
    expect(spectrum.transmittance!.thickness_cm).toBeCloseTo(um * 1e-4, 15);
  });

  it("the protocol's thickness overrules the header's", () => {
    const spectrum = spectrumOf(file(["# Thickness: 34 µm"]), { signal: { thickness_um: 17 } });
    expect(spectrum.transmittance!.thickness_cm).toBeCloseTo(17e-4, 15);
    expect(codes(spectrum)).not.toContain("thickness-from-header");
  });

  it.each([
    ["# Slit: 30 µeV", { value: 3e-5, unit: "eV" }],
    ["# Spaltbreite: 0,02 meV", { value: 2e-5, unit: "eV" }],
    ["# Slit (nm): 0.02", { value: 0.02, unit: "nm" }],
    ["# Slit = 0.5 cm-1", { value: 0.5, unit: "cm-1" }],
  ])("%s is the width of the instrument, and said", (line, slit) => {
    const spectrum = spectrumOf(file([line]));
    expect(spectrum.slit).toEqual(slit);
    expect(codes(spectrum)).toContain("slit-from-header");
  });

  it.each(["# Slit: 100 µm", "# Slit width: 0.1 mm", "# Slit: 5"])("%s is no spectral width", (line) => {
    const spectrum = spectrumOf(file([line]));
    expect(spectrum.slit).toBeUndefined();
    expect(codes(spectrum)).toContain("slit-not-taken");
  });

  it("a slit of zero is none, and the protocol's overrules the header's", () => {
    const plain = codes(spectrumOf(file([])));
    expect(codes(spectrumOf(file(["# Slit: 0 ueV"])))).toEqual(plain);
    const lines = { slit_fwhm_eV: 0, slit_fwhm_nm: null, slit_fwhm_cm1: null };
    const overruled = spectrumOf(file(["# Slit: 30 ueV"]), { lines });
    expect(overruled.slit).toBeUndefined();
    expect(codes(overruled)).toEqual(plain);
  });

  it("is corrected for surfaces with a reflectance, an index, or the preset's index (with a note)", () => {
    const R = reflectance(2.95);
    const expected = (spectrum: ReturnType<typeof spectrumOf>): number =>
      depthFromTransmittance(spectrum.transmittance!.value[50]!, R, "all");
    const byR = spectrumOf(file(), { signal: { surface: { model: "all", reflectance: R } } });
    // Derived: the inverse of the plate formula
    expect(byR.signal[50]).toBeCloseTo(expected(byR), 13);
    const byIndex = spectrumOf(file(), { signal: { surface: { model: "all", index: 2.95 } } });
    expect(byIndex.signal).toEqual(byR.signal);
    const byPreset = spectrumOf(file(), {
      signal: { surface: { model: "all" } },
      material: { preset: "cuprous-oxide-yellow-p" },
    });
    expect(byPreset.signal).toEqual(byR.signal);
    expect(codes(byPreset)).toContain("reflectance-assumed");
    expect(issueOf(file(), { signal: { surface: { model: "all" } } }).code).toBe("spectrum/no-reflectance");
  });

  it("noise of the protocol goes through the logarithm with the smoothed T", () => {
    const spectrum = spectrumOf(file(), { noise: { sigma: 0.002 } });
    expect(spectrum.noise.source).toBe("protocol");
    for (const i of [0, 80, 120]) {
      // Derived: sigma = 0.002/T of the noiseless curve; smoothing leaves about a percent
      expect(spectrum.sigma[i]! / (0.002 / T(ENERGIES[i]!))).toBeCloseTo(1, 1);
    }
  });

  it("noise of the protocol is in the unit of the reading: percent for a percent column", () => {
    const text = fileText(["Energy (eV)", "T (%)"], rowsOf([eV, (E, draw) => 100 * T(E) + 0.2 * draw()]));
    const spectrum = spectrumOf(text, { noise: { sigma: 0.2 } });
    // Derived: 0.2 % of T is 0.002
    expect(spectrum.transmittance!.sigma[10]).toBeCloseTo(0.002, 14);
  });

  it("a standard deviation in another unit than the signal is converted", () => {
    const percent = fileText(["Energy (eV)", "T", "sd (%)"], rowsOf([eV, T, () => 0.3]));
    // Derived: 0.3 % is 0.003
    expect(spectrumOf(percent).transmittance!.sigma[10]).toBeCloseTo(0.003, 14);
    const alpha = fileText(["Energy (eV)", "alpha (1/cm)", "error (1/mm)"], rowsOf([eV, depthAt, () => 0.3]));
    // Derived: 0.3/mm is 3/cm
    expect(spectrumOf(alpha).sigma[10]).toBeCloseTo(3, 12);
    const bare = fileText(["Energy (eV)", "Absorbance", "sd"], rowsOf([eV, depthAt, () => 0.01]));
    // Derived: ln 10 times the absorbance
    expect(spectrumOf(bare).sigma[10]).toBeCloseTo(0.01 * Math.LN10, 12);
  });

  it("missing standard deviations take the median of their neighbours, are counted, and stay in use", () => {
    const text = fileText(
      ["Energy (eV)", "T", "sd"],
      rowsOf([eV, T, (E) => (Math.abs(E - 2.12) < 1e-4 ? "" : Math.abs(E - 2.14) < 1e-4 ? 0 : 0.003)]),
    );
    const spectrum = spectrumOf(text);
    expect(note(spectrum, "sigma-missing")).toContain("2 points of 161");
    expect(spectrum.used.every((flag) => flag === 1)).toBe(true);
    // Derived: all neighbours have 0.003
    expect(spectrum.transmittance!.sigma.every((value) => Math.abs(value - 0.003) < 1e-15)).toBe(true);
  });

  it("T above one and negative absorption are kept", () => {
    const spectrum = spectrumOf(fileText(["Energy (eV)", "T"], rowsOf([eV, (E) => 2 * T(E)])));
    expect(spectrum.signal.filter((value) => value < 0).length).toBeGreaterThan(0);
    expect(spectrum.used.every((flag) => flag === 1)).toBe(true);
  });

  it.each([["Transmission (a.u.)"], ["T (arb. units)"]])(
    "%s of any scale keeps the shape, with a note",
    (header) => {
      const spectrum = spectrumOf(fileText(["Energy (eV)", header], rowsOf([eV, (E) => 30000 * T(E)])));
      expect(codes(spectrum)).toContain("scale-arbitrary");
      // Derived: a constant factor of T is a constant of the optical depth
      expect(spectrum.signal[80]! - spectrum.signal[0]!).toBeCloseTo(depthAt(2.14) - depthAt(2.1), 7);
    },
  );

  it("T at or below zero keeps its T and leaves the alpha domain, with notes", () => {
    const dark = (E: number, draw: () => number): number => Math.exp(-8 * depthAt(E)) + 0.002 * draw();
    const spectrum = spectrumOf(fileText(["Energy (eV)", "T"], rowsOf([eV, dark])));
    const lost = spectrum.used.reduce((sum, flag) => sum + 1 - flag, 0);
    expect(lost).toBe(spectrum.transmittance!.value.filter((value) => value <= 0).length);
    expect(lost).toBeGreaterThan(0);
    expect(codes(spectrum)).toEqual(expect.arrayContaining(["saturated-points", "low-transmission"]));
    for (let i = 0; i < spectrum.used.length; i++) {
      expect(Number.isFinite(spectrum.transmittance!.value[i]!)).toBe(true);
      expect(Number.isNaN(spectrum.signal[i]!)).toBe(spectrum.used[i] === 0);
    }
  });

  it("counts with a weak reference leave rows out, counted", () => {
    const rows = rowsOf([eV, (E) => 4000 * T(E), (E) => (E > 2.1796 ? 0 : 4000)]);
    const spectrum = spectrumOf(fileText(["Energy (eV)", "Sample", "Reference"], rows));
    expect(spectrum.energy_eV.length).toBe(160);
    expect(note(spectrum, "reference-too-weak")).toContain("1 row");
  });
});

describe("several signals", () => {
  const text = fileText(
    ["Energy (eV)", "alpha 1 uW (1/cm)", "alpha 5 uW (1/cm)", "sd"],
    rowsOf([eV, (E) => 100 * depthAt(E), (E) => 80 * depthAt(E), () => 0.5]),
  );

  it("the first is taken with a note that names the others", () => {
    const spectrum = spectrumOf(text);
    expect(roleColumn(spectrum, "signal")).toBe(2);
    expect(note(spectrum, "several-signals")).toContain("column 3");
    // Derived: the standard deviation stands after the second signal and belongs to it
    expect(roleColumn(spectrum, "sigma")).toBeUndefined();
  });

  it("a column with one value all along is not the signal where another is", () => {
    const constant = fileText(["E (eV)", "T", "alpha (1/cm)"], rowsOf([eV, () => 4.2, depthAt]));
    expect(roleColumn(spectrumOf(constant), "signal")).toBe(3);
  });

  it("one transmission for each power is a transmission", () => {
    const powers = fileText(["E (eV)", "T (1 uW)", "T (5 uW)"], rowsOf([eV, T, T]));
    expect(spectrumOf(powers).quantityRead).toBe("transmittance");
    expect(codes(spectrumOf(powers))).toContain("several-signals");
  });

  it("another is taken by number or by name", () => {
    expect(roleColumn(spectrumOf(text, { signal: { column: 3 } }), "signal")).toBe(3);
    expect(roleColumn(spectrumOf(text, { signal: { column: 3 } }), "sigma")).toBe(4);
    expect(roleColumn(spectrumOf(text, { signal: { column: "alpha 5 uW (1/cm)" } }), "signal")).toBe(3);
    expect(roleColumn(spectrumOf(text, { signal: { column: "ALPHA 5 uW" } }), "signal")).toBe(3);
    expect(codes(spectrumOf(text, { signal: { column: 3 } }))).not.toContain("several-signals");
  });

  it("a name that is not there is refused with the nearest one", () => {
    const issue = issueOf(text, { signal: { column: "alpha 7 uW (1/cm)" } });
    expect(issue.code).toBe("spectrum/unknown-column");
    expect(wordSpectrumIssue(issue).remedy).toContain("did you mean");
    expect(issueOf(text, { signal: { column: 9 } }).code).toBe("spectrum/unknown-column");
    expect(issueOf(text, { axis: { column: 2 }, signal: { column: 2 } }).code).toBe("spectrum/same-column");
  });

  it("a reflectance column is read where the user names both the column and what it holds", () => {
    const wrong = fileText(["Energy (eV)", "R"], rowsOf([eV, T]));
    const spectrum = spectrumOf(wrong, { signal: { column: "R", quantity: "transmittance" } });
    expect(spectrum.quantityRead).toBe("transmittance");
  });
});

describe("what is no spectrum", () => {
  it("is refused with a code, and every refusal has words and a remedy", () => {
    const cases: readonly [string, string, Parameters<typeof read>[1]?][] = [
      ["spectrum/pixel-axis", fileText(["Pixel", "T"], rowsOf([(E) => Math.round(2000 * E), T]))],
      ["spectrum/no-signal", fileText(["Energy (eV)", "Temperature (K)"], rowsOf([eV, () => 4]))],
      ["spectrum/constant-axis", fileText(["Energy (eV)", "T"], rowsOf([() => 2.1, T]))],
      ["spectrum/constant-signal", fileText(["Energy (eV)", "T"], rowsOf([eV, () => 0.5]))],
      ["spectrum/unknown-axis-unit", fileText(["Energy (Ry)", "T"], rowsOf([(E) => E / 13.6, T]))],
      [
        "spectrum/no-reference",
        fileText(["Energy (eV)", "T"], rowsOf([eV, T])),
        { signal: { quantity: "counts" } },
      ],
      [
        "spectrum/unit-mismatch",
        fileText(["Energy (eV)", "T"], rowsOf([eV, T])),
        { signal: { quantity: "transmittance", unit: "1/cm" } },
      ],
      ["spectrum/no-light", fileText(["Energy (eV)", "T"], rowsOf([eV, (E) => -T(E)]))],
      ["spectrum/too-few-points", fileText(["Energy (eV)", "T"], rowsOf([eV, T]).slice(0, 6))],
      ["spectrum/no-axis", fileText(["Temperature (K)", "T"], rowsOf([eV, T]))],
    ];
    for (const [code, text, choices] of cases) {
      const issue = issueOf(text, choices);
      expect(issue.code).toBe(code);
      const words = wordSpectrumIssue(issue);
      expect(words.message).toContain("file.csv");
      expect(words.message).not.toContain("undefined");
      expect(words.remedy.length).toBeGreaterThan(10);
    }
  });
});
