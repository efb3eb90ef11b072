import {
  fringesTerm,
  interpolateColumn,
  measuredTerm,
  polynomialTerm,
  squareRootOnsetTerm,
  urbachTerm,
  type BackgroundTerm as LineTerm,
} from "../lines/index.ts";
import type { BackgroundTerm } from "../protocol/index.ts";
import type { BackgroundColumn, FringeWave } from "./model-spec.ts";

/**
 * The protocol's background terms as columns on these energies; `gap` is where an Urbach tail is referred to. The
 * polynomial runs from -1 to 1 over `frame`, by default the first and last of the energies. Fringes have columns once
 * their period is known (`wave`); once their amplitudes are known too, one more whose coefficient is what is to be added
 * to the period, so that period and error come from the same fit.
 */
export function backgroundColumns(
  terms: readonly BackgroundTerm[],
  energy: Float64Array,
  signalUnit: string,
  gap: number,
  frame: readonly [number, number] = [energy[0]!, energy[energy.length - 1]!],
  wave: FringeWave | null = null,
): BackgroundColumn[] {
  const m = energy.length;
  const middle = (frame[0] + frame[1]) / 2;
  const halfSpan = Math.max((frame[1] - frame[0]) / 2, Number.MIN_VALUE);
  return terms.flatMap((choice): BackgroundColumn[] => {
    if (choice.term === "fringes") return wave === null ? [] : fringeColumns(energy, signalUnit, wave);
    const { term, nonlinear, unit } = lineTerm(choice, energy, signalUnit, middle, halfSpan, gap);
    const out = new Float64Array(m * term.columns.length);
    term.fill(energy, 0, m, nonlinear, out, 0, m);
    return term.columns.map((name, j) => ({
      term: choice.term,
      name,
      unit,
      values: out.subarray(j * m, (j + 1) * m),
    }));
  });
}

function lineTerm(
  choice: Exclude<BackgroundTerm, { term: "fringes" }>,
  energy: Float64Array,
  signalUnit: string,
  middle: number,
  halfSpan: number,
  gap: number,
): { term: LineTerm; nonlinear: number[]; unit: string } {
  switch (choice.term) {
    case "polynomial":
      return { term: polynomialTerm(choice.order, middle, halfSpan), nonlinear: [], unit: signalUnit };
    case "square-root":
      return { term: squareRootOnsetTerm(choice.onset_eV), nonlinear: [], unit: `${signalUnit} eV^-1/2` };
    case "urbach":
      return { term: urbachTerm(gap), nonlinear: [choice.energy_eV], unit: signalUnit };
    case "measured": {
      const column = new Float64Array(energy.length);
      const source = [Float64Array.from(choice.energy_eV), Float64Array.from(choice.value)] as const;
      interpolateColumn(source[0], source[1], energy, 0, energy.length, column);
      return { term: measuredTerm(column), nonlinear: [], unit: "1" };
    }
  }
}

function fringeColumns(energy: Float64Array, unit: string, wave: FringeWave): BackgroundColumn[] {
  const m = energy.length;
  const term = fringesTerm(wave.reference);
  const out = new Float64Array(2 * m);
  term.fill(energy, 0, m, [wave.period], out, 0, m);
  const columns: BackgroundColumn[] = term.columns.map((name, j) => ({
    term: "fringes",
    name,
    unit,
    values: out.subarray(j * m, (j + 1) * m),
  }));
  if (wave.cos === 0 && wave.sin === 0) return columns;
  const slopes = new Float64Array(2 * m);
  term.differentiate(energy, 0, m, [wave.period], slopes, 0, m);
  const values = Float64Array.from(
    { length: m },
    (_, i) => wave.cos * slopes[i]! + wave.sin * slopes[m + i]!,
  );
  return [...columns, { term: "fringes", name: "fringe_period", unit: "eV", values }];
}
