import { expect, test } from "vitest";
import { makeRandom } from "../../../app/base/index.ts";
import {
  deriveQuantities,
  fitLevels,
  seriesToResult,
  chooseLevelRange,
  type DeriveInput,
} from "../../../app/series/index.ts";
import { resultSchema } from "../../../app/protocol/index.ts";
import { areaOf, energyOf, lineEnergies, LINES, mustBe, widthOf } from "./synthetic-series.ts";

const MATERIAL: DeriveInput["material"] = {
  dimension: 3,
  envelope: "P",
  permittivity: 7.5,
  reduced_mass: null,
  bohr_radius_nm: 1.11,
  index: 2.95,
};

function makeInput(seed: number | null, from = 2): DeriveInput {
  const energies = lineEnergies(seed);
  const places = LINES.map((_, i) => i).filter((i) => LINES[i]! >= from);
  const k = LINES.length;
  const levels = mustBe(
    fitLevels({
      n: places.map((i) => LINES[i]!),
      energy_eV: Float64Array.from(places, (i) => energies.energy_eV[i]!),
      covariance: Float64Array.from(
        places.flatMap((i) => places.map((j) => energies.covariance[i * k + j]!)),
      ),
      defect: "constant",
    }),
  );
  return {
    material: MATERIAL,
    levels,
    energies,
    lines: LINES.map((n) => ({
      n,
      width_eV: widthOf(n),
      area: areaOf(n),
      asymmetry: -0.2,
      covariance: Float64Array.of((0.02 * widthOf(n)) ** 2, 0, 0, 0, (0.01 * areaOf(n)) ** 2, 0, 0, 0, 1e-4),
      significance: 100,
      bic_gain: null,
    })),
    signalUnit: "1/cm",
  };
}

test("offsets and binding energies have the spread that resampled energies show", () => {
  const seeds = 300;
  const offsets = LINES.map(() => 0);
  const bindings = LINES.map(() => 0);
  for (let seed = 1; seed <= seeds; seed++) {
    const { lines } = deriveQuantities(makeInput(seed, 4));
    lines.forEach((line, i) => {
      offsets[i]! += (line.law_offset_eV.value! / line.law_offset_eV.sigma!) ** 2;
      const truth = 2.17205 - energyOf(line.n);
      bindings[i]! += ((line.binding_eV.value! - truth) / line.binding_eV.sigma!) ** 2;
    });
  }
  // Derived: squared unit pulls average to one, spread 0.08 over 300 seeds; 5 of these, 22 numbers being looked at.
  for (const sum of [...offsets, ...bindings]) expect(Math.abs(sum / seeds - 1)).toBeLessThan(0.41);
});

test("peaks, lifetimes and oscillator strengths follow from width, area and asymmetry", () => {
  const { lines } = deriveQuantities(makeInput(null));
  const third = lines[1]!;
  const g = widthOf(3) / 2;
  const height = (x: number): number => (areaOf(3) / Math.PI) * ((g - 0.4 * x) / (x * x + g * g));
  let highest = 0;
  for (let x = -g; x <= g; x += g / 20000) highest = Math.max(highest, height(x));
  // Derived: the highest of 40,000 values of the line itself.
  expect(third.peak.value! / highest).toBeCloseTo(1, 8);
  // Source: CODATA, hbar = 658.2119569 ueV ps.
  expect(third.lifetime_ps.value! * widthOf(3) * 1e6).toBeCloseTo(658.2119569, 6);
  // Derived: area times index over 1.0976e-16 eV cm^2.
  expect(third.strength_per_cm3.value! / ((areaOf(3) * 2.95) / 1.0976e-16)).toBeCloseTo(1, 12);
});

test("errors of a peak agree with resampling of width, area and asymmetry", () => {
  const random = makeRandom(17);
  const g = widthOf(3);
  const a = areaOf(3);
  const values = Array.from({ length: 20000 }, () => {
    const q = -0.2 + 0.01 * random.normal();
    const width = g * (1 + 0.02 * random.normal());
    return (a * (1 + 0.01 * random.normal()) * (1 + Math.sqrt(1 + 4 * q * q))) / (Math.PI * width);
  });
  const mean = values.reduce((sum, one) => sum + one, 0) / values.length;
  const spread = Math.sqrt(values.reduce((sum, one) => sum + (one - mean) ** 2, 0) / values.length);
  // Derived: 20,000 draws give a spread to 0.5 %; first-order propagation is good to 0.1 % here.
  expect(deriveQuantities(makeInput(null)).lines[1]!.peak.sigma! / spread).toBeCloseTo(1, 1);
});

test("says where the Bohr radius comes from, and that the given one contradicts the series", () => {
  const given = deriveQuantities(makeInput(null));
  expect(given.derived!.bohr_radius_from).toBe("given");
  expect(given.notes.map((note) => note.code)).toContain("bohr-radius-given");
  const { derived } = deriveQuantities({
    ...makeInput(null),
    material: { ...MATERIAL, bohr_radius_nm: null },
  });
  expect(derived!.bohr_radius_from).toBe("Rydberg energy and permittivity");
  // Derived: 719.982274 meV nm/(7.5 times 91.3 meV).
  expect(derived!.bohr_radius_nm.value!).toBeCloseTo(719.982274 / (7.5 * 91.3), 6);
  expect(derived!.bohr_radius_nm.sigma!).toBeGreaterThan(0);
  const none = deriveQuantities({
    ...makeInput(null),
    material: { ...MATERIAL, bohr_radius_nm: null, permittivity: null },
  });
  expect(none.derived!.radius_um).toEqual([]);
  expect(none.notes.map((note) => note.code)).toContain("bohr-radius-unknown");
});

test("tells the highest significant line from the highest resolved one", () => {
  const input = makeInput(null);
  const lines = input.lines.map((line) => ({
    ...line,
    width_eV: line.width_eV + 120e-6,
    bic_gain: line.n > 9 ? 20 : null,
  }));
  const { derived, notes } = deriveQuantities({ ...input, lines });
  expect(derived!.highest_n).toBe(12);
  // Derived: spacings 168 ueV at n = 10 and 127 ueV at n = 11 against widths of 140 and 136 ueV.
  expect(derived!.highest_resolved_n).toBe(10);
  expect(notes.map((note) => note.code)).toContain("highest-line-blended");
});

test("warns of screening where the defect of a sheet is far below one half", () => {
  const input = makeInput(null);
  const { notes } = deriveQuantities({ ...input, material: { ...MATERIAL, dimension: 2, envelope: "S" } });
  expect(notes.map((note) => note.code)).toContain("screened-sheet");
});

test("the series part of a result obeys the schema", () => {
  const choice = mustBe(chooseLevelRange({ ...lineEnergies(2), defect: "constant", fit_n: "auto" }));
  const part = seriesToResult(choice, { readings: [], shift: 0, notes: [] });
  const parsed = resultSchema.shape.series.safeParse(part);
  expect(parsed.error?.issues ?? []).toEqual([]);
});
