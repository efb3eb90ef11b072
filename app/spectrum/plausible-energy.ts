import { doubt, type Note } from "../base/index.ts";
import { energyFromReading, isWavelength, lightScale, readingFromEnergy } from "../units/index.ts";
import type { AxisReading } from "./read-axis.ts";
import type { SpectrumIssue } from "./issue.ts";
import type { AxisUnit, ReadingChoices } from "./spectrum.ts";

/** Photon energies (eV) at which absorption edges with exciton series are measured. */
const LOWEST_EV = 0.05;
const HIGHEST_EV = 20;
/** Where most of them lie: what another unit has to give to be named as the likely one. */
const LIKELY_EV = [0.1, 12] as const;
const FOR_ENERGIES: readonly AxisUnit[] = ["nm", "meV", "eV", "cm-1", "THz", "um", "Angstrom"];
const FOR_WAVELENGTHS: readonly AxisUnit[] = ["um", "nm", "Angstrom", "eV", "meV", "cm-1", "THz"];

/**
 * What      An issue where the whole axis lies outside 0.05 to 20 eV by a unit that the file or its header gave; a doubt
 *           where the protocol named the unit. Both name the units in which the same numbers would make sense.
 */
export function implausibleEnergy(
  file: string,
  lowest_eV: number,
  highest_eV: number,
  axis: AxisReading,
  choices: ReadingChoices,
): { readonly issue: SpectrumIssue | null; readonly notes: readonly Note[] } {
  if (highest_eV >= LOWEST_EV && lowest_eV <= HIGHEST_EV) return { issue: null, notes: [] };
  const { unit } = axis.scale;
  const range = `${short(lowest_eV)} to ${short(highest_eV)} eV`;
  const likely = likelyUnits([lowest_eV, highest_eV], axis, choices);
  if (choices.axis.unit === null)
    return {
      issue: {
        code: "spectrum/implausible-energy",
        facts: { file, unit, found: range, likely: likely.words, suggestion: likely.best },
      },
      notes: [],
    };
  return {
    issue: null,
    notes: [
      doubt(
        "energy-implausible",
        "series.gap_eV",
        `read in ${unit} the energies run from ${range}, where no absorption edge is expected${likely.words === "" ? "" : `; ${likely.words}`}`,
        likely.best === null ? "check axis.unit and axis.column" : `check axis.unit: is it ${likely.best}?`,
      ),
    ],
  };
}

/** The air is left out: it changes no unit that is likely. */
function likelyUnits(
  range_eV: readonly number[],
  axis: AxisReading,
  choices: ReadingChoices,
): { readonly words: string; readonly best: AxisUnit | null } {
  const written = range_eV.map((energy) => readingFromEnergy(energy, axis.scale) / axis.factor);
  const units = isWavelength(axis.scale.unit) ? FOR_WAVELENGTHS : FOR_ENERGIES;
  const fitting = units.flatMap((unit) => {
    const scale = lightScale(unit, "vacuum", choices.axis.air);
    const energies = written.map((value) => energyFromReading(value, scale)).sort((a, b) => a - b);
    const [low, high] = [energies[0]!, energies[1]!];
    return low >= LIKELY_EV[0] && high <= LIKELY_EV[1] ? [{ unit, low, high }] : [];
  });
  return {
    words: fitting
      .slice(0, 2)
      .map(({ unit, low, high }) => `as ${unit} the same numbers are ${short(low)} to ${short(high)} eV`)
      .join(", "),
    best: fitting[0]?.unit ?? null,
  };
}

function short(value: number): string {
  return String(Number(value.toPrecision(4)));
}
