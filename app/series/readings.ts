import { assumption, doubt, type Note } from "../base/index.ts";
import { format } from "./level-fit.ts";
import { fitStrengths, type StrengthInput } from "./strength-fit.ts";
import { fitWidths, type WidthInput } from "./width-fit.ts";

export interface ReadingsInput {
  readonly defect0: number;
  /** Whether delta0 was fitted: only then are n and the defect degenerate. */
  readonly defectFree: boolean;
  readonly dimension: number;
  readonly envelope: "S" | "P";
  /** n is given by the user or a preset (`first_n`): the convention does not move it. */
  readonly pinned: boolean;
  readonly widths: WidthInput;
  readonly strengths: StrengthInput;
}

export interface Reading {
  /** n of this reading minus the n given. */
  readonly shift: number;
  readonly defect0: number;
  readonly strength_chi2: number;
  readonly width_chi2: number;
  readonly chosen: boolean;
}

export interface Readings {
  /** Best strengths and widths first. */
  readonly readings: readonly Reading[];
  /** Shift that the convention (or the pin) chooses; add it to every n. */
  readonly shift: number;
  readonly notes: readonly Note[];
}

/**
 * How far n must be moved so that |delta - (3-D)/2| <= 1/2 (n + 1 and delta + 1 are the same energies), without going
 * below the first n of the envelope.
 */
export function conventionalShift(
  defect0: number,
  dimension: number,
  firstN: number,
  lowestN: number,
): number {
  const shift = -Math.round(defect0 - (3 - dimension) / 2);
  // Math.round sends exact halves up; both neighbours obey the convention there, so the given n may stay.
  if (Math.abs(defect0 - (3 - dimension) / 2) <= 0.5) return 0;
  return Math.max(shift, firstN - lowestN);
}

/** Shifted readings of the same energies, ranked by how well strengths and widths follow their laws. */
export function rankReadings(input: ReadingsInput): Readings {
  if (!input.defectFree) return { readings: [], shift: 0, notes: [] };
  const firstN = input.envelope === "P" ? 2 : 1;
  const lowest = Math.min(...input.widths.n);
  const shift = input.pinned ? 0 : conventionalShift(input.defect0, input.dimension, firstN, lowest);
  const readings: Reading[] = [];
  for (let by = -2; by <= 2; by++) {
    if (lowest + by < firstN && by !== shift) continue;
    const move = (n: number): number => n + by;
    const defect0 = input.defect0 + by;
    const strengths = fitStrengths({
      ...input.strengths,
      n: input.strengths.n.map(move),
      defect0,
      judgeRange: false,
    });
    const widths = fitWidths({
      ...input.widths,
      n: input.widths.n.map(move),
      defect0,
      judgeRange: false,
      testExponent: false,
      how: "newton",
    });
    if (!strengths.ok || !widths.ok) continue;
    readings.push({
      shift: by,
      defect0,
      strength_chi2: strengths.value.chi2,
      width_chi2: widths.value.chi2,
      chosen: by === shift,
    });
  }
  const total = (one: Reading): number => one.strength_chi2 + one.width_chi2;
  readings.sort((a, b) => total(a) - total(b) || Math.abs(a.shift) - Math.abs(b.shift));
  const chosen = readings.find((one) => one.chosen);
  const best = readings[0];
  const notes: Note[] = [
    assumption(
      "n-not-decided-by-energies",
      "series.defect0",
      `n and a constant defect are not decided by energies: n + 1 with defect + 1 gives the same series. ${
        input.pinned
          ? "The lowest n is the one that was given."
          : `Taken by the convention that the defect lies within 0.5 of ${format((3 - input.dimension) / 2)}.`
      }`,
      "pin the lowest line with material.first_n",
    ),
  ];
  if (chosen !== undefined && best !== undefined && total(chosen) - total(best) > 10) {
    notes.push(
      doubt(
        "reading-disputed",
        "series.readings",
        `Strengths and widths follow their laws better with every n moved by ${best.shift - chosen.shift} (chi square lower by ${format(total(chosen) - total(best))}).`,
        "look for a missed or spurious lowest line; pin it with material.first_n",
      ),
    );
  }
  return { readings, shift, notes };
}
