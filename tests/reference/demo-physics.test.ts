import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import { continuumPair, linePair, type ContinuumEnvelope } from "../../app/lines/index.ts";
import { strength, type StrengthEnvelope } from "../../app/laws/index.ts";
import { linearLeastSquares } from "../../app/solve/index.ts";

/**
 * The demo and synthetic files come from a script that shares no code with app/. Here the lines, the continuum and
 * the strengths of app/, put at the stated truth, must describe them to the noise: only a slow background is fitted.
 */
interface Truth {
  readonly gap_eV: number;
  readonly rydberg_eV: number;
  readonly defect0: number;
  readonly offsets_eV: Readonly<Record<string, number>>;
  readonly asymmetry: number;
  readonly floor_eV: number;
  readonly coefficient_eV: number;
  readonly exponent: number;
  readonly law: StrengthEnvelope;
  readonly strength: number;
  readonly first: number;
}

const fixtures = new URL("../../fixtures/", import.meta.url);
const readText = (path: string): string => readFileSync(new URL(path, fixtures), "utf8");

function readRows(path: string): number[][] {
  return readText(path)
    .split(/\r?\n/)
    .filter((line) => /^[\d.]+[,\t]/.test(line))
    .map((line) => line.split(/[,\t]/).map(Number));
}

const ENVELOPES: Record<StrengthEnvelope, ContinuumEnvelope> = {
  cubic: "allowed-3d",
  "p-envelope": "forbidden-3d",
  sheet: "allowed-2d",
};

function absorption(energies: Float64Array, truth: Truth): Float64Array {
  const m = energies.length;
  const sum = new Float64Array(m);
  const even = new Float64Array(m);
  const odd = new Float64Array(m);
  const add = (weight: number): void => {
    for (let i = 0; i < m; i++) sum[i] = sum[i]! + weight * (even[i]! + 2 * truth.asymmetry * odd[i]!);
  };
  for (let n = truth.first; n <= 400; n++) {
    const center =
      truth.gap_eV - truth.rydberg_eV / (n - truth.defect0) ** 2 + (truth.offsets_eV[String(n)] ?? 0);
    const width = truth.floor_eV + truth.coefficient_eV * n ** -truth.exponent;
    linePair(energies, 0, m, center, width, 0, even, odd);
    add(truth.strength * strength(n, 0, truth.law, "n"));
  }
  continuumPair(energies, 0, m, truth.gap_eV, truth.rydberg_eV, ENVELOPES[truth.law], truth.floor_eV, {
    absorptive: even,
    dispersive: odd,
  });
  add(truth.strength);
  return sum;
}

/** Chi square per degree of freedom with a polynomial of second order and a square root fitted, in units of its spread. */
function excess(
  energies: Float64Array,
  signal: Float64Array,
  sigma: Float64Array,
  model: Float64Array,
  onset: number,
): number {
  const m = energies.length;
  const middle = energies[m >> 1]!;
  const span = energies[m - 1]! - energies[0]!;
  const columns = new Float64Array(4 * m);
  energies.forEach((energy, i) => {
    const u = (energy - middle) / span;
    columns.set([1], i);
    columns.set([u], m + i);
    columns.set([u * u], 2 * m + i);
    columns.set([onset > 0 ? Math.sqrt(energy - onset) : u ** 3], 3 * m + i);
  });
  const target = signal.map((value, i) => value - model[i]!);
  const fit = linearLeastSquares(
    columns,
    m,
    4,
    target,
    sigma.map((one) => 1 / one),
  );
  return (fit.chi2 / fit.degreesOfFreedom - 1) / Math.sqrt(2 / fit.degreesOfFreedom);
}

interface DemoTruth {
  readonly series: Pick<Truth, "gap_eV" | "rydberg_eV" | "defect0" | "offsets_eV" | "asymmetry">;
  readonly width_law: {
    readonly floor_eV: number;
    readonly coefficient_eV: number;
    readonly exponent: number;
  };
  readonly strength_law: { readonly coefficient: number; readonly law: StrengthEnvelope };
  readonly signal: { readonly thickness_um: number; readonly noise: { readonly sigma_T: number } };
  readonly background: { readonly onset_eV: number };
}

test.each([
  ["demo/TH-A1_transmission", "csv", 1],
  ["demo/TH-A3_alpha", "csv", 1000],
] as const)("%s is described to the noise by the lines and the continuum of app/", (name, ending, perEv) => {
  const truth = JSON.parse(readText(`${name}.truth.json`)) as DemoTruth;
  const rows = readRows(`${name}.${ending}`);
  const energies = Float64Array.from(rows, (row) => row[0]! / perEv);
  const depth = truth.signal.thickness_um * 1e-4;
  const isAlpha = name.endsWith("alpha");
  const signal = Float64Array.from(rows, (row) => (isAlpha ? row[1]! : -Math.log(row[1]!) / depth));
  const model = absorption(energies, {
    ...truth.series,
    ...truth.width_law,
    law: truth.strength_law.law,
    strength: truth.strength_law.coefficient,
    first: 2,
  });
  // Weights from the measured T would pull towards high T; the mean of nine neighbours is nearly free of that.
  const sigma = signal.map((_, i) => {
    if (isAlpha) return rows[i]![2]!;
    const near = signal.slice(Math.max(0, i - 4), i + 5);
    const mean = near.reduce((sum, one) => sum + Math.exp(-one * depth), 0) / near.length;
    return truth.signal.noise.sigma_T / mean / depth;
  });
  // Derived: the spread of chi square is one in these units; 4.5 allows for the curvature of the logarithm at low T.
  expect(Math.abs(excess(energies, signal, sigma, model, truth.background.onset_eV))).toBeLessThan(4.5);
});

test.each(["allowed-bulk_alpha", "sheet_depth"])("%s is described to the noise by app/", (name) => {
  const truth = JSON.parse(readText(`generated/${name}.truth.json`)) as {
    crystal: Omit<Truth, "coefficient_eV" | "exponent" | "strength" | "first" | "offsets_eV"> & {
      width_coefficient_eV: number;
      width_exponent: number;
      strength_coefficient: number;
      first_n: number;
    };
    signal: { noise: { sigma: number } };
  };
  const rows = readRows(`generated/${name}.csv`);
  const energies = Float64Array.from(rows, (row) => row[0]!);
  const { crystal } = truth;
  const model = absorption(energies, {
    ...crystal,
    offsets_eV: {},
    coefficient_eV: crystal.width_coefficient_eV,
    exponent: crystal.width_exponent,
    strength: crystal.strength_coefficient,
    first: crystal.first_n,
  });
  const sigma = energies.map(() => truth.signal.noise.sigma);
  // Derived: the spread of chi square is one in these units.
  expect(
    Math.abs(
      excess(
        energies,
        Float64Array.from(rows, (row) => row[1]!),
        sigma,
        model,
        0,
      ),
    ),
  ).toBeLessThan(4);
});

test("gaussian-instrument_alpha is described to the noise by the line pair under a Gaussian instrument", () => {
  const truth = JSON.parse(readText("generated/gaussian-instrument_alpha.truth.json")) as {
    lines: { energy_eV: number; width_eV: number; area: number }[];
    instrument: { fwhm_eV: number };
    asymmetry: number;
    signal: { noise: { sigma: number } };
  };
  const rows = readRows("generated/gaussian-instrument_alpha.csv");
  const energies = Float64Array.from(rows, (row) => row[0]!);
  const m = energies.length;
  const model = new Float64Array(m);
  const even = new Float64Array(m);
  const odd = new Float64Array(m);
  for (const line of truth.lines) {
    const std = truth.instrument.fwhm_eV / Math.sqrt(8 * Math.LN2);
    linePair(energies, 0, m, line.energy_eV, line.width_eV, std, even, odd);
    for (let i = 0; i < m; i++) model[i] = model[i]! + line.area * (even[i]! + 2 * truth.asymmetry * odd[i]!);
  }
  const sigma = energies.map(() => truth.signal.noise.sigma);
  // Derived: the spread of chi square is one in these units.
  expect(
    Math.abs(
      excess(
        energies,
        Float64Array.from(rows, (row) => row[1]!),
        sigma,
        model,
        0,
      ),
    ),
  ).toBeLessThan(4);
});
