import {
  assumption,
  doubt,
  failure,
  sha256,
  stopIfCancelled,
  success,
  type Note,
  type Result,
  type Watch,
} from "../base/index.ts";
import type { Protocol } from "../protocol/index.ts";
import { readSpectrum, signalColumns, type Spectrum, type SpectrumIssue } from "../spectrum/index.ts";
import { readTable, type HeaderFact, type Table, type TableIssue } from "../table/index.ts";
import { microwattsPer, powerByPattern, powerInFileName, powerInText, saysDark } from "./power-text.ts";
import type { PowerSeriesIssue } from "./series-issue.ts";

export type SeriesIssue = PowerSeriesIssue | TableIssue | SpectrumIssue;

/** One input file. */
export interface SeriesFile {
  readonly file: string;
  readonly bytes: Uint8Array;
}

export type PowerSource = "typed in" | "column header" | "header line" | "file name";

/** One spectrum of a series, with its power and where that was found. */
export interface SeriesMember {
  /** File, and the column where a file holds several. */
  readonly label: string;
  readonly power_uW: number;
  readonly power_from: PowerSource;
  readonly spectrum: Spectrum;
}

export interface PowerSeries {
  /** Ascending in power; repeats in the order given. The first is the reference. */
  readonly members: readonly SeriesMember[];
  /** What could not take part, and why; the rest was read. */
  readonly failed: readonly { readonly label: string; readonly issues: readonly SeriesIssue[] }[];
  readonly notes: readonly Note[];
}

/** One spectrum of the input before its power is known; null where its file could not be read. */
interface Entry {
  readonly label: string;
  readonly file: string;
  readonly header: string;
  readonly alone: boolean;
  readonly table: Table | null;
  readonly spectrum: Result<Spectrum, SeriesIssue>;
}

/** Less of the reference's range than this in common is said. */
const COMMON_RANGE = 0.8;
const SAME_WITHIN = 1.1;

/**
 * What      A power series from columns of one file, from several files, or both: every spectrum with its power, ascending.
 *           The power is, in this order, typed in (power.values_uW), found by power.file_pattern, in the column's header,
 *           in a header line of the file, in the file's name.
 * Domain    order free, repeats allowed, each spectrum on its own grid. What cannot be read, has no power or a negative one
 *           is left out and named; fewer than two powers are no series.
 */
export function readPowerSeries(
  files: readonly SeriesFile[],
  protocol: Protocol,
  watch: Watch,
): Result<PowerSeries, SeriesIssue> {
  const entries: Entry[] = [];
  for (const [i, file] of files.entries()) {
    stopIfCancelled(watch);
    watch.report(0.08 * (i / files.length), `reading ${file.file}`);
    entries.push(...entriesOf(file, protocol));
  }
  const typed = protocol.power.values_uW;
  if (typed !== null && typed.length !== entries.length)
    return failure({
      code: "power-series/values-count",
      facts: { file: namesOf(files), found: typed.length, expected: entries.length },
    });
  const notes: Note[] = [];
  const members: SeriesMember[] = [];
  const failed: { label: string; issues: readonly SeriesIssue[] }[] = [];
  entries.forEach((entry, i) => {
    if (!entry.spectrum.ok) {
      failed.push({ label: entry.label, issues: entry.spectrum.issues });
      return;
    }
    const power = typed === null ? findPower(entry, protocol, notes) : success(typedIn(typed[i]!));
    if (!power.ok) failed.push({ label: entry.label, issues: power.issues });
    else members.push({ label: entry.label, spectrum: entry.spectrum.value, ...power.value });
  });
  // Stable, so that repeats keep their order.
  members.sort((a, b) => a.power_uW - b.power_uW);
  const unit = members[0]?.spectrum.unit;
  const alike = members.filter((member) => {
    if (member.spectrum.unit === unit) return true;
    const facts = { file: member.label, found: inWords(member.spectrum.unit), expected: inWords(unit!) };
    failed.push({ label: member.label, issues: [{ code: "power-series/other-unit", facts }] });
    return false;
  });
  if (new Set(alike.map((member) => member.power_uW)).size < 2) {
    const facts = { file: namesOf(files), found: alike.length };
    return failure(
      ...failed.flatMap(({ issues }) => issues),
      ...(entries.length > failed.length || failed.length === 0
        ? [{ code: "power-series/too-few-powers", facts } as const]
        : []),
    );
  }
  return success({ members: alike, failed, notes: [...notes, ...compareMembers(alike)] });
}

const inWords = (unit: string): string => (unit === "1" ? "optical depth" : unit);
const typedIn = (power_uW: number): { power_uW: number; power_from: PowerSource } => ({
  power_uW,
  power_from: "typed in",
});

function namesOf(files: readonly SeriesFile[]): string {
  const names = files.map(({ file }) => file);
  return names.length <= 3 ? names.join(", ") : `${names.slice(0, 2).join(", ")} ... ${names.at(-1)!}`;
}

/** The spectra of one file: one, or one a signal column where their headers tell powers or powers are typed in. */
function entriesOf({ file, bytes }: SeriesFile, protocol: Protocol): Entry[] {
  const broken = (issues: readonly SeriesIssue[], table: Table | null): Entry[] => [
    { label: file, file, header: "", alone: true, table, spectrum: { ok: false, issues } },
  ];
  const { encoding, delimiter, decimal, header_line } = protocol.table;
  const read = readTable(file, bytes, {
    ...(encoding !== null && { encoding }),
    ...(delimiter !== null && { delimiter }),
    ...(decimal !== null && { decimal }),
    ...(header_line !== null && { headerLine: header_line }),
  });
  if (!read.ok) return broken(read.issues, null);
  const table = read.value;
  const digest = sha256(bytes);
  const isPower = (header: string): boolean => powerInText(header, protocol.power.unit) !== null;
  const several = protocol.signal.column === null && protocol.signal.quantity !== "counts";
  const columns = several
    ? signalColumns(table, protocol, (header) => isPower(header) || saysDark(header))
    : success([]);
  if (!columns.ok) return broken(columns.issues, table);
  const powers = columns.value.filter(({ header }) => isPower(header));
  const isSeries = powers.length > 0 || (protocol.power.values_uW !== null && columns.value.length > 1);
  if (!isSeries) {
    const spectrum = readSpectrum(table, digest, protocol);
    return spectrum.ok
      ? [{ label: file, file, header: "", alone: true, table, spectrum }]
      : broken(spectrum.issues, table);
  }
  return columns.value.map(({ column, header, sigma }): Entry => ({
    label: columns.value.length === 1 ? file : `${file}: ${header === "" ? `column ${column}` : header}`,
    file,
    header,
    alone: columns.value.length === 1,
    table,
    spectrum: readSpectrum(table, digest, {
      ...protocol,
      signal: { ...protocol.signal, column, sigma_column: protocol.signal.sigma_column ?? sigma },
    }),
  }));
}

type Found = Pick<SeriesMember, "power_uW" | "power_from">;

function findPower(entry: Entry, protocol: Protocol, notes: Note[]): Result<Found, PowerSeriesIssue> {
  const { unit, file_pattern: pattern } = protocol.power;
  const inFacts = entry.table === null ? null : factPower(entry.table.facts, unit);
  if (inFacts !== null && "issue" in inFacts && pattern === null && powerInText(entry.header, unit) === null)
    return failure({ code: "power-series/unknown-unit", facts: { file: entry.label, found: inFacts.issue } });
  const inFact = inFacts !== null && "issue" in inFacts ? null : inFacts;
  const sources: [PowerSource, { power_uW: number; unit: string | null } | null][] = [
    ["file name", pattern === null ? null : powerByPattern(entry.file, pattern, unit)],
    ["column header", darkOrPower(entry.header, unit)],
    // A header line speaks for the whole file: it cannot tell the columns of a series apart.
    ["header line", entry.alone ? inFact : null],
    ["file name", entry.alone ? powerInFileName(entry.file) : null],
  ];
  const given = sources.filter(([, power]) => power !== null);
  const [source, power] = given[0] ?? [null, null];
  if (source === null || power === null)
    return failure({ code: "power-series/no-power", facts: { file: entry.label } });
  if (power.power_uW < 0)
    return failure({
      code: "power-series/negative-power",
      facts: { file: entry.label, found: `${power.power_uW} uW` },
    });
  const others = given.filter(
    ([, other]) => Math.abs(other!.power_uW - power.power_uW) > 1e-6 * power.power_uW,
  );
  if (others.length > 0)
    notes.push(
      doubt(
        "power-sources-disagree",
        "power.spectra",
        `${entry.label}: the ${source} says ${power.power_uW} uW, the ${others[0]![0]} ${others[0]![1]!.power_uW} uW; the first was taken.`,
        "type the powers in (power.values_uW), or correct the one that is wrong",
      ),
    );
  if (power.unit === null && unit === null)
    notes.push(
      assumption(
        "power-unit-assumed",
        "power.spectra",
        "Powers without a unit are taken to be in uW.",
        "write the unit beside the power, or set power.unit",
      ),
    );
  if (source === "column header" && saysDark(entry.header))
    notes.push(
      assumption(
        "dark-is-zero-power",
        "power.spectra",
        `${entry.label} is taken for the spectrum without exciting light.`,
        "set signal.dark_column where it is the reading of a dark detector",
      ),
    );
  return success({ power_uW: power.power_uW, power_from: source });
}

function darkOrPower(header: string, unit: string | null): { power_uW: number; unit: string | null } | null {
  if (header === "") return null;
  return saysDark(header) ? { power_uW: 0, unit: "uW" } : powerInText(header, unit);
}

/** The header fact on power, or why it is none. */
function factPower(
  facts: readonly HeaderFact[],
  bareUnit: string | null,
): { power_uW: number; unit: string | null } | { issue: string } | null {
  const fact = facts.find((one) => one.key === "power");
  if (fact === undefined) return null;
  if (fact.value === null) {
    const found =
      powerInText(fact.text, bareUnit) ?? (saysDark(fact.text) ? { power_uW: 0, unit: "uW" } : null);
    return found ?? (/^off$/i.test(fact.text.trim()) ? { power_uW: 0, unit: "uW" } : null);
  }
  const perUnit = microwattsPer(fact.unit ?? bareUnit ?? "uW");
  if (perUnit === null) return { issue: fact.text };
  return { power_uW: Number((fact.value * perUnit).toPrecision(12)), unit: fact.unit };
}

/** Do these belong together? */
function compareMembers(members: readonly SeriesMember[]): Note[] {
  const notes: Note[] = [];
  const reference = members[0]!;
  const rangeOf = ({ spectrum }: SeriesMember): [number, number] => [
    spectrum.energy_eV[0]!,
    spectrum.energy_eV[spectrum.energy_eV.length - 1]!,
  ];
  const [low, high] = rangeOf(reference);
  const short = members.filter((member) => {
    const [from, to] = rangeOf(member);
    return Math.min(to, high) - Math.max(from, low) < COMMON_RANGE * (high - low);
  });
  if (short.length > 0)
    notes.push(
      doubt(
        "power-ranges-differ",
        "power.spectra",
        `${short.map(({ label }) => label).join(", ")}: less than ${100 * COMMON_RANGE} % of the reference's range of ${low.toFixed(4)} to ${high.toFixed(4)} eV; lines outside a spectrum are missing at its power.`,
        "measure all powers over the same range",
      ),
    );
  for (const key of ["sample", "temperature", "thickness"] as const) {
    const facts = members.flatMap(({ spectrum }) => spectrum.facts.filter((fact) => fact.key === key));
    const texts = new Set(facts.map((fact) => fact.text));
    const values = facts.map((fact) => fact.value).filter((value) => value !== null);
    // A drift of a few hundredths of a kelvin is no other temperature.
    if (key !== "sample" && !(Math.max(...values) > SAME_WITHIN * Math.min(...values))) continue;
    if (texts.size > 1)
      notes.push(
        doubt(
          `power-${key}-differs`,
          "power.spectra",
          `The files name different values for ${key}: ${[...texts].join(", ")}.`,
          key === "sample"
            ? "a power series is taken on one sample at one place"
            : `keep the ${key} the same, or leave out the files where it is not`,
        ),
      );
  }
  return notes;
}
