import { describe, expect, it } from "vitest";
import { HC_EV_NM } from "../../../app/units/index.ts";
import { codes, depthAt, fileText, issueOf, roleColumn, rowsOf, spectrumOf } from "./make-file.ts";

const eV = (E: number): number => E;
const depth = (E: number): number => depthAt(E);
const T = (E: number): number => Math.exp(-depthAt(E));

const AXES: readonly (readonly [header: string, unit: string, value: (E: number) => number])[] = [
  ["Energy (eV)", "eV", eV],
  ["Photon energy / meV", "meV", (E) => 1000 * E],
  ["E [eV]", "eV", eV],
  ["eV", "eV", eV],
  ["energy_eV", "eV", eV],
  ["Photonenenergie (eV)", "eV", eV],
  ["Énergie (eV)", "eV", eV],
  ["hν (eV)", "eV", eV],
  ["Wellenlänge [nm]", "nm", (E) => HC_EV_NM / E],
  ["Wavelength (nm)", "nm", (E) => HC_EV_NM / E],
  ["wavelength_nm", "nm", (E) => HC_EV_NM / E],
  ["λ (nm)", "nm", (E) => HC_EV_NM / E],
  ["Longueur d'onde (nm)", "nm", (E) => HC_EV_NM / E],
  ["Wavelength, nm", "nm", (E) => HC_EV_NM / E],
  ["nm", "nm", (E) => HC_EV_NM / E],
  ["Wavelength", "nm", (E) => HC_EV_NM / E],
  ["wavelength_angstrom", "Angstrom", (E) => (10 * HC_EV_NM) / E],
  ["Wavelength (Å)", "Angstrom", (E) => (10 * HC_EV_NM) / E],
  ["Wavelength (Ångström)", "Angstrom", (E) => (10 * HC_EV_NM) / E],
  ["Wavelength (µm)", "um", (E) => HC_EV_NM / E / 1000],
  ["Wavelength [um]", "um", (E) => HC_EV_NM / E / 1000],
  ["Wavenumber (cm-1)", "cm-1", (E) => (1e7 * E) / HC_EV_NM],
  ["Wavenumber / cm⁻¹", "cm-1", (E) => (1e7 * E) / HC_EV_NM],
  ["cm⁻¹", "cm-1", (E) => (1e7 * E) / HC_EV_NM],
  ["Wellenzahl [1/cm]", "cm-1", (E) => (1e7 * E) / HC_EV_NM],
  ["Nombre d'onde (cm^-1)", "cm-1", (E) => (1e7 * E) / HC_EV_NM],
  ["Frequency (THz)", "THz", (E) => (299792.458 * E) / HC_EV_NM],
  ["Frequenz / GHz", "THz", (E) => (299792458 * E) / HC_EV_NM],
];

describe("light axis by its header", () => {
  it.each(AXES)("%s is read in %s", (header, unit, value) => {
    const text = fileText([header, "alpha (1/cm)"], rowsOf([value, depth]));
    const spectrum = spectrumOf(text, { axis: { medium: "vacuum" } });
    expect(spectrum.axisUnitRead).toBe(unit);
    expect(spectrum.columns[0]!.role).toBe("axis");
    // Derived: the axis was made from energies 2.10 to 2.18 eV, written with 10 digits
    expect(spectrum.energy_eV[0]).toBeCloseTo(2.1, 8);
    expect(spectrum.energy_eV.at(-1)).toBeCloseTo(2.18, 8);
  });
});

const SIGNALS: readonly (readonly [string, string, (E: number) => number])[] = [
  ["Transmission [%]", "transmittance", (E) => 100 * T(E)],
  ["T (%)", "transmittance", (E) => 100 * T(E)],
  ["%T", "transmittance", (E) => 100 * T(E)],
  ["Transmittance", "transmittance", T],
  ["T", "transmittance", T],
  ["Transmissionsgrad", "transmittance", T],
  ["Durchlässigkeit (%)", "transmittance", (E) => 100 * T(E)],
  ["I/I0", "transmittance", T],
  ["Absorbance", "absorbance", (E) => depth(E) / Math.LN10],
  ["Absorbance (a.u.)", "absorbance", (E) => depth(E) / Math.LN10],
  ["Abs", "absorbance", (E) => depth(E) / Math.LN10],
  ["Extinktion", "absorbance", (E) => depth(E) / Math.LN10],
  ["OD", "optical-density", (E) => depth(E) / Math.LN10],
  ["Optical density", "optical-density", (E) => depth(E) / Math.LN10],
  ["Optische Dichte", "optical-density", (E) => depth(E) / Math.LN10],
  ["Densité optique", "optical-density", (E) => depth(E) / Math.LN10],
  ["Optical depth", "optical-depth", depth],
  ["alpha d", "optical-depth", depth],
  ["αd", "optical-depth", depth],
  ["optical_depth", "optical-depth", depth],
  ["alpha (1/cm)", "alpha", depth],
  ["α / cm⁻¹", "alpha", depth],
  ["alpha_per_cm", "alpha", depth],
  ["Absorption coefficient (cm^-1)", "alpha", depth],
  ["Absorptionskoeffizient [1/mm]", "alpha", (E) => depth(E) / 10],
  ["Coefficient d'absorption (cm-1)", "alpha", depth],
  ["Absorption (1/cm)", "alpha", depth],
  ["alpha (1/um)", "alpha", (E) => depth(E) / 1e4],
  ["alpha (m-1)", "alpha", (E) => 100 * depth(E)],
  ["cm-1", "alpha", depth],
];

describe("signal by its header", () => {
  it.each(SIGNALS)("%s is read as %s", (header, quantity, value) => {
    const spectrum = spectrumOf(fileText(["Energy (eV)", header], rowsOf([eV, value])));
    expect(spectrum.quantityRead).toBe(quantity);
    expect(spectrum.unit).toBe(quantity === "alpha" ? "1/cm" : "1");
    // Derived: every signal was made from the same natural optical depth, or the same alpha in 1/cm
    for (const i of [0, 80, 120]) expect(spectrum.signal[i]).toBeCloseTo(depth(spectrum.energy_eV[i]!), 7);
    expect(spectrum.transmittance === null).toBe(quantity !== "transmittance");
  });

  it("two columns with 1/cm are an axis and an absorption coefficient", () => {
    const text = fileText(["cm-1", "cm-1"], rowsOf([(E) => (1e7 * E) / HC_EV_NM, depth]));
    const spectrum = spectrumOf(text);
    expect(spectrum.columns.map((column) => column.role)).toEqual(["axis", "signal"]);
    expect(spectrum.quantityRead).toBe("alpha");
  });

  it.each([
    ["Reflectance contrast"],
    ["Reflectivity"],
    ["ΔR/R"],
    ["R"],
    ["Reflexion (%)"],
    ["Reflektivität"],
  ])("%s is refused, with the remedy", (header) => {
    expect(issueOf(fileText(["Energy (eV)", header], rowsOf([eV, T]))).code).toBe("spectrum/reflectance");
  });

  it("photoluminescence is refused", () => {
    const text = fileText(["Energy (eV)", "PL intensity"], rowsOf([eV, T]));
    expect(issueOf(text).code).toBe("spectrum/emission");
  });

  it.each([["Counts"], ["Intensity (counts)"], ["Intensität"]])(
    "%s without a reference is refused",
    (header) => {
      const text = fileText(["Energy (eV)", header], rowsOf([eV, (E) => Math.round(5000 * T(E))]));
      expect(issueOf(text).code).toBe("spectrum/no-reference");
    },
  );
});

describe("other columns by their header", () => {
  it.each([
    ["sigma"],
    ["sd"],
    ["Error"],
    ["σ"],
    ["Standardabweichung"],
    ["Fehler"],
    ["écart-type"],
    ["std (1/cm)"],
    ["alpha error"],
    ["Uncertainty (1/cm)"],
  ])("%s is a standard deviation", (header) => {
    const text = fileText(["Energy (eV)", "alpha (1/cm)", header], rowsOf([eV, depth, () => 0.01]));
    const spectrum = spectrumOf(text);
    expect(spectrum.columns[2]!.role).toBe("sigma");
    expect(spectrum.noise.source).toBe("column");
    // Derived: as written, alpha in 1/cm
    expect(spectrum.noise.medianSigma).toBeCloseTo(0.01, 12);
  });

  it.each([["Temperature (K)"], ["Time (s)"], ["Power (µW)"], ["index"]])("%s is set aside", (header) => {
    const text = fileText(["Energy (eV)", header, "alpha (1/cm)"], rowsOf([eV, () => 4.2, depth]));
    expect(spectrumOf(text).columns.map((column) => column.role)).toEqual(["axis", "other", "signal"]);
  });

  it.each([
    ["Sample", "Reference", "Dark"],
    ["Probe", "Referenz", "Dunkel"],
    ["Échantillon", "Référence", "Obscurité"],
    ["Intensity", "Lamp", "Dark counts"],
  ])("%s, %s, %s become a transmission", (sample, reference, dark) => {
    const rows = rowsOf([eV, (E) => 100 + 4000 * T(E), () => 4100, () => 100]);
    const spectrum = spectrumOf(fileText(["Energy (eV)", sample, reference, dark], rows));
    expect(spectrum.quantityRead).toBe("counts");
    // Derived: T = (S - D)/(F - D)
    expect(spectrum.transmittance!.value[80]).toBeCloseTo(T(spectrum.energy_eV[80]!), 8);
    expect(codes(spectrum)).toContain("surface-not-corrected");
  });

  it("a swept laser's signal and monitor become their ratio", () => {
    const rows = rowsOf([(E) => (299792.458 * E) / HC_EV_NM, (E) => 2.5 * T(E), () => 2.5]);
    const spectrum = spectrumOf(fileText(["Frequency (THz)", "Signal (V)", "Monitor (V)"], rows));
    expect(spectrum.quantityRead).toBe("counts");
    expect(spectrum.transmittance!.value[80]).toBeCloseTo(T(spectrum.energy_eV[80]!), 8);
  });

  it.each([["Sample/Reference"], ["signal/monitor"], ["Ratio"]])(
    "%s is a finished transmission",
    (header) => {
      const spectrum = spectrumOf(fileText(["Energy (eV)", header], rowsOf([eV, T])));
      expect(spectrum.quantityRead).toBe("transmittance");
    },
  );

  it("a detector's temperature is no signal", () => {
    const rows = rowsOf([eV, () => 77, T]);
    expect(
      roleColumn(spectrumOf(fileText(["Energy (eV)", "Detector temperature", "T"], rows)), "signal"),
    ).toBe(3);
  });

  it("a finished transmission beside its lamp is not divided again", () => {
    const spectrum = spectrumOf(
      fileText(["Energy (eV)", "Transmission", "Reference"], rowsOf([eV, T, () => 4000])),
    );
    expect(spectrum.transmittance!.value[80]).toBeCloseTo(T(spectrum.energy_eV[80]!), 8);
  });
});

describe("no header", () => {
  it.each([
    ["eV", eV],
    ["nm", (E: number) => HC_EV_NM / E],
    ["cm-1", (E: number) => (1e7 * E) / HC_EV_NM],
  ])("a first column in %s is known by its range, with a note", (unit, axis) => {
    const spectrum = spectrumOf(fileText(null, rowsOf([axis, (E, noise) => T(E) + 0.002 * noise()])));
    expect(spectrum.axisUnitRead).toBe(unit);
    expect(spectrum.quantityRead).toBe("transmittance");
    expect(codes(spectrum)).toEqual(expect.arrayContaining(["axis-unit-assumed", "quantity-assumed"]));
  });

  it("peaks up to several hundred are an absorption coefficient", () => {
    const spectrum = spectrumOf(fileText(null, rowsOf([eV, (E, noise) => 100 * depth(E) + 0.2 * noise()])));
    expect(spectrum.quantityRead).toBe("alpha");
    expect(codes(spectrum)).toContain("alpha-unit-assumed");
  });

  it("dips up to a hundred are a transmission in percent", () => {
    const spectrum = spectrumOf(fileText(null, rowsOf([eV, (E, noise) => 100 * T(E) + 0.2 * noise()])));
    expect(spectrum.quantityRead).toBe("transmittance");
    expect(codes(spectrum)).toContain("percent-assumed");
    expect(spectrum.transmittance!.value[0]).toBeCloseTo(T(2.1), 1);
  });

  it("a counting column is refused as pixels", () => {
    let pixel = 0;
    const text = fileText(null, rowsOf([() => pixel++, T]));
    expect(issueOf(text).code).toBe("spectrum/pixel-axis");
  });
});
