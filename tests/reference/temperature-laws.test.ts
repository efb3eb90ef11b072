import { describe, expect, it } from "vitest";
import { makeRandom } from "../../app/base/index.ts";
import { BOLTZMANN, boseEinsteinGap, phononWidth, varshni } from "../../app/laws/index.ts";
import { fitTemperatureSeries, type TemperaturePoint } from "../../app/temperature/index.ts";
import { referenceTable } from "../support/reference-table.ts";

const points = (set: string, highest: number, sigma: number): TemperaturePoint[] =>
  referenceTable("silicon_gap.csv")
    .filter((row) => row["set"] === set && Number(row["temperature_K"]) <= highest)
    .map((row) => ({ temperature_K: Number(row["temperature_K"]), value: Number(row["gap_eV"]), sigma }));

type Fitted = ReturnType<typeof fitTemperatureSeries>;
const parameter = (found: Fitted, law: string, name: string): { value: number; sigma: number } => {
  const one = found.laws
    .find((candidate) => candidate.law === law)!
    .parameters.find((candidate) => candidate.name === name)!.quantity;
  return { value: one.value!, sigma: one.sigma! };
};
const within = (found: { value: number; sigma: number }, published: number, sigmas: number): void =>
  expect(Math.abs(found.value - published)).toBeLessThan(sigmas * found.sigma);

describe("gap of silicon, measured points", () => {
  it("up to 300 K gives the published Bose-Einstein parameters within two standard errors", () => {
    const found = fitTemperatureSeries("gap", points("green", 300, 1e-4), 1);
    const theta = parameter(found, "bose-einstein", "theta");
    // Source: O'Donnell and Chen, Appl. Phys. Lett. 58, 2924 (1991), Table I, Si: S = 1.49, <hw> = 25.5 meV, Eg(0) = 1.170 eV
    within(theta, 25.5e-3 / BOLTZMANN, 2);
    // Source: as above; in our form the coupling is S <hw>
    within(parameter(found, "bose-einstein", "coupling"), 1.49 * 25.5e-3, 2);
    const gapB = parameter(found, "bose-einstein", "gapB").value;
    const coupling = parameter(found, "bose-einstein", "coupling").value;
    // Source: as above; the points are given to 0.1 meV
    expect(Math.abs(gapB - coupling - 1.17)).toBeLessThan(1e-3);
  });

  it("up to 400 K gives the published Varshni parameters within two standard errors", () => {
    const found = fitTemperatureSeries("gap", points("green", 400, 1e-4), 1);
    // Source: Thurmond, J. Electrochem. Soc. 122, 1133 (1975), Si: 1.170 eV, 4.73e-4 eV/K, 636 K
    within(parameter(found, "varshni", "gap0"), 1.17, 2);
    // Source: as above
    within(parameter(found, "varshni", "alpha"), 4.73e-4, 2);
    // Source: as above
    within(parameter(found, "varshni", "beta"), 636, 2);
  });

  it("of 1958 below room temperature gives Varshni's own parameters within one standard error", () => {
    const found = fitTemperatureSeries("gap", points("macfarlane", 291, 2e-4), 1);
    // Source: Varshni, Physica 34, 149 (1967), Si: 7.021e-4 eV/K, 1108 K
    within(parameter(found, "varshni", "alpha"), 7.021e-4, 1);
    // Source: as above
    within(parameter(found, "varshni", "beta"), 1108, 1);
  });

  it("gives what an independent least-squares program gives", () => {
    const found = fitTemperatureSeries("gap", points("green", 300, 1e-4), 1);
    // Source: scipy 1.17.1, optimize.curve_fit on the same points: 1.17041594, 8.55748382e-4, 1357.21673
    expect(parameter(found, "varshni", "alpha").value).toBeCloseTo(8.55748e-4, 8);
    // Source: as above
    expect(parameter(found, "varshni", "gap0").value).toBeCloseTo(1.17041594, 7);
    // Source: as above, standard error scaled by the residuals: 2.37259e-4
    expect(parameter(found, "varshni", "alpha").sigma).toBeCloseTo(2.37259e-4, 7);
  });
});

/** Own curve of a law, with noise: a round trip, not an outside check. */
describe("round trips", () => {
  const temperatures = [4, 20, 40, 60, 80, 100, 120, 150, 180, 210, 240, 270, 300];
  const series = (of: (t: number, out: Float64Array) => void, sigma: number): TemperaturePoint[] => {
    const random = makeRandom(17);
    const out = new Float64Array(5);
    return temperatures.map((temperature_K) => {
      of(temperature_K, out);
      return { temperature_K, value: out[0]! + sigma * random.normal(), sigma };
    });
  };

  it("come back with their parameters, and the right law is preferred", () => {
    // Source: O'Donnell and Chen 1991, Table I, GaAs: S = 3.00, <hw> = 26.7 meV, Eg(0) = 1.521 eV (from memory)
    const theta = 26.7e-3 / BOLTZMANN;
    const bose = fitTemperatureSeries(
      "gap",
      series((t, out) => boseEinsteinGap(t, 1.521 + 3 * 26.7e-3, 3 * 26.7e-3, theta, out), 3e-5),
      1,
    );
    expect([bose.preferred, bose.decided]).toStrictEqual(["bose-einstein", true]);
    // Derived: the curve's own parameter
    within(parameter(bose, "bose-einstein", "theta"), theta, 3);
    const plain = fitTemperatureSeries(
      "gap",
      series((t, out) => varshni(t, 1.519, 5.405e-4, 204, out), 3e-5),
      1,
    );
    expect([plain.preferred, plain.decided]).toStrictEqual(["varshni", true]);
    // Derived: the curve's own parameter
    within(parameter(plain, "varshni", "beta"), 204, 3);
  });

  it("of a width come back, and a law with fewer parameters is preferred where it is the true one", () => {
    const optical = fitTemperatureSeries(
      "width",
      series((t, out) => phononWidth(t, 1e-3, 0, 20e-3, 18.7e-3, out), 2e-5),
      1,
    );
    expect(optical.preferred).toBe("optical");
    // Derived: the curve's own parameters
    within(parameter(optical, "optical", "phonon_energy"), 18.7e-3, 3);
    within(parameter(optical, "optical", "optical"), 20e-3, 3);
    const acoustic = fitTemperatureSeries(
      "width",
      series((t, out) => phononWidth(t, 1e-3, 5e-6, 0, 0.02, out), 2e-5),
      1,
    );
    expect(acoustic.preferred).toBe("acoustic");
  });
});
