import { assumption, failure, success, type Note, type Result } from "../base/index.ts";
import type { Table } from "../table/index.ts";
import { isWavelength, lightScale, STANDARD_AIR, type LightScale, type Medium } from "../units/index.ts";
import type { Candidate } from "./choose-columns.ts";
import { describeColumn } from "./find-column.ts";
import { plainWords } from "./header-words.ts";
import type { SpectrumIssue } from "./issue.ts";
import type { AxisUnit, ReadingChoices } from "./spectrum.ts";

export interface AxisReading {
  readonly scale: LightScale;
  /** From the unit as written to the scale's unit. */
  readonly factor: number;
  readonly reason: string;
  readonly notes: readonly Note[];
}

const ABOUT = "series.gap_eV";

/** Unit and medium of the light axis: the choices, then the header, then the range of the numbers. */
export function readAxis(
  table: Table,
  axis: Candidate,
  choices: ReadingChoices,
): Result<AxisReading, SpectrumIssue> {
  const { column, meaning, look } = axis;
  if (meaning.kind === "pixel" && choices.axis.unit === null)
    return failure({
      code: "spectrum/pixel-axis",
      facts: { file: table.file, column: column.index, found: describeColumn(column) },
    });
  if (look.count > 0 && look.min === look.max)
    return failure({
      code: "spectrum/constant-axis",
      facts: { file: table.file, column: column.index, found: look.min },
    });
  const notes: Note[] = [];
  let unit: AxisUnit;
  let factor = 1;
  let reason: string;
  if (choices.axis.unit !== null) {
    unit = choices.axis.unit;
    reason = `${unit} by the protocol`;
  } else if (meaning.axis !== null) {
    ({ unit, factor } = meaning.axis);
    reason = factor === 1 ? `${unit} by the header` : `${column.unit} by the header, read as ${unit}`;
  } else {
    const guess = guessUnit(axis);
    if (
      guess === null ||
      (column.unit !== "" && meaning.kind === "axis" && meaning.light !== null && unknownUnit(column.unit))
    )
      return failure({
        code: "spectrum/unknown-axis-unit",
        facts: {
          file: table.file,
          column: column.index,
          found: column.unit === "" ? `values from ${look.min} to ${look.max}` : column.unit,
        },
      });
    ({ unit, factor } = guess);
    reason = `${unit} because ${guess.because}`;
    notes.push(
      assumption(
        "axis-unit-assumed",
        ABOUT,
        `the unit of the light axis is not written; ${unit} is assumed because ${guess.because}`,
        "set axis.unit",
      ),
    );
  }
  const medium = readMedium(table, axis, unit, choices, notes);
  return success({ scale: lightScale(unit, medium, choices.axis.air), factor, reason, notes });
}

/** `arb.` and such on a light axis say that the axis is not calibrated. */
function unknownUnit(unit: string): boolean {
  return !/^(a\.?u\.?|1|-|)$/i.test(unit.trim());
}

interface UnitGuess {
  readonly unit: AxisUnit;
  readonly factor: number;
  readonly because: string;
}

/**
 * The ranges in which semiconductors are measured: eV below 20, nm 150-3000, wave numbers above. Where the header
 * names the kind of axis only the units of that kind are asked.
 */
function guessUnit(axis: Candidate): UnitGuess | null {
  const { min, max } = axis.look;
  const range = `values from ${short(min)} to ${short(max)}`;
  const say = (unit: AxisUnit, what: string, factor = 1): UnitGuess => ({
    unit,
    factor,
    because: `${range} fit ${what}`,
  });
  switch (axis.meaning.light) {
    case "energy":
      if (max < 30) return say("eV", "photon energies in eV");
      return min > 30 && max < 20000 ? say("meV", "photon energies in meV") : null;
    case "wavelength":
      if (max < 30) return say("um", "wavelengths in um");
      if (max <= 3000) return say("nm", "wavelengths in nm");
      return max < 50000 ? say("Angstrom", "wavelengths in Angstrom") : null;
    case "wavenumber":
      return min > 100 && max < 200000 ? say("cm-1", "wave numbers in cm^-1") : null;
    case "frequency":
      if (min > 1e12) return say("THz", "frequencies in Hz", 1e-12);
      if (max < 5000) return say("THz", "frequencies in THz");
      return min > 1e4 ? say("THz", "frequencies in GHz", 1e-3) : null;
    case null:
      if (min <= 0) return null;
      if (min >= 0.3 && max <= 12) return say("eV", "photon energies in eV");
      if (min >= 150 && max <= 3000) return say("nm", "wavelengths in nm");
      if (min >= 2000 && max <= 100000) return say("cm-1", "wave numbers in cm^-1");
      if (min >= 50 && max <= 1000) return say("THz", "frequencies in THz");
      return null;
  }
}

const VACUUM =
  /\b(vacuum|vac|vakuum|wave ?meters?|wellenlangenmesser|lambdameter|evacuated|evakuiert|sous vide|vide|vacio|purged)\b|lambdametre|wavemetre/;
const AIR = /\b(air|luft|aire)\b|\ba l ?air\b|dans l ?air/;
const LIGHT_TALK = /wave|wellen|onde|lambda|axis|achse|axe|spectr|spektr|medium|grating|calibrat|kalibr/;

/** What the file says about the medium, with the words that say it. */
function writtenMedium(table: Table, axis: Candidate): { medium: Medium; words: string } | null {
  const header = plainWords(axis.column.header);
  // "vacuum" in the axis header itself, then facts about the medium, then free text about the light axis.
  const texts: { text: string; sure: boolean; shown: string }[] = [
    { text: header, sure: true, shown: axis.column.header },
    ...table.facts.map((fact) => {
      const shown = `${fact.label}: ${fact.text}`;
      const text = plainWords(shown);
      return { text, sure: fact.key === "medium", shown };
    }),
    ...table.comments.map((comment) => ({ text: plainWords(comment), sure: false, shown: comment })),
  ];
  for (const { text, sure, shown } of texts) {
    // A sample held in vacuum says nothing about the spectrometer.
    if (!sure && !LIGHT_TALK.test(text) && !/wavemeter|lambdameter/.test(text)) continue;
    const vacuum = VACUUM.test(text);
    const air = AIR.test(text);
    if (vacuum !== air) return { medium: vacuum ? "vacuum" : "air", words: shown };
  }
  return null;
}

function readMedium(
  table: Table,
  axis: Candidate,
  unit: AxisUnit,
  choices: ReadingChoices,
  notes: Note[],
): Medium {
  const written = writtenMedium(table, axis);
  const wave = isWavelength(unit);
  const medium: Medium = choices.axis.medium ?? written?.medium ?? (wave ? "air" : "vacuum");
  const said = choices.axis.medium !== null || written !== null;
  const { air } = choices.axis;
  if (medium === "air") {
    const standard =
      air.temperature_C === STANDARD_AIR.temperature_C &&
      air.pressure_Pa === STANDARD_AIR.pressure_Pa &&
      air.humidity === STANDARD_AIR.humidity &&
      air.co2_ppm === STANDARD_AIR.co2_ppm;
    const why =
      choices.axis.medium !== null
        ? "axis.medium says air"
        : written !== null
          ? `the file says air ("${written.words}")`
          : "the file does not say air or vacuum, and gratings are calibrated in air";
    if (standard || !said) {
      const state = standard
        ? "standard air (15 C, 101325 Pa, dry, 450 ppm CO2)"
        : `air at ${air.temperature_C} C, ${air.pressure_Pa} Pa, humidity ${air.humidity}, ${air.co2_ppm} ppm CO2`;
      notes.push(
        assumption(
          standard ? "standard-air-assumed" : "air-assumed",
          ABOUT,
          `the light axis (${unit}) is converted with the index of ${state}: ${why}; near 571 nm read as vacuum every energy would be 0.60 meV higher, and each kelvin counts 2.1 µeV, each hPa 0.59 µeV`,
          "set axis.medium to air or vacuum, and axis.air.temperature_C, axis.air.pressure_Pa",
        ),
      );
    }
    if (!wave)
      notes.push(
        assumption(
          "energy-from-air",
          ABOUT,
          `the ${unit} axis is taken as computed from wavelengths in air without the index, and is divided by the index: ${why}`,
          "set axis.medium=vacuum where the axis is a true energy, wave number or frequency",
        ),
      );
  } else if (!said && (unit === "eV" || unit === "meV")) {
    notes.push(
      assumption(
        "energy-may-come-from-air",
        ABOUT,
        "the energies are taken as photon energies in vacuum; where an instrument made them from wavelengths in air without the index they are too high by a factor of about 1.00028 (0.60 meV at 2.17 eV)",
        "set axis.medium=air if the energies were made from air wavelengths, else axis.medium=vacuum",
      ),
    );
  }
  return medium;
}

function short(value: number): string {
  return String(Number(value.toPrecision(6)));
}
